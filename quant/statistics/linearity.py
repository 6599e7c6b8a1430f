"""Is a calibration line straight, and is its scatter the same at both ends? High r² proves neither."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from quant.checks import as_vector, paired_vectors
from quant.errors import NotEnoughDataError
from quant.result import Result, documented
from quant.statistics.error_figures import no_spread
from quant.statistics.quantiles import f_quantile
from quant.statistics.straight_line import fit_line
from quant.text_table import Row, format_rows


@dataclass(frozen=True, kw_only=True)
class MandelTest(Result):
    """Does a quadratic fit better than a straight line by more than chance?"""

    n: int = documented("Number of pairs")
    line_sd: float = documented("Residual standard deviation of the line, n - 2", "unit of y")
    quadratic_sd: float = documented("Residual standard deviation of the quadratic, n - 3", "unit of y")
    variance_difference: float = documented("Sum of squares that the quadratic term takes away", "unit of y, squared")
    statistic: float = documented("That difference over the quadratic's variance")
    limit: float = documented("Quantile of F(1, n - 3)")
    p: float = documented("Probability of a statistic this large where the line is straight")
    probability: float = documented("Confidence of the test")
    curved: bool = documented("Whether the statistic exceeds its limit")
    constant: float = documented("Constant of the quadratic", "unit of y")
    linear: float = documented("Its linear coefficient", "unit of y / unit of x")
    quadratic: float = documented("Its quadratic coefficient", "unit of y / (unit of x)²")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("Mandel's statistic", self.statistic, ""),
            ("Mandel's statistic, limit", self.limit, ""),
            ("curved", self.curved, ""),
        ]

    def __str__(self) -> str:
        return f"Mandel's test, {self.n} pairs\n{format_rows(self.rows())}"


@dataclass(frozen=True, kw_only=True)
class LackOfFitTest(Result):
    """Do the levels' means leave the line by more than replicates scatter?"""

    n: int = documented("Number of pairs")
    n_levels: int = documented("Number of different x")
    lack_of_fit_sd: float = documented("Root mean square of the means' distances, levels - 2", "unit of y")
    pure_error_sd: float = documented("Standard deviation among replicates, n - levels", "unit of y")
    statistic: float = documented("Ratio of the two, squared")
    limit: float = documented("Quantile of F(levels - 2, n - levels)")
    p: float = documented("Probability of a ratio this large where the line fits")
    probability: float = documented("Confidence of the test")
    significant: bool = documented("Whether the ratio exceeds its limit")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("lack of fit F", self.statistic, ""),
            ("lack of fit F, limit", self.limit, ""),
            ("lack of fit", self.significant, ""),
        ]

    def __str__(self) -> str:
        return f"Lack of fit, {self.n} pairs on {self.n_levels} levels\n{format_rows(self.rows())}"


@dataclass(frozen=True, kw_only=True)
class VarianceRatioTest(Result):
    """Is the scatter at both ends of the range the same?"""

    low_sd: float = documented("Standard deviation of the first set", "unit of the values")
    high_sd: float = documented("Standard deviation of the second set", "unit of the values")
    statistic: float = documented("Larger over smaller variance")
    limit: float = documented("Quantile of F, degrees of freedom of the larger variance first")
    probability: float = documented("One-sided confidence of the test")
    significant: bool = documented("Whether the ratio exceeds its limit: use weights, or a narrower range")


def mandel_test(x: ArrayLike, y: ArrayLike, probability: float = 0.99) -> MandelTest:
    """Mandel's test of a straight line against a quadratic.

    DS² = (n - 2)·s_y1² - (n - 3)·s_y2², and DS²/s_y2² against F(p; 1, n - 3). An exact quadratic has an infinite ratio.

    Parameters
    ----------
    x, y : array of shape (n,)
        Contents and signals of the standards, one pair a standard or reading. [units of x and y]
    probability : float
        Confidence, inside (0, 1); 0.99 is ISO 8466-1's.

    Raises
    ------
    SampleMismatchError
        x and y differ in length.
    NotEnoughDataError
        Fewer than four pairs, fewer than three different x, or points that lie on a straight line exactly.
    ParameterError
        A value that is not finite, or a probability outside (0, 1).

    References
    ----------
    .. [1] J. Mandel, The Statistical Analysis of Experimental Data (1964); ISO 8466-1 (both from memory).
    """
    a, b = paired_vectors("x", x, "y", y, least=4)
    if np.unique(a).size < 3:
        raise NotEnoughDataError(f"{np.unique(a).size} different x; a quadratic needs 3 or more.")
    line = fit_line(a, b)
    middle, reach = float(a.mean()), float(np.abs(a - a.mean()).max())
    u = (a - middle) / reach  # about the middle and of size one, where the three terms are told apart best
    design = np.vander(u, 3, increasing=True)
    c0, c1, c2 = (float(c) for c in np.linalg.lstsq(design, b, rcond=None)[0])
    size = float(np.abs(b).max())
    line_residual = b - line.y_mean - line.slope * (a - middle)
    residual = b - design @ [c0, c1, c2]
    if no_spread(line_residual, size):
        raise NotEnoughDataError(
            f"the {a.size} points lie on a straight line exactly; without scatter no test is possible."
        )
    # DS² is c2² times the sum of squares of u² about its own line: no difference of large sums.
    bend = u**2 - np.polynomial.Polynomial.fit(u, u**2, 1)(u)
    difference = c2**2 * float(bend @ bend)
    quadratic_sd = 0.0 if no_spread(residual, size) else math.sqrt(float(residual @ residual) / (a.size - 3))
    statistic = difference / quadratic_sd**2 if quadratic_sd > 0 else math.inf
    limit = f_quantile(probability, 1, a.size - 3)
    return MandelTest(
        n=a.size,
        line_sd=line.residual_sd,
        quadratic_sd=quadratic_sd,
        variance_difference=difference,
        statistic=statistic,
        limit=limit,
        p=float(special.fdtrc(1, a.size - 3, statistic)),
        probability=probability,
        curved=statistic > limit,
        constant=c0 - c1 * middle / reach + c2 * (middle / reach) ** 2,
        linear=c1 / reach - 2 * c2 * middle / reach**2,
        quadratic=c2 / reach**2,
    )


def lack_of_fit_test(x: ArrayLike, y: ArrayLike, probability: float = 0.95) -> LackOfFitTest:
    """Test a straight line against the scatter of replicates: F = [SS_lof/(m - 2)]/[SS_pe/(n - m)], m levels.

    Parameters
    ----------
    x, y : array of shape (n,)
        Contents and signals; pairs with the same x are replicates. [units of x and y]
    probability : float
        Confidence, inside (0, 1).

    Raises
    ------
    SampleMismatchError
        x and y differ in length.
    NotEnoughDataError
        Fewer than three levels, no replicates, or replicates that do not differ.
    ParameterError
        A value that is not finite, or a probability outside (0, 1).
    """
    a, b = paired_vectors("x", x, "y", y, least=3)
    line = fit_line(a, b)
    levels, member, counts = np.unique(a, return_inverse=True, return_counts=True)
    if levels.size < 3 or a.size == levels.size:
        raise NotEnoughDataError(
            f"{a.size} pairs on {levels.size} levels; lack of fit needs 3 levels or more, some with replicates."
        )
    means = np.bincount(member, weights=b) / counts
    within = b - means[member]
    if no_spread(within, float(np.abs(b).max())):
        raise NotEnoughDataError("replicates do not differ at all; were means repeated in place of readings?")
    distance = means - line.y_mean - line.slope * (levels - line.x_mean)
    dof_fit, dof_error = levels.size - 2, a.size - levels.size
    fit, error = float(counts @ distance**2) / dof_fit, float(within @ within) / dof_error
    limit = f_quantile(probability, dof_fit, dof_error)
    return LackOfFitTest(
        n=a.size,
        n_levels=levels.size,
        lack_of_fit_sd=math.sqrt(fit),
        pure_error_sd=math.sqrt(error),
        statistic=fit / error,
        limit=limit,
        p=float(special.fdtrc(dof_fit, dof_error, fit / error)),
        probability=probability,
        significant=fit / error > limit,
    )


def variance_homogeneity_test(low: ArrayLike, high: ArrayLike, probability: float = 0.99) -> VarianceRatioTest:
    """Compare the scatter at the two ends of the range: larger over smaller variance against F.

    Parameters
    ----------
    low, high : arrays of shape (n_low,), (n_high,)
        Replicate signals at the lowest and the highest standard, ten each in ISO 8466-1. [unit of the signal]
    probability : float
        One-sided confidence, inside (0, 1).

    Raises
    ------
    NotEnoughDataError
        Fewer than two values in a set, or values that do not differ.
    ParameterError
        A value that is not finite, or a probability outside (0, 1).

    References
    ----------
    .. [1] ISO 8466-1 (from memory).
    """
    sets = [as_vector("low", low), as_vector("high", high)]
    if any(v.size < 2 or no_spread(v, float(np.abs(v).max())) for v in sets):
        raise NotEnoughDataError("a set of replicates has fewer than 2 values, or values that do not differ.")
    sd = [float(v.std(ddof=1)) for v in sets]
    above, below = (0, 1) if sd[0] > sd[1] else (1, 0)
    statistic = (sd[above] / sd[below]) ** 2
    limit = f_quantile(probability, sets[above].size - 1, sets[below].size - 1)
    return VarianceRatioTest(
        low_sd=sd[0],
        high_sd=sd[1],
        statistic=statistic,
        limit=limit,
        probability=probability,
        significant=statistic > limit,
    )
