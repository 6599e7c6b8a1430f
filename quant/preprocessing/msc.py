"""Multiplicative scatter correction."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector, name_some
from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.estimator.base import Step
from quant.estimator.input import check_weights
from quant.preprocessing.centre import mean_spectrum
from quant.preprocessing.rounding import vanishes

LEAST_CORRELATION = 1e-6  # a spectrum that shares less than this with the reference would be divided by mere noise


def msc(spectra: ArrayLike, reference: ArrayLike) -> FloatArray:
    """Fit each spectrum x = a + b·reference by least squares and return (x − a)/b.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    reference : array of shape (points,)
        Usually the mean of the training spectra. [unit of `spectra`]

    Returns
    -------
    array of shape (spectra, points)
        [unit of `spectra`]

    Raises
    ------
    NotEnoughDataError
        Fewer than two points.
    ParameterError
        A reference of another length.
    QuantityError
        A flat reference, or a spectrum whose slope b cannot be told from zero.

    References
    ----------
    .. [1] P. Geladi, D. MacDougall, H. Martens, Applied Spectroscopy 39 (1985) 491-500; from memory.
    """
    X, r = as_matrix("spectra", spectra), as_vector("reference", reference)
    if r.size != X.shape[1]:
        raise ParameterError(f"The reference spectrum has {r.size} points, the spectra {X.shape[1]}; expected as many.")
    deviation = centred_reference(r)
    mean = X.mean(axis=1)
    slope = X @ deviation / (deviation @ deviation)
    shared = np.abs(slope) * np.linalg.norm(deviation)  # length of the part of each spectrum that follows the reference
    total = np.linalg.norm(X - mean[:, np.newaxis], axis=1)
    bad = np.flatnonzero((shared <= LEAST_CORRELATION * total) | vanishes(shared, np.abs(X).max(axis=1)))
    if bad.size:
        raise QuantityError(
            f"{bad.size} spectra have nothing in common with the reference spectrum (slope about 0), in row(s) "
            f"{name_some(bad)} (counted from 0); expected spectra of the same kind. Leave them out, or measure them "
            "again."
        )
    result: FloatArray = (X - mean[:, np.newaxis]) / slope[:, np.newaxis] + r.mean()
    return result


def centred_reference(reference: FloatArray) -> FloatArray:
    """Return the reference minus its mean, shape (points,).

    Raises
    ------
    NotEnoughDataError
        Fewer than two points.
    QuantityError
        It is flat: no slope can be fitted on it.
    """
    if reference.size < 2:
        raise NotEnoughDataError(f"Scatter correction needs at least two points; found n_features = {reference.size}.")
    deviation: FloatArray = reference - reference.mean()
    if vanishes(np.abs(deviation), np.abs(reference).max()).all():
        raise QuantityError(
            "The reference spectrum (the mean of the training spectra) is flat; expected one that varies along the "
            "axis. Check the spectra and the ranges kept."
        )
    return deviation


class MSC(Step):
    """Remove offset and scale against the weighted mean of the training spectra (multiplicative scatter correction)."""

    name: ClassVar[str] = "msc"
    learns = True
    fitted = ("reference_",)

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:  # noqa: ARG002
        """Take the weighted mean of the training spectra as reference."""
        matrix = self.check_fit(X)
        reference = mean_spectrum(matrix, check_weights(sample_weight, matrix.shape[0]))
        centred_reference(reference)
        self.reference_ = reference
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return corrected spectra, shape (n, points)."""
        return msc(self.check_new(X), self.reference_)
