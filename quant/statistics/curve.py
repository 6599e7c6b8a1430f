"""The quadratic y = c0 + c1·x + c2·x², and its use backwards on the branch that the calibrated range lies on.

Here x is what is known (the concentration of a standard) and y what is measured (its signal). NumPy only: everyday
prediction passes here.
"""

from dataclasses import dataclass
from math import copysign, sqrt

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector, paired_vectors
from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.straight_line import InverseInterval, present_pairs

HALF_WAY = 0.5  # from the end of the range to the vertex the quadratic is followed so far, then its tangent


@dataclass(frozen=True, kw_only=True)
class QuadraticFit:
    """A fitted quadratic, kept in u = (x − middle)/reach, which runs from −1 to 1 over the range of the standards.

    Attributes
    ----------
    terms : tuple of three floats
        Coefficients of 1, u and u². [unit of y]
    inverse : tuple of three rows of three floats
        (U'WU)⁻¹: covariances of the terms are residual_sd² times this.
    residual_sd : float
        s = sqrt(sum(w·e²)/(n − 3)); NaN when no degree of freedom is left. [unit of y at weight 1]
    n, degrees_of_freedom : int
        Pairs with a weight above zero; n − 3.
    lowest, highest : float
        Range of the standards. [unit of x]
    """

    terms: tuple[float, float, float]
    inverse: tuple[tuple[float, float, float], ...]
    residual_sd: float
    n: int
    degrees_of_freedom: int
    lowest: float
    highest: float

    @property
    def middle(self) -> float:
        """Middle of the range. [unit of x]"""
        return (self.lowest + self.highest) / 2

    @property
    def reach(self) -> float:
        """Half of its width. [unit of x]"""
        return (self.highest - self.lowest) / 2

    @property
    def coefficients(self) -> tuple[float, float, float]:
        """Coefficients of 1, x and x². [unit of y / (unit of x)ⁱ]"""
        (c0, c1, c2), m, r = self.terms, self.middle, self.reach
        return c0 - c1 * m / r + c2 * (m / r) ** 2, c1 / r - 2 * c2 * m / r**2, c2 / r**2

    @property
    def coefficient_sds(self) -> tuple[float, float, float]:
        """Standard deviations of these."""
        m, r = self.middle, self.reach
        turn = np.array([[1.0, -m / r, (m / r) ** 2], [0.0, 1 / r, -2 * m / r**2], [0.0, 0.0, 1 / r**2]])
        first, second, third = (
            float(value) for value in self.residual_sd * np.sqrt(np.diag(turn @ np.array(self.inverse) @ turn.T))
        )
        return first, second, third

    @property
    def vertex(self) -> float:
        """Where the curve turns, infinite for a straight line. [unit of x]"""
        u = _vertex(self.terms)
        return self.middle + self.reach * u


def fit_quadratic(x: ArrayLike, y: ArrayLike, weights: ArrayLike | None = None) -> QuadraticFit:
    """Fit y = c0 + c1·x + c2·x² by (weighted) least squares, errors in y only.

    Parameters
    ----------
    x, y : array of shape (n,)
        What is known, what is measured. [units of x and y]
    weights : array of shape (n,), optional
        Relative weights, such as 1/s² of each y. Zero means that the pair is absent.

    Raises
    ------
    NotEnoughDataError
        Fewer than three different x.
    ParameterError
        Numbers that are not finite, or negative weights.
    SampleMismatchError
        x, y and the weights differ in length.
    """
    a, b, w = present_pairs(*paired_vectors("x", x, "y", y), weights)
    levels = np.unique(a).size
    if levels < 3:
        raise NotEnoughDataError(f"{levels} different x; a quadratic needs 3 or more. Add standards between.")
    lowest, highest = float(a.min()), float(a.max())
    u = (a - (lowest + highest) / 2) / ((highest - lowest) / 2)
    design, root = np.vander(u, 3, increasing=True), np.sqrt(w)
    basis, triangle = np.linalg.qr(design * root[:, None])
    terms = np.linalg.solve(triangle, basis.T @ (b * root))
    half = np.linalg.solve(triangle, np.eye(3))
    freedom = a.size - 3
    rest = (b - design @ terms) * root
    c0, c1, c2 = (float(c) for c in terms)
    inverse = [[float(v) for v in row] for row in half @ half.T]
    return QuadraticFit(
        terms=(c0, c1, c2),
        inverse=tuple((p, q, r) for p, q, r in inverse),
        residual_sd=sqrt(float(rest @ rest) / freedom) if freedom > 0 else float("nan"),
        n=a.size,
        degrees_of_freedom=freedom,
        lowest=lowest,
        highest=highest,
    )


def check_branch(curve: QuadraticFit) -> None:
    """Refuse a curve that turns within the range of its standards, where one signal stands for two contents.

    Raises
    ------
    NotEnoughDataError
        The vertex lies inside the range.
    """
    if curve.lowest <= curve.vertex <= curve.highest:
        raise NotEnoughDataError(
            f"The quadratic turns at {curve.vertex:.4g}, inside the calibrated range {curve.lowest:g} to "
            f"{curve.highest:g}: one signal would stand for two contents. Narrow the range, or use a straight line."
        )


def curve_value(curve: QuadraticFit, x: ArrayLike) -> FloatArray:
    """Return y at x, any shape; far outside the range on the tangent, see `inverse_quadratic`. [unit of y]"""
    u = (np.asarray(x, dtype=np.float64) - curve.middle) / curve.reach
    value: FloatArray = _gradient(curve, u) @ np.array(curve.terms)
    return value


def curve_leverage(curve: QuadraticFit, x: ArrayLike) -> FloatArray:
    """Leverage of x, any shape: the variance of the curve there over that of a reading of weight 1."""
    u = (np.asarray(x, dtype=np.float64) - curve.middle) / curve.reach
    gradient = _gradient(curve, u)
    leverage: FloatArray = np.einsum("...i,ij,...j->...", gradient, np.array(curve.inverse), gradient)
    return leverage


def inverse_quadratic(curve: QuadraticFit, y: ArrayLike) -> FloatArray:
    """Read the quadratic backwards: the root on the branch of the calibrated range, shape of y. [unit of x]

    Beyond half the way from the range to the vertex the curve goes on as its tangent, so that every signal has one
    answer, and one outside the range is answered by a value outside the range.

    Raises
    ------
    NotEnoughDataError
        The vertex lies inside the range.
    """
    check_branch(curve)
    (c0, c1, c2), signal = curve.terms, np.asarray(y, dtype=np.float64)
    rise = copysign(1.0, c1)  # the middle of the range is on the branch: there the slope is c1
    root = np.sqrt(np.maximum(c1**2 + 4 * c2 * (signal - c0), 0.0))
    u = 2 * (signal - c0) / (c1 + rise * root)  # never a difference of near numbers
    last = _last(curve)
    if np.isfinite(last):
        height, slope = c0 + c1 * last + c2 * last**2, c1 + 2 * c2 * last
        beyond = (signal - height) * rise * copysign(1.0, last) > 0
        u = np.where(beyond, last + (signal - height) / slope, u)
    value: FloatArray = curve.middle + curve.reach * u
    return value


def inverse_quadratic_interval(
    curve: QuadraticFit, y: ArrayLike, t: float, readings: ArrayLike = 1, weight: ArrayLike = 1.0
) -> InverseInterval:
    """Read the quadratic backwards, with standard error and interval by the delta method.

    s_x0 = (s/|y'(x0)|)·sqrt(1/(m·w) + h(x0)), h the leverage of x0; the interval is x0 ± t·s_x0.

    Parameters
    ----------
    curve : QuadraticFit
    y : array of shape (n,)
        Measured, each the mean of `readings` readings. [unit of y]
    t : float
        Quantile of Student's t at the curve's degrees of freedom.
    readings, weight : numbers or arrays of shape (n,)
        m, readings behind each y; w, weight of one of them on the scale of the standards' weights.

    Raises
    ------
    NotEnoughDataError
        The vertex lies inside the range, or no degree of freedom is left.
    ParameterError
        t is not above zero, fewer than one reading, or a weight not above zero.

    References
    ----------
    .. [1] EURACHEM/CITAC QUAM, appendix E.3 (uncertainties from least squares, from memory).
    """
    signal = as_vector("y", np.atleast_1d(y))
    m, w = np.asarray(readings, dtype=np.float64), np.asarray(weight, dtype=np.float64)
    if not (np.isfinite(t) and t > 0 and np.all(m >= 1) and np.all(w > 0)):
        raise ParameterError(f"t = {t}, readings = {readings!r}, weight = {weight!r}; expected t > 0, m ≥ 1, w > 0.")
    if curve.degrees_of_freedom < 1:
        raise NotEnoughDataError(
            f"A quadratic through {curve.n} points leaves no degree of freedom, so nothing is known of its "
            "uncertainty. Measure more standards."
        )
    value = inverse_quadratic(curve, signal)
    last, u = _last(curve), (value - curve.middle) / curve.reach
    if np.isfinite(last):
        u = np.where(u * np.sign(last) > abs(last), last, u)
    slope = (curve.terms[1] + 2 * curve.terms[2] * u) / curve.reach
    error = curve.residual_sd / np.abs(slope) * np.sqrt(1.0 / (m * w) + curve_leverage(curve, value))
    return InverseInterval(
        value=value, standard_error=error, low=value - t * error, high=value + t * error, form="delta method"
    )


def _vertex(terms: tuple[float, float, float]) -> float:
    """Place of the vertex in u."""
    _, c1, c2 = terms
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        u = float(np.float64(-c1) / np.float64(2 * c2))
    return 0.0 if np.isnan(u) else u


def _last(curve: QuadraticFit) -> float:
    """Where in u the quadratic passes into its tangent; infinite for a straight line."""
    vertex = _vertex(curve.terms)
    end = copysign(1.0, vertex)
    return end + HALF_WAY * (vertex - end)


def _gradient(curve: QuadraticFit, u: FloatArray) -> FloatArray:
    """Derivatives of the curve by its three terms, shape (..., 3)."""
    last, square = _last(curve), u**2
    if np.isfinite(last):
        square = np.where(u * np.sign(last) > abs(last), last**2 + 2 * last * (u - last), square)
    return np.stack([np.ones_like(u), u, square], axis=-1)
