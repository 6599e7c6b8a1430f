"""Are errors normal? Skewness, kurtosis, and Shapiro & Wilk's test."""

import math
import warnings
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import stats

from quant.arrays import FloatArray
from quant.checks import as_vector
from quant.errors import NotEnoughDataError
from quant.result import Result, documented
from quant.statistics.error_figures import no_spread
from quant.text_table import Row, format_rows

SHAPIRO_UP_TO = 5000  # values; beyond, the p value of Shapiro & Wilk's test is not known well


@dataclass(frozen=True, kw_only=True)
class Normality(Result):
    """Shape of residuals against the normal distribution."""

    n: int = documented("Number of values")
    skewness: float = documented("Skewness g1, moments divided by n")
    skewness_limit: float = documented("2·sqrt(6/n)")
    excess_kurtosis: float = documented("Excess kurtosis g2, moments divided by n")
    kurtosis_limit: float = documented("2·sqrt(24/n)")
    within_rule: bool = documented("Whether both are within their limits: a rule of thumb")
    shapiro_p: float | None = documented("p of Shapiro & Wilk's test; None beyond 5000 values")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("skewness", self.skewness, ""),
            ("skewness, limit", self.skewness_limit, ""),
            ("excess kurtosis", self.excess_kurtosis, ""),
            ("excess kurtosis, limit", self.kurtosis_limit, ""),
            ("Shapiro-Wilk p", self.shapiro_p, ""),
        ]

    def __str__(self) -> str:
        return f"Normality of {self.n} values\n{format_rows(self.rows())}"


def normality(residuals: ArrayLike) -> Normality:
    """Skewness, excess kurtosis and Shapiro & Wilk's test of residuals.

    Parameters
    ----------
    residuals : array of shape (n,)
        Errors of predictions or residuals of a line. [any unit]

    Raises
    ------
    NotEnoughDataError
        Fewer than three values, or values that do not differ.
    ParameterError
        A value that is not finite.

    References
    ----------
    .. [1] ISO 12099 (from memory): |g1| < 2·sqrt(6/n), |g2| < 2·sqrt(24/n), a rule of thumb.
    .. [2] S.S. Shapiro, M.B. Wilk, Biometrika 52 (1965) 591-611 (from memory).
    """
    values = as_vector("residuals", residuals)
    n = values.size
    if n < 3 or no_spread(values, float(np.abs(values).max())):
        raise NotEnoughDataError(f"{n} residual(s); at least 3 that differ are needed to judge their shape.")
    scaled = (values - values.mean()) / values.std()
    skewness, kurtosis = float(np.mean(scaled**3)), float(np.mean(scaled**4)) - 3
    skewness_limit, kurtosis_limit = 2 * math.sqrt(6 / n), 2 * math.sqrt(24 / n)
    return Normality(
        n=n,
        skewness=skewness,
        skewness_limit=skewness_limit,
        excess_kurtosis=kurtosis,
        kurtosis_limit=kurtosis_limit,
        within_rule=abs(skewness) < skewness_limit and abs(kurtosis) < kurtosis_limit,
        shapiro_p=_shapiro_p(scaled) if n <= SHAPIRO_UP_TO else None,
    )


def _shapiro_p(values: FloatArray) -> float:
    with warnings.catch_warnings():  # SciPy warns of values that nearly coincide, which rounding of data makes common
        warnings.simplefilter("ignore", UserWarning)
        return float(stats.shapiro(values).pvalue)
