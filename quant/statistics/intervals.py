"""Uncertainty of one prediction. On the everyday prediction path, hence NumPy only; quantiles come from the caller.

Leverages include the term 1/n of a mean-centred model. Nothing is clipped to zero: an interval about a small
prediction may reach below it, and says so.
"""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError

NOT_RESOLVABLE = "not resolvable from laboratory error"


def base_variance(errors: ArrayLike, leverages: ArrayLike) -> float:
    """Variance s0² of a result before its own leverage counts: mean of e²/(1 + h) over left-out samples.

    Parameters
    ----------
    errors : array of shape (n_samples,) or (n_repeats, n_samples)
        Predicted - reference of left-out samples; repeats of the cross-validation are pooled. [unit of the analyte]
    leverages : array of the same shape
        Leverage of each sample, 1/n included, in the model it was left out of.

    Returns
    -------
    float
        s0². [unit of the analyte, squared]

    Raises
    ------
    SampleMismatchError
        The shapes differ.
    NotEnoughDataError
        There is no error at all.
    ParameterError
        An error that is not finite, or a leverage that is negative or not finite.
    """
    error, leverage = np.asarray(errors, dtype=np.float64), _leverage(leverages)
    if error.shape != leverage.shape:
        raise SampleMismatchError(f"errors have shape {error.shape}, leverages {leverage.shape}; one each is expected.")
    if error.size == 0:
        raise NotEnoughDataError("there are no errors of left-out samples; cross-validate first.")
    if not np.isfinite(error).all():
        raise ParameterError("errors of left-out samples hold numbers that are not finite; leave those samples out.")
    return float(np.mean(error**2 / (1 + leverage)))


def standard_error(s0: float, leverage: ArrayLike, added: float | FloatArray = 0.0) -> FloatArray:
    """Standard error sqrt(s0²(1 + h) + added) of a prediction against a new *reference result*.

    Parameters
    ----------
    s0 : float
        Square root of `base_variance`. [unit of the analyte]
    leverage : float or array of shape (n_samples,)
        Leverages of the new samples, 1/n included.
    added : float or array of shape (n_samples,)
        Variance that left-out samples did not have, such as that of fewer replicates. [unit of the analyte, squared]

    Returns
    -------
    array in the shape of `leverage`
        [unit of the analyte]

    Raises
    ------
    ParameterError
        A negative or non-finite leverage or s0.
    """
    return np.asarray(np.sqrt(_standard_deviation("s0", s0) ** 2 * (1 + _leverage(leverage)) + added))


def true_value_share(error: float, base: float, laboratory: float) -> float | None:
    """Share of an interval's half-width that is left when it is to hold the *true value*, or None.

    The variance of a result holds the laboratory's own variance; without it the half-width is smaller by
    sqrt(1 - laboratory²/error²). Where the laboratory's variance is more than half of the base variance, the difference
    is mostly chance: None is returned, and the text to print is `NOT_RESOLVABLE`.

    Parameters
    ----------
    error : float
        Standard error against a new reference result. [unit of the analyte]
    base : float
        Square root of `base_variance`, never above `error`. [unit of the analyte]
    laboratory : float
        Standard error of one laboratory value. [unit of the analyte]

    Raises
    ------
    ParameterError
        A negative or non-finite standard error.

    References
    ----------
    .. [1] N.M. Faber, R. Bro, Chemom. Intell. Lab. Syst. 61 (2002) 133-149, whose estimate subtracts the reference
       variance in the same way (from memory; the bound of one half is this program's own).
    """
    total, part = _standard_deviation("error", error), _standard_deviation("laboratory", laboratory)
    if part**2 > _standard_deviation("base", base) ** 2 / 2:
        return None
    return float(np.sqrt(1 - (part / total) ** 2)) if total > 0 else 1.0


def _leverage(values: ArrayLike) -> FloatArray:
    leverage = np.asarray(values, dtype=np.float64)
    if not (np.isfinite(leverage).all() and (leverage >= 0).all()):
        raise ParameterError("a leverage is negative or not finite; expected 1/n or more, as the model computes it.")
    return leverage


def _standard_deviation(name: str, value: float) -> float:
    if not (np.isfinite(value) and value >= 0):
        raise ParameterError(f"{name} = {value}; expected a standard deviation, finite and not negative.")
    return value
