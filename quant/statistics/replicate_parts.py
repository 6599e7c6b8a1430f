"""How far results scatter when a sample is presented again: re-scans and re-packs, apart.

Variances are estimated, never clipped: one that comes out negative says that the part is too small to be seen.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray, IntArray
from quant.checks import as_matrix, as_vector
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.result import Result, documented


@dataclass(frozen=True, kw_only=True)
class ReplicateComponents(Result):
    """Variance among repeated presentations of a sample, in two layers."""

    scan_variance: float = documented("Variance among scans of one packing", "unit of the values, squared")
    scan_degrees_of_freedom: int = documented("Degrees of freedom of the scan variance")
    pack_variance: float | None = documented(
        "Variance among packings of one sample beyond that of scans; may be negative; None without re-packs",
        "unit of the values, squared",
    )
    pack_degrees_of_freedom: int = documented("Degrees of freedom among packings")

    def variance_of_mean(self, packs: int = 1, scans: int = 1) -> float:
        """Variance of the mean of `packs` packings with `scans` scans each. [unit of the values, squared]

        Raises
        ------
        ParameterError
            Fewer than one packing or scan.
        """
        if packs < 1 or scans < 1:
            raise ParameterError(f"packs = {packs}, scans = {scans}; expected 1 or more.")
        return (self.pack_variance or 0.0) / packs + self.scan_variance / (packs * scans)


def replicate_components(values: ArrayLike, samples: ArrayLike, packs: ArrayLike | None = None) -> ReplicateComponents:
    """Variance components of replicates, by nested analysis of variance: scans within packings within samples.

    Differences between samples play no part. Groups may differ in size: E[MS_pack] = σ_scan² + n0·σ_pack² with
    n0 = sum over samples of (N_s - sum(n_p²)/N_s) / degrees of freedom. Given predictions b'x of replicate spectra, the
    components are those of the result: the same as b'Σb with the components' covariances Σ of the spectra, which holds
    for any noise, white or not.

    Parameters
    ----------
    values : array of shape (n,)
        One value a scan, such as its prediction. [unit of the analyte]
    samples : array of shape (n,)
        Which sample each scan belongs to.
    packs : array of shape (n,), optional
        Which packing of that sample; the same mark in another sample is another packing. Without it all scans of a
        sample are of one packing.

    Raises
    ------
    SampleMismatchError
        The three differ in length.
    NotEnoughDataError
        No packing was scanned twice.
    ParameterError
        A value that is not finite.

    References
    ----------
    .. [1] S.R. Searle, G. Casella, C.E. McCulloch, Variance Components (1992), nested classification (from memory).
    """
    x = as_vector("values", values)
    sample = _group_numbers("samples", samples, x.size)
    mark = np.zeros(x.size, dtype=np.intp) if packs is None else _group_numbers("packs", packs, x.size)
    _, first, pack = np.unique(np.column_stack([sample, mark]), axis=0, return_index=True, return_inverse=True)
    pack = pack.ravel()
    in_pack, in_sample = np.bincount(pack), np.bincount(sample)
    pack_mean = np.bincount(pack, weights=x) / in_pack
    sample_mean = np.bincount(sample, weights=x) / in_sample
    scan_dof, pack_dof = x.size - in_pack.size, in_pack.size - in_sample.size
    if scan_dof < 1:
        raise NotEnoughDataError(
            f"{x.size} scans of {in_pack.size} packings; at least one packing has to be scanned twice."
        )
    scan_variance = float(np.sum((x - pack_mean[pack]) ** 2)) / scan_dof
    pack_variance = None
    if pack_dof > 0:
        owner = sample[first]
        mean_square = float(in_pack @ (pack_mean - sample_mean[owner]) ** 2) / pack_dof
        size = (x.size - float(np.sum(in_pack**2 / in_sample[owner]))) / pack_dof
        pack_variance = (mean_square - scan_variance) / size
    return ReplicateComponents(
        scan_variance=scan_variance,
        scan_degrees_of_freedom=scan_dof,
        pack_variance=pack_variance,
        pack_degrees_of_freedom=pack_dof,
    )


def replicate_covariance(spectra: ArrayLike, samples: ArrayLike) -> FloatArray:
    """Covariance Σ of the points among replicate spectra of one sample, pooled over samples.

    Parameters
    ----------
    spectra : array of shape (n, n_points)
        Preprocessed spectra. [ordinate]
    samples : array of shape (n,)
        Which sample (or packing) each belongs to.

    Returns
    -------
    array of shape (n_points, n_points)
        [ordinate, squared]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        No sample has two spectra.
    ParameterError
        Numbers that are not finite.
    """
    X = as_matrix("spectra", spectra)
    sample = _group_numbers("samples", samples, len(X))
    counts = np.bincount(sample)
    dof = len(X) - counts.size
    if dof < 1:
        raise NotEnoughDataError(f"{len(X)} spectra of {counts.size} samples; at least one sample needs two spectra.")
    means = np.zeros((counts.size, X.shape[1]))
    np.add.at(means, sample, X)
    deviation = X - (means / counts[:, np.newaxis])[sample]
    covariance: FloatArray = deviation.T @ deviation / dof
    return covariance


def propagated_variance(coefficients: ArrayLike, covariance: ArrayLike) -> float:
    """Variance b'Σb of a prediction from the covariance of a spectrum's points.

    Parameters
    ----------
    coefficients : array of shape (n_points,)
        Regression vector b. [unit of the analyte / ordinate]
    covariance : array of shape (n_points, n_points)
        Σ of the preprocessed spectrum; a derivative makes neighbours depend on each other. [ordinate, squared]

    Returns
    -------
    float
        [unit of the analyte, squared]

    Raises
    ------
    ParameterError
        Shapes that do not fit, or numbers that are not finite.
    """
    b, sigma = as_vector("coefficients", coefficients), as_matrix("covariance", covariance)
    if sigma.shape != (b.size, b.size):
        raise ParameterError(
            f"{b.size} coefficients and a covariance of shape {sigma.shape}; expected a square of them."
        )
    return float(b @ sigma @ b)


def _group_numbers(name: str, marks: ArrayLike, n: int) -> IntArray:
    labels = np.asarray(marks)
    if labels.shape != (n,):
        raise SampleMismatchError(f"{name} has shape {labels.shape}; one mark for each of {n} scans is expected.")
    return np.unique(labels, return_inverse=True)[1].ravel()
