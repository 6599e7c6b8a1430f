"""The straight line y = a + b·x, and its use backwards: from a measured y to x, with an interval.

Here x is what is known (the concentration of a standard) and y what is measured (its signal). NumPy only: everyday
prediction passes here.
"""

from dataclasses import dataclass
from math import sqrt
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector, paired_vectors
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError

EPS = float(np.finfo(np.float64).eps)
SYMMETRIC_BELOW = 0.05  # above this g, the symmetric interval is visibly wrong

IntervalForm = Literal["symmetric", "Fieller", "unbounded", "delta method"]


@dataclass(frozen=True, kw_only=True)
class LineFit:
    """A fitted straight line.

    Attributes
    ----------
    slope, intercept : float
        b and a; the intercept is 0 for a line through the origin. [unit of y / unit of x], [unit of y]
    slope_sd, intercept_sd : float
        Standard deviations of the two; NaN when no degree of freedom is left. [as above]
    covariance : float
        Covariance of slope and intercept. [product of their units]
    residual_sd : float
        s = sqrt(sum(w·e²) / degrees of freedom); NaN when none is left. [unit of y at weight 1]
    n : int
        Number of pairs with a weight above zero.
    weight_sum : float
        Sum of the weights; n without weights.
    degrees_of_freedom : int
        n − 2; through the origin n − 1.
    x_mean, y_mean : float
        The point about which the line turns: the (weighted) means; 0 and 0 through the origin. [units of x and y]
    sxx : float
        (Weighted) sum of (x − x_mean)². [(unit of x)²]
    correlation : float
        Sxy / sqrt(Sxx·Syy) about that same point; NaN if all y are equal.
    through_origin : bool
        Whether the line is forced through (0, 0).
    """

    slope: float
    intercept: float
    slope_sd: float
    intercept_sd: float
    covariance: float
    residual_sd: float
    n: int
    weight_sum: float
    degrees_of_freedom: int
    x_mean: float
    y_mean: float
    sxx: float
    correlation: float
    through_origin: bool

    @property
    def mean_share(self) -> float:
        """What the mean adds to every leverage: 1/n (1 / sum of weights); 0 through the origin."""
        return 0.0 if self.through_origin else 1.0 / self.weight_sum


@dataclass(frozen=True, kw_only=True)
class InverseInterval:
    """x read backwards from measured y, with its uncertainty.

    Attributes
    ----------
    value, standard_error : array of shape (n,)
        x0 = (y0 − a)/b and its standard error s_x0. [unit of x]
    low, high : array of shape (n,)
        The interval. [unit of x]
    form : {"symmetric", "Fieller", "unbounded", "delta method"}
        x0 ± t·s_x0; the exact interval, not symmetric about x0; no finite interval at all, because the slope itself
        does not differ from zero at this t; or, of curves, x0 ± t·s_x0 from the slope at x0.
    """

    value: FloatArray
    standard_error: FloatArray
    low: FloatArray
    high: FloatArray
    form: IntervalForm


def fit_line(x: ArrayLike, y: ArrayLike, weights: ArrayLike | None = None) -> LineFit:
    """Fit y = a + b·x by (weighted) least squares, errors in y only.

    Parameters
    ----------
    x, y : array of shape (n,)
        What is known, what is measured. [units of x and y]
    weights : array of shape (n,), optional
        Relative weights, such as 1/s² of each y. Standard deviations do not depend on their scale; `residual_sd`
        belongs to weight 1. Zero means that the pair is absent.

    Returns
    -------
    LineFit
        The line.

    Raises
    ------
    NotEnoughDataError
        Fewer than two pairs, or all x equal.
    ParameterError
        Numbers that are not finite, or negative weights.
    SampleMismatchError
        x, y and the weights differ in length.
    """
    x_values, y_values = paired_vectors("x", x, "y", y)
    x_values, y_values, w = present_pairs(x_values, y_values, weights)
    if x_values.size < 2:
        raise NotEnoughDataError(f"{x_values.size} pair(s) of x and y; a straight line needs 2 or more.")
    total = float(w.sum())
    x_mean, y_mean = float(w @ x_values) / total, float(w @ y_values) / total
    return _finish(x_values - x_mean, y_values - y_mean, w, x_mean, y_mean, x_size=float(np.abs(x_values).max()))


def fit_line_through_origin(x: ArrayLike, y: ArrayLike, weights: ArrayLike | None = None) -> LineFit:
    """Fit y = b·x by (weighted) least squares, errors in y only.

    Parameters
    ----------
    x, y : array of shape (n,)
        What is known, what is measured. [units of x and y]
    weights : array of shape (n,), optional
        As `fit_line` takes them.

    Returns
    -------
    LineFit
        The line; intercept, its standard deviation and the covariance are 0.

    Raises
    ------
    NotEnoughDataError
        No pair, or all x zero.
    ParameterError
        Numbers that are not finite, or negative weights.
    SampleMismatchError
        x, y and the weights differ in length.
    """
    x_values, y_values = paired_vectors("x", x, "y", y, least=1)
    x_values, y_values, w = present_pairs(x_values, y_values, weights)
    if not x_values.size:
        raise NotEnoughDataError("No pair has a weight above zero; a line through the origin needs one.")
    return _finish(x_values, y_values, w, 0.0, 0.0, x_size=None)


def line_leverage(line: LineFit, x: ArrayLike) -> FloatArray:
    """Leverage 1/n + (x − x̄)²/Sxx of x, any shape; through the origin x²/Σx²."""
    leverage: FloatArray = line.mean_share + (np.asarray(x, dtype=np.float64) - line.x_mean) ** 2 / line.sxx
    return leverage


def inverse_value(line: LineFit, y: ArrayLike) -> FloatArray:
    """Read the line backwards: x0 = (y0 − a)/b, shape of y. [unit of x]

    Raises
    ------
    NotEnoughDataError
        The slope is zero.
    """
    if line.slope == 0.0:
        raise NotEnoughDataError("The slope of the line is zero: y tells nothing about x. Check which signal was used.")
    value: FloatArray = line.x_mean + (np.asarray(y, dtype=np.float64) - line.y_mean) / line.slope
    return value


def inverse_interval(
    line: LineFit, y: ArrayLike, t: float, readings: ArrayLike = 1, weight: ArrayLike = 1.0
) -> InverseInterval:
    """Read the line backwards, with standard error and interval.

    With D = (y0 − ȳ)/b, c = 1/(m·w) + 1/n and g = t²·s_b²/b²: s_x0 = (s/|b|)·sqrt(c + D²/Sxx), n being the sum of the
    weights. Below g = 0.05 the interval is x0 ± t·s_x0, above it is Fieller's,
    x̄ + [D ± sqrt(g·D² + (1 − g)·t²·s²·c/b²)] / (1 − g); from g = 1 on there is no finite one. Through the origin
    x̄ = ȳ = 0, c = 1/(m·w) and Sxx = Σw·x².

    Parameters
    ----------
    line : LineFit
        The calibration line.
    y : array of shape (n,)
        Measured, each the mean of `readings` readings. [unit of y]
    t : float
        Quantile of Student's t at the line's degrees of freedom.
    readings : int or array of shape (n,)
        m, readings behind each y.
    weight : float or array of shape (n,)
        w, weight of one of them on the scale of the line's weights; 1 for an unweighted line.

    Returns
    -------
    InverseInterval
        Values, standard errors and limits, each of shape (n,).

    Raises
    ------
    NotEnoughDataError
        The slope is zero, or no degree of freedom is left.
    ParameterError
        t is not above zero, fewer than one reading, or a weight that is not above zero.

    References
    ----------
    .. [1] ISO 8466-1; J. N. Miller, J. C. Miller, Statistics and Chemometrics for Analytical Chemistry; EURACHEM/CITAC
       QUAM A5: the standard error, the same in all three, with weights in the second (from memory).
    .. [2] E. C. Fieller, Some problems in interval estimation, J. R. Stat. Soc. B 16 (1954) 175 (from memory).
    """
    signal, m = as_vector("y", np.atleast_1d(y)), np.asarray(readings, dtype=np.float64)
    if not (np.isfinite(t) and t > 0):
        raise ParameterError(f"t = {t}; expected a quantile of Student's t above zero.")
    if not np.all(m >= 1):
        raise ParameterError(f"readings = {readings!r}; expected 1 or more behind each value.")
    w = np.asarray(weight, dtype=np.float64)
    if not np.all(w > 0):
        raise ParameterError(f"weight = {weight!r}; expected the weight of a reading, above zero.")
    value = inverse_value(line, signal)
    if line.degrees_of_freedom < 1:
        raise NotEnoughDataError(
            f"A line through {line.n} point(s) leaves no degree of freedom, so nothing is known of its uncertainty. "
            "Measure more standards."
        )
    relative_sd = line.residual_sd / abs(line.slope)
    own = 1.0 / (m * w) + line.mean_share
    distance = value - line.x_mean
    standard_error = relative_sd * np.sqrt(own + distance**2 / line.sxx)
    g = (t * relative_sd) ** 2 / line.sxx
    form: IntervalForm = "symmetric" if g < SYMMETRIC_BELOW else "Fieller" if g < 1 else "unbounded"
    if form == "symmetric":
        low, high = value - t * standard_error, value + t * standard_error
    elif form == "Fieller":
        half = np.sqrt(g * distance**2 + (1 - g) * (t * relative_sd) ** 2 * own)
        low, high = line.x_mean + (distance - half) / (1 - g), line.x_mean + (distance + half) / (1 - g)
    else:
        low, high = np.full(value.shape, -np.inf), np.full(value.shape, np.inf)
    return InverseInterval(value=value, standard_error=standard_error, low=low, high=high, form=form)


def present_pairs(x: FloatArray, y: FloatArray, weights: ArrayLike | None) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return x, y and weights of the pairs that weigh anything; all weigh one by default.

    Raises
    ------
    ParameterError
        Weights that are negative or not finite.
    SampleMismatchError
        Another number of weights than of pairs.
    """
    if weights is None:
        return x, y, np.ones(x.size)
    w = np.asarray(weights, dtype=np.float64)
    if w.shape != x.shape:
        raise SampleMismatchError(f"{w.size} weights for {x.size} pairs; one each is expected.")
    if not np.isfinite(w).all() or (w < 0).any():
        raise ParameterError("Weights of a straight line must be finite and not negative; use 0 for an absent pair.")
    return x[w > 0], y[w > 0], w[w > 0]


def _finish(
    dx: FloatArray, dy: FloatArray, w: FloatArray, x_mean: float, y_mean: float, x_size: float | None
) -> LineFit:
    """Fit from distances to the point the line turns about; `x_size` is None through the origin."""
    through_origin = x_size is None
    sxx, sxy, syy = float(w @ dx**2), float(w @ (dx * dy)), float(w @ dy**2)
    if np.abs(dx).max() <= (0.0 if x_size is None else 10 * dx.size * EPS * x_size):
        which = "zero" if through_origin else "equal"
        raise NotEnoughDataError(
            f"All {dx.size} values of x (concentrations) are {which}; a line needs standards that differ."
        )
    slope = sxy / sxx
    freedom = dx.size - (1 if through_origin else 2)
    residual_sd = sqrt(float(w @ (dy - slope * dx) ** 2) / freedom) if freedom > 0 else float("nan")
    slope_sd = residual_sd / sqrt(sxx)
    total = float(w.sum())
    return LineFit(
        slope=slope,
        intercept=y_mean - slope * x_mean,
        slope_sd=slope_sd,
        intercept_sd=0.0 if through_origin else residual_sd * sqrt(1.0 / total + x_mean**2 / sxx),
        covariance=-x_mean * slope_sd**2 if x_mean else 0.0,
        residual_sd=residual_sd,
        n=dx.size,
        weight_sum=total,
        degrees_of_freedom=freedom,
        x_mean=x_mean,
        y_mean=y_mean,
        sxx=sxx,
        correlation=sxy / sqrt(sxx * syy) if syy > 0 else float("nan"),
        through_origin=through_origin,
    )
