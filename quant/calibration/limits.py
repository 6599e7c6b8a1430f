"""Limits of applicability and the parts of intervals, from samples that were left out."""

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.errors import NotEnoughDataError
from quant.model.calibration import Limits, Uncertainty
from quant.regression.method import Method
from quant.spectra.reference_table import Analyte
from quant.spectra.sample_set import SampleSet
from quant.statistics.intervals import base_variance
from quant.statistics.quantiles import t_quantile, upper_limit

WARN = 0.95  # share of good new samples that pass each warning limit
# Shares of good new samples lost to each criterion's "not applicable" limit, together at most 1 % (Bonferroni).
LOST_TO_RESIDUAL, LOST_TO_LEVERAGE, LOST_TO_RANGE = 0.003, 0.003, 0.002
NUMERICAL_RESIDUAL = 1e-18  # share of a spectrum's sum of squares below which a residual is rounding error


def applicability_limits(
    result: CrossValidationResult, factors: int, processed: FloatArray, degrees_of_freedom: int
) -> Limits:
    """Return the limits of a model with a number of factors.

    Residuals and leverages of calibration samples are smaller than those of good new ones, because the model was fitted
    to them; left-out samples are as new ones are. Leverages are near to chi-square, so that their limit is found on
    cube roots; residuals are sums of a few effects of very different size (noise, vapour, baseline) and take
    logarithms.

    Parameters
    ----------
    result : CrossValidationResult
    factors : int
        The number chosen.
    processed : array of shape (n_spectra, n_points_after)
        Processed calibration spectra, for the level of rounding errors.
    degrees_of_freedom : int
        Of the residual variance.
    """
    _, leverage, residual = result.at(factors)
    units, base = result.n_units, 1 / result.n_samples  # 1/n is the least leverage there is; its excess varies
    excess = np.maximum(leverage.mean(axis=0) - base, 0.0)
    floor = NUMERICAL_RESIDUAL * float(np.mean(np.sum(processed**2, axis=1)))
    rest = np.maximum(residual.mean(axis=0), floor)
    return Limits(
        residual_warn=upper_limit(rest, units, WARN, "logarithm"),
        residual_stop=upper_limit(rest, units, 1 - LOST_TO_RESIDUAL, "logarithm"),
        leverage_warn=base + upper_limit(excess, units, WARN),
        leverage_stop=base + upper_limit(excess, units, 1 - LOST_TO_LEVERAGE),
        lowest=float(result.reference.min()),
        highest=float(result.reference.max()),
        margin_t=t_quantile(1 - LOST_TO_RANGE, degrees_of_freedom),
    )


def interval_parts(
    result: CrossValidationResult, factors: int, samples: SampleSet, analyte: Analyte, degrees_of_freedom: int
) -> Uncertainty:
    """Return what the intervals of a model with a number of factors are made of."""
    predicted, leverage, _ = result.at(factors)
    variance = float(result.replicate_variance[result.factor_counts.index(factors)])
    return Uncertainty(
        s0=float(np.sqrt(base_variance(predicted - result.reference, leverage))),
        t=t_quantile(0.975, degrees_of_freedom),
        degrees_of_freedom=degrees_of_freedom,
        laboratory_error=analyte.laboratory_error,
        replicate_sd=None if np.isnan(variance) else float(np.sqrt(variance)),
        replicates=float(1 / np.mean(1 / samples.replicates)),
    )


def degrees_of_freedom(method: Method, n_samples: int, factors: int) -> int:
    """Return the degrees of freedom of the residual variance, at least one.

    Raises
    ------
    NotEnoughDataError
        The model has as many terms as there are samples.
    """
    left = method.residual_degrees_of_freedom(n_samples, factors)
    if left < 1:
        raise NotEnoughDataError(
            f"{n_samples} samples leave no degree of freedom for {factors} factors; expected at least "
            f"{factors + 2} samples. Add samples, or lower factors under [regression]."
        )
    return left
