"""Straight lines through values of known uncertainty: the scatter is stated, not found from the fit."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from quant.checks import paired_vectors
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.result import Result, documented
from quant.statistics.straight_line import fit_line
from quant.text_table import Row, format_rows


@dataclass(frozen=True, kw_only=True)
class KnownLine(Result):
    """A straight line y = a + b·x through values with stated standard uncertainties."""

    n: int = documented("Number of pairs")
    intercept: float = documented("a", "unit of y")
    slope: float = documented("b", "unit of y / unit of x")
    intercept_uncertainty: float = documented("u(a)", "unit of y")
    slope_uncertainty: float = documented("u(b)", "unit of y / unit of x")
    covariance: float = documented("cov(a, b)", "product of their units")
    chi_squared: float = documented("Sum of squared residuals over their stated variances")
    degrees_of_freedom: int = documented("n - 2")
    limit: float = documented("95 % quantile of chi-square")
    consistent: bool = documented("Whether residuals are no larger than stated: else distrust line and uncertainties")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("intercept", self.intercept, f"± {self.intercept_uncertainty:.3g}"),
            ("slope", self.slope, f"± {self.slope_uncertainty:.3g}"),
            ("chi-square", self.chi_squared, f"limit {self.limit:.4g}"),
            ("consistent with the stated uncertainties", self.consistent, ""),
        ]

    def __str__(self) -> str:
        return f"Straight line, {self.n} pairs of known uncertainty\n{format_rows(self.rows())}"


def fit_line_known(x: ArrayLike, y: ArrayLike, uncertainty: ArrayLike) -> KnownLine:
    """Fit y = a + b·x with weights 1/u² and test whether the residuals agree with u.

    Parameters
    ----------
    x, y : array of shape (n,)
        What is known exactly, what is measured. [units of x and y]
    uncertainty : number or array of shape (n,)
        u, standard uncertainty of each y, independent of each other. [unit of y]

    Raises
    ------
    NotEnoughDataError
        Fewer than three pairs, or all x equal.
    ParameterError
        Numbers that are not finite, or an uncertainty not above zero.
    SampleMismatchError
        x, y and the uncertainties differ in length.

    References
    ----------
    .. [1] ISO/TS 28037 (2010), clause 6 (from memory).
    """
    a, b = paired_vectors("x", x, "y", y, least=3)
    u = np.asarray(uncertainty, dtype=np.float64)
    if u.ndim and u.shape != a.shape:
        raise SampleMismatchError(f"{u.size} uncertainties for {a.size} pairs; one each is expected.")
    if not (np.isfinite(u).all() and (u > 0).all()):
        raise ParameterError(f"uncertainty = {uncertainty!r}; expected standard uncertainties above zero.")
    line = fit_line(a, b, np.broadcast_to(u**-2.0, a.shape))
    freedom = line.degrees_of_freedom
    if freedom < 1:
        raise NotEnoughDataError(f"{line.n} pairs; consistency can be tested from 3 on.")
    middle, slope_variance = line.x_mean, 1 / line.sxx  # weights are 1/u²: the variance of weight 1 is 1
    limit = float(special.chdtri(freedom, 0.05))
    chi_squared = line.residual_sd**2 * freedom
    return KnownLine(
        n=line.n,
        intercept=line.intercept,
        slope=line.slope,
        intercept_uncertainty=math.sqrt(1 / line.weight_sum + middle**2 * slope_variance),
        slope_uncertainty=math.sqrt(slope_variance),
        covariance=-middle * slope_variance,
        chi_squared=chi_squared,
        degrees_of_freedom=freedom,
        limit=limit,
        consistent=chi_squared <= limit,
    )


def inverse_known(line: KnownLine, y: float, uncertainty: float) -> tuple[float, float]:
    """Read the line backwards: x and u(x), u²(x) = [u²(a) + u²(y) + x²·u²(b) + 2·x·cov(a, b)]/b².

    Parameters
    ----------
    line : KnownLine
    y, uncertainty : float
        Measured value and its standard uncertainty. [unit of y]

    Raises
    ------
    NotEnoughDataError
        The slope is zero.
    ParameterError
        A value that is not finite, or an uncertainty below zero.

    References
    ----------
    .. [1] ISO/TS 28037 (2010), clause 11 (from memory).
    """
    if not (math.isfinite(y) and math.isfinite(uncertainty) and uncertainty >= 0):
        raise ParameterError(f"y = {y}, uncertainty = {uncertainty}; expected finite numbers, u not below zero.")
    if line.slope == 0:
        raise NotEnoughDataError("The slope of the line is zero: y tells nothing about x.")
    x = (y - line.intercept) / line.slope
    own = line.intercept_uncertainty**2 + uncertainty**2
    calibration = (x * line.slope_uncertainty) ** 2 + 2 * x * line.covariance
    return x, math.sqrt(own + calibration) / abs(line.slope)
