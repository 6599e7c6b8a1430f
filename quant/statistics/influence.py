"""Which samples stand out or pull the model: studentised residuals, Cook's distance, agreement within the band.

Samples are named for a look, never removed. Residuals here are fitted errors (predicted - reference of calibration
samples) with their leverages, 1/n included, in a model of p terms (A factors and the mean: p = A + 1). For a PLS model
p counts too little, since factors bend towards the values; the figures are then guides, not exact tests.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray
from quant.checks import paired_vectors
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.result import Result, documented
from quant.statistics.quantiles import t_quantile


@dataclass(frozen=True, kw_only=True, eq=False)
class ReferenceAgreement(Result):
    """Do predictions agree with reference values within t·SEC·sqrt(1 + h)?"""

    n_samples: int = documented("Number of samples")
    n_within: int = documented("Samples whose error is smaller than their band")
    bands: FloatArray = documented("t·SEC·sqrt(1 + h) of each sample", "unit of the analyte")
    within: BoolArray = documented("Whether each sample's error is smaller than its band")
    share_required: float = documented("Share of samples that have to agree")
    passed: bool = documented("Whether that share agrees")


def studentised_residuals(residuals: ArrayLike, leverages: ArrayLike, n_terms: int) -> tuple[FloatArray, FloatArray]:
    """Internally and externally studentised residuals.

    Internal r = e/(s·sqrt(1 - h)), s² = sum(e²)/(n - p); external t = r·sqrt((n - p - 1)/(n - p - r²)), which is the
    left-out error over its standard error and of Student's distribution with n - p - 1 degrees of freedom.

    Parameters
    ----------
    residuals, leverages : array of shape (n_samples,)
        Fitted errors [unit of the analyte] and leverages, 1/n included.
    n_terms : int
        p, terms of the model: A + 1 with A factors and the mean.

    Returns
    -------
    tuple of two arrays of shape (n_samples,)
        Without unit. A sample of leverage 1, whose residual is always zero, has NaN.

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        n - p - 1 is below one, or all residuals are zero.
    ParameterError
        A value that is not finite, a leverage outside 0 to 1, or fewer than one term.

    References
    ----------
    .. [1] R.D. Cook, S. Weisberg, Residuals and Influence in Regression (1982) (from memory).
    """
    e, h = _checked(residuals, leverages, n_terms)
    dof = e.size - n_terms
    if dof < 2 or not e.any():
        raise NotEnoughDataError(
            f"{e.size} samples, {n_terms} terms, sum of squared residuals {e @ e:.3g}; studentised residuals need "
            f"{n_terms + 2} samples or more, and residuals that are not all zero."
        )
    free = 1 - h
    free[free <= 1e-12] = np.nan
    internal = e / np.sqrt(e @ e / dof * free)
    # r² reaches n - p where leaving the sample out leaves an exact fit: infinitely far out.
    room = np.maximum(dof - internal**2, 0.0)
    with np.errstate(divide="ignore"):
        external = internal * np.sqrt((dof - 1) / room)
    return internal, external


def bonferroni_limit(n_samples: int, n_terms: int, probability: float = 0.95) -> float:
    """Limit of externally studentised residuals that all of n good samples respect with the given probability.

    t(1 - α/(2n), n - p - 1), α = 1 - probability.

    Parameters
    ----------
    n_samples, n_terms : int
        n and p, as in `studentised_residuals`.
    probability : float
        Inside (0, 1).

    Raises
    ------
    NotEnoughDataError
        n - p - 1 is below one.
    ParameterError
        A probability outside (0, 1), or fewer than one sample.
    """
    if n_samples < 1 or not 0 < probability < 1:
        raise ParameterError(f"{n_samples} samples, probability = {probability}; expected 1 or more, inside (0, 1).")
    return t_quantile(1 - (1 - probability) / (2 * n_samples), n_samples - n_terms - 1)


def cooks_distance(residuals: ArrayLike, leverages: ArrayLike, n_terms: int) -> FloatArray:
    """Cook's distance r²/p · h/(1 - h): how far all fitted values move when the sample is left out, over p·s².

    Parameters
    ----------
    residuals, leverages : array of shape (n_samples,)
        Fitted errors [unit of the analyte] and leverages, 1/n included.
    n_terms : int
        p, terms of the model: A + 1 with A factors and the mean.

    Returns
    -------
    array of shape (n_samples,)
        Without unit; above 1 the sample pulls hard (rule of thumb). NaN at leverage 1.

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        n - p - 1 is below one, or all residuals are zero.
    ParameterError
        A value that is not finite, a leverage outside 0 to 1, or fewer than one term.

    References
    ----------
    .. [1] R.D. Cook, Technometrics 19 (1977) 15-18 (from memory).
    """
    _, h = _checked(residuals, leverages, n_terms)
    internal, _ = studentised_residuals(residuals, leverages, n_terms)
    with np.errstate(divide="ignore"):
        distance: FloatArray = internal**2 / n_terms * h / (1 - h)
    return distance


def reference_agreement(
    predicted: ArrayLike,
    reference: ArrayLike,
    leverages: ArrayLike,
    standard_error_of_calibration: float,
    degrees_of_freedom: float,
    *,
    probability: float = 0.95,
    share_required: float = 0.95,
) -> ReferenceAgreement:
    """Compare errors of validation samples with their bands |ŷ - y| < t·SEC·sqrt(1 + h).

    Parameters
    ----------
    predicted, reference, leverages : arrays of shape (n_samples,)
        Predictions and reference values [unit of the analyte]; leverages, 1/n included.
    standard_error_of_calibration : float
        SEC. [unit of the analyte]
    degrees_of_freedom : float
        Of SEC: n - A - 1.
    probability : float
        Two-sided, of t, inside (0, 1).
    share_required : float
        Share of samples that have to agree, from 0 to 1.

    Raises
    ------
    SampleMismatchError
        Predictions, reference values and leverages differ in number.
    NotEnoughDataError
        There is no sample, or no degree of freedom.
    ParameterError
        A value that is not finite, negative leverages or SEC, or a share or probability out of bounds.

    References
    ----------
    .. [1] ASTM E1655-05(2012), validation (from memory; to be confirmed against the edition in force).
    """
    x, y = paired_vectors("predicted values", predicted, "reference values", reference)
    h = np.asarray(leverages, dtype=np.float64)
    if h.shape != x.shape:
        raise SampleMismatchError(f"{h.size} leverages for {x.size} samples; one each is expected.")
    if not ((h >= 0).all() and standard_error_of_calibration >= 0 and 0 <= share_required <= 1):
        raise ParameterError("leverages and SEC must not be negative, and the share required has to be from 0 to 1.")
    bands = t_quantile(0.5 + probability / 2, degrees_of_freedom) * standard_error_of_calibration * np.sqrt(1 + h)
    within = np.abs(x - y) < bands
    n_within = int(np.count_nonzero(within))
    return ReferenceAgreement(
        n_samples=x.size,
        n_within=n_within,
        bands=bands,
        within=within,
        share_required=share_required,
        passed=n_within >= share_required * x.size * (1 - 1e-12),
    )


def _checked(residuals: ArrayLike, leverages: ArrayLike, n_terms: int) -> tuple[FloatArray, FloatArray]:
    e, h = paired_vectors("residuals", residuals, "leverages", leverages)
    if n_terms < 1:
        raise ParameterError(f"n_terms = {n_terms}; expected 1 or more: the factors and the mean.")
    if (h < 0).any() or (h > 1 + 1e-9).any():
        raise ParameterError("leverages of fitted samples lie between 0 and 1; were those of new samples given?")
    return e, h
