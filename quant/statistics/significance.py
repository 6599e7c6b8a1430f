"""Is a bias, a slope or an intercept more than chance? Student's t on errors and on a straight line."""

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from quant.checks import one_of, paired_vectors
from quant.errors import NotEnoughDataError
from quant.result import Result, documented
from quant.statistics.error_figures import no_spread
from quant.statistics.quantiles import t_quantile, t_two_sided_p
from quant.text_table import Row, format_rows

REFERENCE_ON_PREDICTED = "reference on predicted"  # PLS and PCR: inverse predictions scatter about the truth
PREDICTED_ON_REFERENCE = "predicted on reference"  # band area: the classical direction
DIRECTIONS = (REFERENCE_ON_PREDICTED, PREDICTED_ON_REFERENCE)


@dataclass(frozen=True, kw_only=True)
class BiasTest(Result):
    """Does the mean error differ from zero?"""

    n_samples: int = documented("Number of samples")
    bias: float = documented("Mean of predicted - reference", "unit of the analyte")
    sep: float = documented("Standard deviation of the errors about the bias, n - 1", "unit of the analyte")
    limit: float = documented("A bias beyond plus or minus this is significant", "unit of the analyte")
    t: float = documented("|bias|·sqrt(n)/SEP")
    critical: float = documented("Student's t with n - 1 degrees of freedom, two-sided")
    p: float = documented("Probability of a t this large where there is no bias")
    probability: float = documented("Two-sided confidence of the test")
    significant: bool = documented("Whether t exceeds the critical value")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("bias t", self.t, ""),
            ("bias t, critical", self.critical, ""),
            ("bias p", self.p, ""),
            ("bias significant", self.significant, ""),
        ]

    def __str__(self) -> str:
        return f"Bias test on {self.n_samples} samples\n{format_rows(self.rows())}"


@dataclass(frozen=True, kw_only=True)
class SlopeInterceptTest(Result):
    """Does the line through predicted and reference values differ from "slope one, intercept zero"?

    The two tests are separate ones; slope and intercept are correlated, so that both can pass on a line that a joint
    test would refuse.
    """

    direction: str = documented("Which of the two values stands on which")
    n_samples: int = documented("Number of samples")
    slope: float = documented("Slope of the least squares line")
    intercept: float = documented("Intercept of the least squares line", "unit of the analyte")
    slope_sd: float = documented("Standard deviation of the slope")
    intercept_sd: float = documented("Standard deviation of the intercept", "unit of the analyte")
    residual_sd: float = documented("Residual standard deviation of the line, n - 2", "unit of the analyte")
    critical: float = documented("Student's t with n - 2 degrees of freedom, two-sided")
    slope_t: float = documented("|slope - 1| over its standard deviation")
    slope_p: float = documented("Probability of a slope t this large where the slope is one")
    slope_significant: bool = documented("Whether the slope differs from one")
    intercept_t: float = documented("|intercept| over its standard deviation")
    intercept_p: float = documented("Probability of an intercept t this large where the intercept is zero")
    intercept_significant: bool = documented("Whether the intercept differs from zero")
    probability: float = documented("Two-sided confidence of each test")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("slope t (against 1)", self.slope_t, ""),
            ("slope p", self.slope_p, ""),
            ("slope significant", self.slope_significant, ""),
            ("intercept t (against 0)", self.intercept_t, ""),
            ("intercept p", self.intercept_p, ""),
            ("intercept significant", self.intercept_significant, ""),
            ("line t, critical", self.critical, ""),
        ]

    def __str__(self) -> str:
        return f"Line of {self.direction}, {self.n_samples} samples\n{format_rows(self.rows())}"


class Line(NamedTuple):
    """A least squares line and what its tests need."""

    slope: float
    intercept: float
    mean_x: float
    sum_xx: float  # sum of (x - mean)²
    sum_residuals: float  # sum of squared residuals
    exact: bool  # the residuals are nothing but rounding


def bias_test(predicted: ArrayLike, reference: ArrayLike, probability: float = 0.95) -> BiasTest:
    """Test the mean of predicted - reference against zero.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]
    probability : float
        Two-sided confidence, inside (0, 1).

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two samples, or errors that do not differ, about which chance says nothing.
    ParameterError
        A value that is not finite, or a probability outside (0, 1).

    References
    ----------
    .. [1] ISO 12099:2017, clause 6 (from memory): T_b = ± t(1 - α/2, n - 1)·SEP/sqrt(n).
    """
    x, y = paired_vectors("predicted values", predicted, "reference values", reference, least=2)
    error = x - y
    bias, sd = float(error.mean()), float(error.std(ddof=1))
    if no_spread(error, max(np.abs(x).max(), np.abs(y).max())):
        raise NotEnoughDataError(
            f"the {error.size} errors are all {bias:.6g}; without spread among them no bias can be tested. "
            "Were predicted values given as reference values?"
        )
    dof = error.size - 1
    t, critical = abs(bias) * math.sqrt(error.size) / sd, t_quantile(0.5 + probability / 2, dof)
    return BiasTest(
        n_samples=error.size,
        bias=bias,
        sep=sd,
        limit=critical * sd / math.sqrt(error.size),
        t=t,
        critical=critical,
        p=t_two_sided_p(t, dof),
        probability=probability,
        significant=t > critical,
    )


def slope_intercept_test(
    predicted: ArrayLike,
    reference: ArrayLike,
    direction: str = REFERENCE_ON_PREDICTED,
    probability: float = 0.95,
) -> SlopeInterceptTest:
    """Test the slope against one and the intercept against zero.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, three at least. [unit of the analyte]
    direction : {"reference on predicted", "predicted on reference"}
        Which value is regressed on which: the first for PLS, the second for band area.
    probability : float
        Two-sided confidence of each test, inside (0, 1).

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than three samples, values on the abscissa that do not differ, or points that lie on the line exactly.
    ParameterError
        A value that is not finite, an unknown direction, or a probability outside (0, 1).

    References
    ----------
    .. [1] ISO 12099:2017, clause 6 (from memory): t = |b - 1|·sqrt(var(ŷ)(n - 1)/s_res²) against t(1 - α/2, n - 2).
    """
    paired_vectors("predicted values", predicted, "reference values", reference, least=3)
    line = fit_line(predicted, reference, direction)
    n = np.size(predicted)
    dof = n - 2
    residual_sd = math.sqrt(line.sum_residuals / dof)
    if line.exact:
        raise NotEnoughDataError(
            f"the {n} points lie on a line exactly (slope {line.slope:.6g}); without scatter it cannot be tested. "
            "Were predicted values given as reference values?"
        )
    slope_sd = residual_sd / math.sqrt(line.sum_xx)
    intercept_sd = residual_sd * math.sqrt(1 / n + line.mean_x**2 / line.sum_xx)
    slope_t, intercept_t = abs(line.slope - 1) / slope_sd, abs(line.intercept) / intercept_sd
    critical = t_quantile(0.5 + probability / 2, dof)
    return SlopeInterceptTest(
        direction=direction,
        n_samples=n,
        slope=line.slope,
        intercept=line.intercept,
        slope_sd=slope_sd,
        intercept_sd=intercept_sd,
        residual_sd=residual_sd,
        critical=critical,
        slope_t=slope_t,
        slope_p=t_two_sided_p(slope_t, dof),
        slope_significant=slope_t > critical,
        intercept_t=intercept_t,
        intercept_p=t_two_sided_p(intercept_t, dof),
        intercept_significant=intercept_t > critical,
        probability=probability,
    )


def fit_line(predicted: ArrayLike, reference: ArrayLike, direction: str = REFERENCE_ON_PREDICTED) -> Line:
    """Least squares line through predicted and reference values, computed about their means.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, two at least. [unit of the analyte]
    direction : {"reference on predicted", "predicted on reference"}
        Which value is regressed on which.

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two samples, or values on the abscissa that do not differ.
    ParameterError
        A value that is not finite, or an unknown direction.
    """
    x, y = paired_vectors("predicted values", predicted, "reference values", reference, least=2)
    if one_of("direction", direction, DIRECTIONS) == PREDICTED_ON_REFERENCE:
        x, y = y, x
    mean_x, mean_y = float(x.mean()), float(y.mean())
    dx, dy = x - mean_x, y - mean_y
    sum_xx = float(dx @ dx)
    if no_spread(x, np.abs(x).max()):
        raise NotEnoughDataError(
            f"the {x.size} {direction.split(' on ')[1]} values are all {x[0]:.6g}; a line needs values that differ."
        )
    slope = float(dx @ dy) / sum_xx
    residual = dy - slope * dx
    exact = no_spread(residual, max(np.abs(x).max(), np.abs(y).max()))
    return Line(slope, mean_y - slope * mean_x, mean_x, sum_xx, float(residual @ residual), exact)
