"""Slope and intercept tested together: the joint confidence ellipse.

Slope and intercept of one line are correlated, so that two separate t tests can both pass where the pair is impossible,
or fail where it is possible.
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import NotEnoughDataError, ParameterError
from quant.result import Result, documented
from quant.statistics.quantiles import f_quantile
from quant.statistics.straight_line import fit_line
from quant.text_table import Row, format_rows


@dataclass(frozen=True, kw_only=True)
class JointTest(Result):
    """Is the pair of a stated intercept and slope possible?"""

    n: int = documented("Number of pairs")
    intercept: float = documented("Intercept of the least squares line", "unit of y")
    slope: float = documented("Slope of the least squares line", "unit of y / unit of x")
    residual_sd: float = documented("Residual standard deviation of the line, n - 2", "unit of y")
    x_mean: float = documented("Mean of x", "unit of x")
    sxx: float = documented("Sum of (x - mean)²", "unit of x, squared")
    intercept_tested: float = documented("Stated intercept", "unit of y")
    slope_tested: float = documented("Stated slope", "unit of y / unit of x")
    statistic: float = documented("Joint statistic of the stated pair, of the distribution F(2, n - 2)")
    limit: float = documented("Quantile of F(2, n - 2); the ellipse is where the statistic equals it")
    probability: float = documented("Confidence of the ellipse")
    inside: bool = documented("Whether the stated pair lies inside the ellipse or on it")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("joint F (slope and intercept)", self.statistic, ""),
            ("joint F, limit", self.limit, ""),
            (f"slope {self.slope_tested:g}, intercept {self.intercept_tested:g} inside the ellipse", self.inside, ""),
        ]

    def __str__(self) -> str:
        return f"Joint test of slope and intercept, {self.n} pairs\n{format_rows(self.rows())}"


def joint_test(
    x: ArrayLike, y: ArrayLike, *, intercept: float = 0.0, slope: float = 1.0, probability: float = 0.95
) -> JointTest:
    """Test a pair of intercept and slope of the line of y on x.

    The statistic is [n·(a - β0)² + 2·Σx·(a - β0)(b - β1) + Σx²·(b - β1)²] / (2·s²).

    Parameters
    ----------
    x, y : array of shape (n,)
        For band area the reference values and the predictions, for PLS the other way round. [units of x and y]
    intercept, slope : float
        The stated pair β0, β1. [unit of y], [unit of y / unit of x]
    probability : float
        Confidence of the ellipse, inside (0, 1).

    Raises
    ------
    SampleMismatchError
        x and y differ in length.
    NotEnoughDataError
        Fewer than three pairs, x that do not differ, or points that lie on the line exactly.
    ParameterError
        A value that is not finite, or a probability outside (0, 1).

    References
    ----------
    .. [1] J. Mandel, F.J. Linnig, Anal. Chem. 29 (1957) 743-749 (from memory); the statistic as in a textbook's chapter
       "Assay Validation", equations 3.3.7 and 3.3.8.
    """
    line = fit_line(x, y)
    size = float(max(np.abs(np.asarray(y, dtype=np.float64)).max(), abs(line.slope * line.x_mean)))
    if line.degrees_of_freedom < 1 or line.residual_sd <= 8 * np.finfo(np.float64).eps * size:
        raise NotEnoughDataError(f"{line.n} points that leave no scatter about their line; it cannot be tested.")
    da, db = line.intercept - intercept, line.slope - slope
    # n·da² + 2·Σx·da·db + Σx²·db², written about the mean of x, where nothing cancels.
    bracket = line.n * (da + line.x_mean * db) ** 2 + line.sxx * db**2
    statistic = bracket / (2 * line.residual_sd**2)
    limit = f_quantile(probability, 2, line.degrees_of_freedom)
    return JointTest(
        n=line.n,
        intercept=line.intercept,
        slope=line.slope,
        residual_sd=line.residual_sd,
        x_mean=line.x_mean,
        sxx=line.sxx,
        intercept_tested=intercept,
        slope_tested=slope,
        statistic=statistic,
        limit=limit,
        probability=probability,
        inside=statistic <= limit,
    )


def ellipse_points(test: JointTest, n_points: int = 181) -> tuple[FloatArray, FloatArray]:
    """Points of the ellipse for drawing, closed: the last is the first.

    Parameters
    ----------
    test : JointTest
        What `joint_test` found.
    n_points : int
        How many, 4 at least.

    Returns
    -------
    tuple of two arrays of shape (n_points,)
        Intercepts [unit of y] and slopes [unit of y / unit of x].

    Raises
    ------
    ParameterError
        Fewer than four points.
    """
    if n_points < 4:
        raise ParameterError(f"n_points = {n_points}; a closed curve needs 4 or more.")
    angle = np.linspace(0.0, 2 * np.pi, n_points)
    angle[-1] = 0.0
    radius = test.residual_sd * math.sqrt(2 * test.limit)
    slope_part = radius / math.sqrt(test.sxx) * np.sin(angle)
    intercept_part = radius / math.sqrt(test.n) * np.cos(angle) - test.x_mean * slope_part
    return test.intercept + intercept_part, test.slope + slope_part
