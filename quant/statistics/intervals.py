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


def prediction_interval(value: ArrayLike, s0: float, leverage: ArrayLike, t: float) -> tuple[FloatArray, FloatArray]:
    """Lower and upper end of value ± t·s0·sqrt(1 + h): where a new *reference result* of the sample is expected.

    Parameters
    ----------
    value : float or array of shape (n_samples,)
        Predictions. [unit of the analyte]
    s0 : float
        Square root of `base_variance`. [unit of the analyte]
    leverage : float or array of shape (n_samples,)
        Leverages of the new samples, 1/n included.
    t : float
        Quantile of Student's t, t(0.975, n - A - 1) for 95 %.

    Returns
    -------
    tuple of two arrays
        Lower and upper ends, in the shape of `value`; numbers where that is a number. [unit of the analyte]

    Raises
    ------
    ParameterError
        A negative or non-finite leverage or s0.
    """
    centre = np.asarray(value, dtype=np.float64)
    half_width = t * _standard_deviation("s0", s0) * np.sqrt(1 + _leverage(leverage))
    return centre - half_width, centre + half_width


def true_value_variance(s0: float, leverage: ArrayLike, s_ref: float) -> FloatArray | None:
    """Variance of a prediction about the *true value*: s0²(1 + h) - s_ref², or None.

    s0² holds the laboratory's own variance s_ref². Where that is more than half of it, the difference is mostly chance:
    None is returned, and the text to print is `NOT_RESOLVABLE`.

    Parameters
    ----------
    s0, s_ref : float
        Square root of `base_variance`; standard deviation of the laboratory value of one sample. [unit of the analyte]
    leverage : float or array of shape (n_samples,)
        Leverages of the new samples, 1/n included.

    Returns
    -------
    array or None
        In the shape of `leverage`. [unit of the analyte, squared]

    Raises
    ------
    ParameterError
        A negative or non-finite leverage or standard deviation.

    References
    ----------
    .. [1] N.M. Faber, R. Bro, Chemom. Intell. Lab. Syst. 61 (2002) 133-149, whose estimate subtracts the reference
       variance in the same way (from memory; the bound of one half is this program's own).
    """
    total, laboratory = _standard_deviation("s0", s0) ** 2, _standard_deviation("s_ref", s_ref) ** 2
    h = _leverage(leverage)
    if laboratory > total / 2:
        return None
    return total * (1 + h) - laboratory


def _leverage(values: ArrayLike) -> FloatArray:
    leverage = np.asarray(values, dtype=np.float64)
    if not (np.isfinite(leverage).all() and (leverage >= 0).all()):
        raise ParameterError("a leverage is negative or not finite; expected 1/n or more, as the model computes it.")
    return leverage


def _standard_deviation(name: str, value: float) -> float:
    if not (np.isfinite(value) and value >= 0):
        raise ParameterError(f"{name} = {value}; expected a standard deviation, finite and not negative.")
    return value
