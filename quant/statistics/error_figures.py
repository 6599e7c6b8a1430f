"""The single figures of merit: how far predicted values are from reference values.

Error = predicted - reference, throughout. One meaning each:
RMSE (RMSEC, RMSECV, RMSEP) divides by n; SEC by n - A - 1; SEP, free of the bias, by n - 1.
"""

import math

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import paired_vectors
from quant.errors import NotEnoughDataError, ParameterError


def rmse(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Root mean square error: sqrt(sum(error²) / n). [unit of the analyte]

    Named RMSEC, RMSECV or RMSEP after the samples it is taken of.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        There is no pair.
    ParameterError
        A value that is not finite.
    """
    return math.sqrt(press(predicted, reference) / np.size(predicted))


def press(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Sum of squared errors; of left-out samples, PRESS. [unit of the analyte, squared]

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        There is no pair.
    ParameterError
        A value that is not finite.
    """
    error = _errors(predicted, reference)
    return float(error @ error)


def bias(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Mean error, above zero where predictions are too high. [unit of the analyte]

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        There is no pair.
    ParameterError
        A value that is not finite.
    """
    return float(_errors(predicted, reference).mean())


def sep(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Standard error of prediction, the scatter once the bias is removed. [unit of the analyte]

    sqrt(sum((error - bias)²) / (n - 1)).

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two pairs.
    ParameterError
        A value that is not finite.

    References
    ----------
    .. [1] ISO 12099:2017, clause 6 (from memory). ASTM E1655 calls the same number SDV (from memory).
    """
    return float(_errors(predicted, reference, least=2).std(ddof=1))


def standard_error_of_calibration(predicted: ArrayLike, reference: ArrayLike, n_factors: int) -> float:
    """Standard error of calibration of a mean-centred model with A factors. [unit of the analyte]

    sqrt(sum(error²) / (n - A - 1)).

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        Fitted values of the calibration samples, and their reference values. [unit of the analyte]
    n_factors : int
        A, not below 0.

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        n - A - 1 is below one.
    ParameterError
        A value that is not finite, or a negative number of factors.

    References
    ----------
    .. [1] ASTM E1655-05(2012), SEC of a mean-centred model (from memory).
    """
    if n_factors < 0:
        raise ParameterError(f"n_factors = {n_factors}; expected 0 or more.")
    dof = np.size(predicted) - n_factors - 1
    sum_of_squares = press(predicted, reference)
    if dof < 1:
        raise NotEnoughDataError(
            f"{np.size(predicted)} samples and {n_factors} factors leave no degree of freedom; "
            f"at least {n_factors + 2} samples are needed for a standard error of calibration."
        )
    return math.sqrt(sum_of_squares / dof)


def q2(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Q² = 1 - PRESS/SST of left-out predictions, SST about the mean of all `reference` values given here.

    That is the mean of the whole calibration set, not of each training set. The mean model has a Q² below zero,
    1 - (n/(n - 1))² where one sample is left out at a time.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        Left-out predictions and reference values of the calibration samples, two at least. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two pairs, or reference values that do not differ.
    ParameterError
        A value that is not finite.
    """
    return r2_determination(predicted, reference)


def r2_determination(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Coefficient of determination 1 - SSE/SST, SST about the mean of the `reference` values given here.

    For a test set that is the test set's own mean. Unlike the squared correlation it counts bias and false slope
    as error, and is negative where the mean would have been the better prediction.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two pairs, or reference values that do not differ.
    ParameterError
        A value that is not finite.
    """
    x, y = _pairs(predicted, reference, least=2)
    centred = y - y.mean()
    _refuse_no_spread("reference", y)
    return 1.0 - press(x, y) / float(centred @ centred)


def correlation_squared(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Square of Pearson's correlation; blind to bias and slope, and never a substitute for an error.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two pairs, or predicted or reference values that do not differ.
    ParameterError
        A value that is not finite.
    """
    x, y = _pairs(predicted, reference, least=2)
    _refuse_no_spread("predicted", x)
    _refuse_no_spread("reference", y)
    dx, dy = x - x.mean(), y - y.mean()
    correlation = float((dx / np.linalg.norm(dx)) @ (dy / np.linalg.norm(dy)))
    return min(correlation**2, 1.0)  # rounding may exceed one


def rpd(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Ratio of performance to deviation: SD(reference of the same set, n - 1) / SEP.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two pairs, or errors that do not differ.
    ParameterError
        A value that is not finite.
    """
    x, y = _pairs(predicted, reference, least=2)
    return float(y.std(ddof=1)) / _sep_above_zero(x, y)


def range_error_ratio(predicted: ArrayLike, reference: ArrayLike) -> float:
    """Range error ratio: (largest - smallest reference value) / SEP.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two pairs, or errors that do not differ.
    ParameterError
        A value that is not finite.
    """
    x, y = _pairs(predicted, reference, least=2)
    return float(np.ptp(y)) / _sep_above_zero(x, y)


def no_spread(values: FloatArray, size: float) -> bool:
    """Tell whether `values` differ by no more than rounding does in numbers as large as `size`."""
    return bool(np.std(values) <= 8 * np.finfo(np.float64).eps * size)


def _pairs(predicted: ArrayLike, reference: ArrayLike, least: int = 1) -> tuple[FloatArray, FloatArray]:
    return paired_vectors("predicted values", predicted, "reference values", reference, least=least)


def _errors(predicted: ArrayLike, reference: ArrayLike, least: int = 1) -> FloatArray:
    x, y = _pairs(predicted, reference, least)
    return x - y


def _refuse_no_spread(name: str, values: FloatArray) -> None:
    if no_spread(values, float(np.abs(values).max())):
        raise NotEnoughDataError(
            f"all {values.size} {name} values are {values[0]:.6g}; samples that differ are needed for this figure."
        )


def _sep_above_zero(predicted: FloatArray, reference: FloatArray) -> float:
    error = predicted - reference
    if no_spread(error, float(max(np.abs(predicted).max(), np.abs(reference).max()))):
        raise NotEnoughDataError(
            f"the {error.size} errors are all {error[0]:.6g}, so that SEP is zero and no ratio to it exists. "
            "Were predicted values given as reference values?"
        )
    return sep(predicted, reference)
