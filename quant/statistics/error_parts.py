"""What an error is made of: the spectrum's presentation, the calibration, the laboratory's values.

Variances are estimated, never clipped: one that comes out negative says that the part is too small to be seen.
"""

import math
from dataclasses import dataclass

from quant.errors import ParameterError
from quant.result import Result, documented
from quant.statistics.intervals import NOT_RESOLVABLE
from quant.statistics.quantiles import rmse_confidence_interval
from quant.text_table import Row, format_rows


@dataclass(frozen=True, kw_only=True)
class CorrectedRmsep(Result):
    """Root mean square error against reference values, and against true values."""

    apparent: float = documented("RMSEP against reference values", "unit of the analyte")
    reference_sd: float = documented("Standard error of one reference value", "unit of the analyte")
    corrected: float | None = documented(
        "RMSEP against true values, or None where the laboratory's variance is more than half", "unit of the analyte"
    )
    low: float | None = documented(
        "Lower end of its confidence interval; None where it cannot be told from zero", "unit of the analyte"
    )
    high: float | None = documented("Upper end of its confidence interval", "unit of the analyte")
    probability: float = documented("Two-sided confidence of the interval")
    note: str = documented("Why there is no corrected value, or empty")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("RMSEP, apparent", self.apparent, ""),
            ("RMSEP, corrected", self.note or self.corrected, ""),
        ]

    def __str__(self) -> str:
        return f"Apparent and corrected RMSEP\n{format_rows(self.rows())}"


@dataclass(frozen=True, kw_only=True)
class ErrorParts(Result):
    """Variances that make up the squared standard error of one prediction."""

    presentation: float = documented("Of this sample's spectrum, from replicates", "unit of the analyte, squared")
    calibration: float = documented("Of the calibration: leverage times s0²", "unit of the analyte, squared")
    unexplained: float = documented(
        "What s0² holds beyond presentation and laboratory; negative where those are overstated",
        "unit of the analyte, squared",
    )
    laboratory: float = documented("Of one reference value", "unit of the analyte, squared")

    @property
    def true_value(self) -> float:
        """Variance against the true value. [unit of the analyte, squared]"""
        return self.presentation + self.calibration + self.unexplained

    @property
    def reference_result(self) -> float:
        """Variance against a new reference result. [unit of the analyte, squared]"""
        return self.true_value + self.laboratory


def corrected_rmsep(rmsep: float, reference_sd: float, n_samples: int, probability: float = 0.95) -> CorrectedRmsep:
    """Take the laboratory's variance out of an apparent RMSEP: sqrt(RMSEP² - s_ref²).

    Where s_ref² is more than half of RMSEP², the difference is mostly chance and no value is given.

    Parameters
    ----------
    rmsep : float
        RMSEP of independent samples, apparent. [unit of the analyte]
    reference_sd : float
        s_ref, standard error of one of their reference values. [unit of the analyte]
    n_samples : int
        Number of samples behind RMSEP.
    probability : float
        Two-sided confidence of the interval, inside (0, 1).

    Raises
    ------
    NotEnoughDataError
        No sample.
    ParameterError
        Negative or non-finite errors, or a probability outside (0, 1).

    References
    ----------
    .. [1] K. Faber, B.R. Kowalski, Appl. Spectrosc. 51 (1997) 660-665 (from memory; the bound of one half is this
       program's own).
    """
    if not (math.isfinite(reference_sd) and reference_sd >= 0):
        raise ParameterError(f"reference_sd = {reference_sd}; expected a standard deviation, finite and not negative.")
    ends = rmse_confidence_interval(rmsep, n_samples, probability)
    resolvable = reference_sd**2 <= rmsep**2 / 2
    low, corrected, high = (_without(value, reference_sd) for value in (ends[0], rmsep, ends[1]))
    return CorrectedRmsep(
        apparent=rmsep,
        reference_sd=reference_sd,
        corrected=corrected if resolvable else None,
        low=low if resolvable else None,
        high=high if resolvable else None,
        probability=probability,
        note="" if resolvable else NOT_RESOLVABLE,
    )


def error_parts(
    base_variance: float, leverage: float, *, presentation: float, presentation_calibration: float, laboratory: float
) -> ErrorParts:
    """Split the variance s0²·(1 + h) of a prediction, corrected for its own number of replicates.

    s0² = presentation of the standards + laboratory + unexplained; the calibration's part is h·s0².

    Parameters
    ----------
    base_variance : float
        s0² of left-out samples, see `intervals.base_variance`. [unit of the analyte, squared]
    leverage : float
        h of the sample, 1/n included.
    presentation, presentation_calibration : float
        Variance of the mean of this sample's replicates, and of a standard's, see
        `replicate_parts.ReplicateComponents.variance_of_mean`. [unit of the analyte, squared]
    laboratory : float
        Variance of one reference value. [unit of the analyte, squared]

    Raises
    ------
    ParameterError
        A negative or non-finite base variance, leverage or laboratory variance.
    """
    if not all(math.isfinite(v) and v >= 0 for v in (base_variance, leverage, laboratory)):
        raise ParameterError(
            f"base_variance = {base_variance}, leverage = {leverage}, laboratory = {laboratory}; expected 0 or more."
        )
    return ErrorParts(
        presentation=presentation,
        calibration=leverage * base_variance,
        unexplained=base_variance - presentation_calibration - laboratory,
        laboratory=laboratory,
    )


def _without(total: float, part: float) -> float | None:
    rest = total**2 - part**2
    return math.sqrt(rest) if rest >= 0 else None
