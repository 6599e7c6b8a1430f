"""All figures of merit of one set of predictions, in one record; each alone is a function that this file hands on."""

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeVar

from numpy.typing import ArrayLike

from quant.checks import one_of, paired_vectors
from quant.errors import NotEnoughDataError
from quant.result import Result, documented
from quant.statistics.error_figures import (
    bias,
    correlation_squared,
    press,
    q2,
    r2_determination,
    range_error_ratio,
    rmse,
    rpd,
    sep,
    standard_error_of_calibration,
)
from quant.statistics.quantiles import rmse_confidence_interval
from quant.statistics.significance import (
    DIRECTIONS,
    REFERENCE_ON_PREDICTED,
    BiasTest,
    Line,
    SlopeInterceptTest,
    bias_test,
    fit_line,
    slope_intercept_test,
)
from quant.text_table import Row, format_rows

__all__ = [
    "KINDS",
    "Figures",
    "bias",
    "correlation_squared",
    "figures_of_merit",
    "press",
    "q2",
    "r2_determination",
    "range_error_ratio",
    "rmse",
    "rmse_confidence_interval",
    "rpd",
    "sep",
    "standard_error_of_calibration",
]

KINDS = ("RMSE", "RMSEC", "RMSECV", "RMSEP")  # in general; of fitted, of left-out, of new samples

T = TypeVar("T")


@dataclass(frozen=True, kw_only=True)
class Figures(Result):
    """How one set of predictions compares with its reference values; None where the set is too small to say."""

    kind: str = documented("Whose errors these are: RMSEC fitted, RMSECV left-out, RMSEP new samples, RMSE any")
    unit: str = documented("Unit of the analyte")
    n_samples: int = documented("Number of samples")
    n_factors: int | None = documented("Factors of the model, where SEC was asked for")
    probability: float = documented("Confidence of interval and tests, two-sided")
    rmse: float = documented("Root mean square error, divided by n", "unit of the analyte")
    rmse_low: float = documented("Lower end of its confidence interval", "unit of the analyte")
    rmse_high: float = documented("Upper end of its confidence interval", "unit of the analyte")
    sec: float | None = documented("Standard error of calibration, divided by n - A - 1", "unit of the analyte")
    bias: float = documented("Mean of predicted - reference", "unit of the analyte")
    sep: float | None = documented("Standard deviation of the errors about the bias, n - 1", "unit of the analyte")
    press: float = documented("Sum of squared errors", "unit of the analyte, squared")
    r2_determination: float | None = documented(
        "1 - SSE/SST about the mean of these reference values; Q² where the predictions are of left-out samples"
    )
    correlation_squared: float | None = documented("Squared correlation of predicted and reference values")
    rpd: float | None = documented("Standard deviation of these reference values over SEP")
    range_error_ratio: float | None = documented("Range of these reference values over SEP")
    direction: str = documented("Which of the two values the line below puts on which")
    slope: float | None = documented("Slope of the least squares line")
    intercept: float | None = documented("Intercept of the least squares line", "unit of the analyte")
    residual_sd: float | None = documented("Residual standard deviation of the line, n - 2", "unit of the analyte")
    bias_test: BiasTest | None = documented("Is the bias more than chance?")
    line_test: SlopeInterceptTest | None = documented("Does the slope differ from one, the intercept from zero?")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        r2_name = "Q²" if self.kind == "RMSECV" else "R² (determination)"
        confidence = f"{100 * self.probability:g} %"
        return [
            ("samples", self.n_samples, ""),
            (self.kind, self.rmse, self.unit),
            (f"{self.kind}, {confidence} from", self.rmse_low, self.unit),
            (f"{self.kind}, {confidence} to", self.rmse_high, self.unit),
            *([("SEC", self.sec, self.unit)] if self.n_factors is not None else []),
            ("bias", self.bias, self.unit),
            ("SEP", self.sep, self.unit),
            (r2_name, self.r2_determination, ""),
            ("correlation²", self.correlation_squared, ""),
            ("RPD", self.rpd, ""),
            ("range/SEP", self.range_error_ratio, ""),
            ("line", self.direction, ""),
            ("slope", self.slope, ""),
            ("intercept", self.intercept, self.unit),
            ("residual SD of the line", self.residual_sd, self.unit),
            *(self.bias_test.rows() if self.bias_test else []),
            *(self.line_test.rows() if self.line_test else []),
        ]

    def __str__(self) -> str:
        return f"Figures of merit\n{format_rows(self.rows())}"


def figures_of_merit(
    predicted: ArrayLike,
    reference: ArrayLike,
    *,
    direction: str = REFERENCE_ON_PREDICTED,
    unit: str = "",
    kind: str = "RMSE",
    n_factors: int | None = None,
    probability: float = 0.95,
) -> Figures:
    """Compute every figure that the samples allow.

    Parameters
    ----------
    predicted, reference : array of shape (n_samples,)
        One pair a sample, one at least. [unit of the analyte]
    direction : {"reference on predicted", "predicted on reference"}
        The regression to test: the first for PLS and PCR, the second for band area.
    unit : str
        Unit of the analyte, printed behind its figures.
    kind : {"RMSE", "RMSEC", "RMSECV", "RMSEP"}
        Whose errors these are, which names the root mean square error.
    n_factors : int, optional
        Factors of the mean-centred model these samples were fitted with, for SEC.
    probability : float
        Two-sided confidence of interval and tests, inside (0, 1).

    Raises
    ------
    SampleMismatchError
        `predicted` and `reference` differ in length.
    NotEnoughDataError
        There is no pair.
    ParameterError
        A value that is not finite, an unknown direction or kind, a negative number of factors, or a probability
        outside (0, 1).
    """
    x, y = paired_vectors("predicted values", predicted, "reference values", reference)
    one_of("direction", direction, DIRECTIONS)
    low, high = rmse_confidence_interval(rmse(x, y), x.size, probability)
    line = _if_possible(lambda: fit_line(x, y, direction))
    return Figures(
        kind=one_of("kind", kind, KINDS),
        unit=unit,
        n_samples=x.size,
        n_factors=n_factors,
        probability=probability,
        rmse=rmse(x, y),
        rmse_low=low,
        rmse_high=high,
        sec=None if n_factors is None else _if_possible(lambda: standard_error_of_calibration(x, y, n_factors)),
        bias=bias(x, y),
        sep=_if_possible(lambda: sep(x, y)),
        press=press(x, y),
        r2_determination=_if_possible(lambda: r2_determination(x, y)),
        correlation_squared=_if_possible(lambda: correlation_squared(x, y)),
        rpd=_if_possible(lambda: rpd(x, y)),
        range_error_ratio=_if_possible(lambda: range_error_ratio(x, y)),
        direction=direction,
        slope=line.slope if line else None,
        intercept=line.intercept if line else None,
        residual_sd=_residual_sd(line, x.size),
        bias_test=_if_possible(lambda: bias_test(x, y, probability)),
        line_test=_if_possible(lambda: slope_intercept_test(x, y, direction, probability)),
    )


def _if_possible(compute: Callable[[], T]) -> T | None:
    try:
        return compute()
    except NotEnoughDataError:
        return None


def _residual_sd(line: Line | None, n_samples: int) -> float | None:
    if line is None or n_samples < 3:
        return None
    return math.sqrt(line.sum_residuals / (n_samples - 2))
