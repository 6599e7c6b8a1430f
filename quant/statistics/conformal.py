"""Prediction intervals without a distribution: jackknife+ and CV+. NumPy only: everyday prediction may pass here.

What they promise is *marginal* coverage: over many calibration sets and new samples of the same kind, the stated share
of intervals holds the new reference value (in the worst case the share `coverage_floor` gives). They do not promise it
for each level, each batch or this one calibration. Where errors grow with the content, intervals of constant width
cover too much at the low end and too little at the high end; residuals scaled by a level function mend that.
"""

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector, paired_vectors
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError

ROUNDING = 1e-9  # (1 - 0.9)·10 is below 1 in binary; a rank must not depend on that


class Intervals(NamedTuple):
    """Ends of intervals, each of shape (n_new,); infinite where the calibration set is too small. [unit of y]"""

    low: FloatArray
    high: FloatArray


def jackknife_plus(
    left_out_predictions: ArrayLike,
    residuals: ArrayLike,
    probability: float = 0.9,
    *,
    scales: ArrayLike | None = None,
    new_scales: ArrayLike | None = None,
) -> Intervals:
    """Jackknife+ intervals of new samples.

    With α = 1 - probability: from the floor(α(n + 1))-th smallest of μ_-i(x) - R_i to the ceil((1 - α)(n + 1))-th
    smallest of μ_-i(x) + R_i. A rank of 0 or above n gives an infinite end.

    Parameters
    ----------
    left_out_predictions : array of shape (n_samples, n_new)
        μ_-i(x): predictions of the new samples by the model that never saw sample i. [unit of the analyte]
    residuals : array of shape (n_samples,)
        R_i = |y_i - μ_-i(x_i)|; signs are ignored. [unit of the analyte]
    probability : float
        Marginal coverage asked for, inside (0, 1); what is guaranteed is `coverage_floor`.
    scales : array of shape (n_samples,), optional
        Level function at μ_-i(x_i), above zero: R_i is divided by it.
    new_scales : array of shape (n_new,) or (n_samples, n_new), optional
        Level function at the new samples, by which the scaled residuals are multiplied. Both scales or none.

    Raises
    ------
    SampleMismatchError
        Shapes that do not fit together.
    NotEnoughDataError
        There is no residual.
    ParameterError
        A probability outside (0, 1), numbers that are not finite, scales not above zero, or one of the scales alone.

    References
    ----------
    .. [1] R.F. Barber, E.J. Candès, A. Ramdas, R.J. Tibshirani, Ann. Statist. 49 (2021) 486-507 (ranks from memory).
    """
    predictions, r = as_matrix("left_out_predictions", left_out_predictions), np.abs(as_vector("residuals", residuals))
    if len(predictions) != r.size:
        raise SampleMismatchError(f"predictions by {len(predictions)} left-out models, but {r.size} residuals.")
    if r.size == 0:
        raise NotEnoughDataError("there are no residuals of left-out samples; cross-validate first.")
    half = _half_widths(r, scales, new_scales, predictions.shape)
    lower, upper = ranks(r.size, probability)
    below = np.sort(predictions - half, axis=0)
    above = np.sort(predictions + half, axis=0)
    infinite = np.full(predictions.shape[1], np.inf)
    return Intervals(below[lower - 1] if lower >= 1 else -infinite, above[upper - 1] if upper <= r.size else infinite)


def cv_plus(
    fold_predictions: ArrayLike,
    fold_of_sample: ArrayLike,
    residuals: ArrayLike,
    probability: float = 0.9,
    *,
    scales: ArrayLike | None = None,
    new_scales: ArrayLike | None = None,
) -> Intervals:
    """CV+ intervals: jackknife+ with the model that never saw the sample's fold.

    Parameters
    ----------
    fold_predictions : array of shape (n_folds, n_new)
        Predictions of the new samples by the model of each fold. [unit of the analyte]
    fold_of_sample : array of shape (n_samples,)
        Fold that each sample was left out with, counted from 0.
    residuals, probability, scales, new_scales
        As `jackknife_plus` takes them; `new_scales` in two dimensions has one row a sample.

    Raises
    ------
    SampleMismatchError
        Shapes that do not fit together.
    NotEnoughDataError
        There is no residual.
    ParameterError
        A fold that does not exist, or as in `jackknife_plus`.

    References
    ----------
    .. [1] R.F. Barber, E.J. Candès, A. Ramdas, R.J. Tibshirani, Ann. Statist. 49 (2021) 486-507 (from memory).
    """
    predictions, fold = as_matrix("fold_predictions", fold_predictions), np.asarray(fold_of_sample)
    if fold.ndim != 1 or not np.issubdtype(fold.dtype, np.integer) or not np.isin(fold, range(len(predictions))).all():
        raise ParameterError(f"fold_of_sample must hold whole numbers from 0 to {len(predictions) - 1}, one a sample.")
    return jackknife_plus(predictions[fold], residuals, probability, scales=scales, new_scales=new_scales)


def ranks(n_samples: int, probability: float) -> tuple[int, int]:
    """Ranks of the ends, counted from 1: floor(α(n + 1)) and ceil((1 - α)(n + 1)), α = 1 - probability.

    Parameters
    ----------
    n_samples : int
        Number of residuals.
    probability : float
        Inside (0, 1).

    Raises
    ------
    ParameterError
        A probability outside (0, 1).
    """
    _check_probability(probability)
    whole = n_samples + 1
    return math.floor((1 - probability) * whole + ROUNDING), math.ceil(probability * whole - ROUNDING)


def least_samples(probability: float) -> int:
    """Fewest samples with which both ends of an interval are finite: 19 for 95 %, 9 for 90 %.

    Parameters
    ----------
    probability : float
        Inside (0, 1).

    Raises
    ------
    ParameterError
        A probability outside (0, 1).
    """
    _check_probability(probability)
    return max(1, math.ceil(1 / (1 - probability) - 1 - ROUNDING))


def coverage_floor(n_samples: int, probability: float, n_folds: int | None = None) -> float:
    """Coverage that is guaranteed whatever the model: 1 - 2α for jackknife+, less a term for CV+.

    The term is min{2(1 - 1/K)/(n/K + 1), (1 - K/n)/(K + 1)}. Ordinary models come close to 1 - α instead.

    Parameters
    ----------
    n_samples : int
        n, 1 at least.
    probability : float
        1 - α, inside (0, 1).
    n_folds : int, optional
        K, from 2 to n, for CV+; left out for jackknife+.

    Raises
    ------
    ParameterError
        A probability outside (0, 1), or a number of folds that does not fit.

    References
    ----------
    .. [1] R.F. Barber, E.J. Candès, A. Ramdas, R.J. Tibshirani, Ann. Statist. 49 (2021) 486-507 (from memory).
    """
    _check_probability(probability)
    floor = 1 - 2 * (1 - probability)
    if n_folds is None:
        return floor
    if not 2 <= n_folds <= n_samples:
        raise ParameterError(f"n_folds = {n_folds} with {n_samples} samples; expected 2 up to the number of samples.")
    size = n_samples / n_folds
    return floor - min(2 * (1 - 1 / n_folds) / (size + 1), (1 - n_folds / n_samples) / (n_folds + 1))


@dataclass(frozen=True, kw_only=True)
class LevelFunction:
    """How large errors are at a level: intercept + slope·level, never below `least`.

    Attributes
    ----------
    intercept, slope, least : float
        [unit of the analyte], [none], [unit of the analyte]
    """

    intercept: float
    slope: float
    least: float

    def __call__(self, level: ArrayLike) -> FloatArray:
        """Size of errors at `level`, in its shape. [unit of the analyte]"""
        return np.maximum(self.intercept + self.slope * np.asarray(level, dtype=np.float64), self.least)


def fit_level_function(left_out_predicted: ArrayLike, residuals: ArrayLike) -> LevelFunction:
    """Fit the size of errors as a line in the level, by least squares of |error| on the left-out prediction.

    The floor is a tenth of the mean absolute error, so that no interval vanishes where the line meets zero.

    Parameters
    ----------
    left_out_predicted : array of shape (n_samples,)
        Left-out predictions, on which new samples' levels can be had too. [unit of the analyte]
    residuals : array of shape (n_samples,)
        Their errors; signs are ignored. [unit of the analyte]

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than three samples, or errors that are all zero.
    ParameterError
        Numbers that are not finite.
    """
    level, error = paired_vectors("left-out predictions", left_out_predicted, "residuals", residuals, least=3)
    size = np.abs(error)
    mean = float(size.mean())
    if mean == 0:
        raise NotEnoughDataError("all errors of left-out samples are zero; their size cannot be told from the level.")
    distance = level - level.mean()
    spread = float(distance @ distance)
    slope = float(distance @ size) / spread if spread > 0 else 0.0
    return LevelFunction(intercept=mean - slope * float(level.mean()), slope=slope, least=mean / 10)


def _half_widths(
    residuals: FloatArray, scales: ArrayLike | None, new_scales: ArrayLike | None, shape: tuple[int, ...]
) -> FloatArray:
    if scales is None and new_scales is None:
        return residuals[:, np.newaxis]
    if scales is None or new_scales is None:
        raise ParameterError("scales of the samples and of the new samples belong together; give both or none.")
    own, new = as_vector("scales", scales), np.atleast_2d(np.asarray(new_scales, dtype=np.float64))
    if own.size != residuals.size or new.shape not in (shape, (1, shape[1])):
        raise SampleMismatchError(
            f"{own.size} scales and new scales of shape {new.shape}; expected {shape[0]}, and ({shape[1]},) or {shape}."
        )
    if not ((own > 0).all() and (new > 0).all() and np.isfinite(new).all()):
        raise ParameterError("scales must be finite and above zero; use a level function with a floor.")
    half: FloatArray = (residuals / own)[:, np.newaxis] * new
    return half


def _check_probability(probability: float) -> None:
    if not 0 < probability < 1:
        raise ParameterError(f"probability = {probability}; expected one inside (0, 1), such as 0.9.")
