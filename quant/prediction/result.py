"""The table that predicting leaves."""

import csv
import io
import math
from dataclasses import dataclass

from quant.prediction.applicability import NOT_APPLICABLE
from quant.result import Result, documented
from quant.text_table import format_columns

ACCEPT = "accept"  # as `quant.statistics.conformity` has it, which is loaded only where there is a limit


@dataclass(frozen=True, kw_only=True)
class Prediction(Result):
    """One analyte in one sample."""

    sample: str = documented("Sample ID")
    analyte: str = documented("Name of the analyte")
    value: float = documented("Predicted value, mean over replicates", "unit of the analyte")
    unit: str = documented("Unit of value, standard error and intervals")
    standard_error: float = documented(
        "Standard error of the value against a new reference result", "unit of the analyte"
    )
    low: float = documented("Lower end of the 95 % interval for a new reference result", "unit of the analyte")
    high: float = documented("Upper end of it", "unit of the analyte")
    true_low: float | None = documented(
        "Lower end of the 95 % interval for the true value, where it can be told", "unit of the analyte"
    )
    true_high: float | None = documented("Upper end of it", "unit of the analyte")
    true_note: str = documented("Why there is no interval for the true value, or empty")
    free_low: float | None = documented(
        "Lower end of the distribution-free interval for a new reference result", "unit of the analyte"
    )
    free_high: float | None = documented("Upper end of it", "unit of the analyte")
    scaled_low: float | None = documented(
        "Lower end of the same with errors taken to grow with the level", "unit of the analyte"
    )
    scaled_high: float | None = documented("Upper end of it", "unit of the analyte")
    free_note: str = documented("Kind and probability of these two intervals, or why there are none")
    part_presentation: float | None = documented(
        "Part of the standard error from presenting the sample, by replicates; the squares of all parts add up",
        "unit of the analyte",
    )
    part_calibration: float | None = documented("Part from the calibration: s0 times √leverage", "unit of the analyte")
    part_laboratory: float | None = documented("Part from one laboratory value", "unit of the analyte")
    part_unexplained: float | None = documented(
        "Part left: model and matrix; none where the others add up to more than the whole", "unit of the analyte"
    )
    decision: str = documented(
        "accept, reject, undecided, or why nothing was decided; empty where the model has no limit"
    )
    limit: float | None = documented("The limit decided against", "unit of the analyte", default=None)
    uncertainty: float | None = documented(
        "Standard uncertainty decided with: against the true value where it can be told",
        "unit of the analyte",
        default=None,
    )
    guard_band: float | None = documented("Guard band for the risk accepted", "unit of the analyte", default=None)
    conformity: float | None = documented(
        "Probability that the true value conforms, where a decision was made", default=None
    )
    decision_remark: str = documented(
        "What would settle an undecided case, or why the method cannot decide", default=""
    )
    applicability: str = documented("applicable, warning, or not applicable: then the value must not be used")
    reasons: tuple[str, ...] = documented("Why not plainly applicable")
    residual: float = documented("Residual spectrum as a multiple of its warning limit")
    leverage: float = documented("Leverage as a multiple of its warning limit")
    n_spectra: int = documented("Number of spectra averaged")
    spread: float | None = documented("Standard deviation of the predictions of the replicates", "unit of the analyte")
    remarks: tuple[str, ...] = documented("What else should be known of this result")
    model_state: str = documented("State of the model: draft, approved, provisional or retired")


@dataclass(frozen=True, kw_only=True)
class PredictionResult(Result):
    """Predictions of all samples by one model."""

    model: str = documented("The model in one line")
    rule: str = documented("The limit decided against, its kind, source and risk; empty without one", default="")
    predictions: tuple[Prediction, ...] = documented("One entry a sample, in the order read")
    lineage: tuple[str, ...] = documented(
        "The model's number and fingerprint, and its ancestors back to the first calibration", default=()
    )

    @property
    def accepted(self) -> bool:
        """True if the model applies to every sample and, where there is a limit, every sample is accepted."""
        return all(row.applicability != NOT_APPLICABLE and row.decision in ("", ACCEPT) for row in self.predictions)

    def __getitem__(self, sample: str) -> Prediction:
        """Return the prediction of a sample by its ID."""
        for row in self.predictions:
            if row.sample == sample:
                return row
        raise KeyError(f"No sample {sample!r}; there are {', '.join(row.sample for row in self.predictions)}.")

    def __str__(self) -> str:
        """A table: sample, value, standard error, 95 % interval, applicability, decision; then the reasons."""
        header: tuple[str, ...] = ("sample", "value", "unit", "std error", "95 % from", "to", "applies?")
        digits = max(map(_decimals, self.predictions), default=0)
        table = [
            (
                row.sample,
                f"{row.value:.{digits}f}",
                row.unit,
                *(f"{number:.{digits}f}" for number in (row.standard_error, row.low, row.high)),
                row.applicability,
                *((row.decision, _probability(row)) if self.rule else ()),
            )
            for row in self.predictions
        ]
        header += ("decision", "conforms") if self.rule else ()
        ancestry = self.lineage if len(self.lineage) > 1 else ()  # a first calibration has nothing to tell
        lines = [self.model, *ancestry, *([self.rule] if self.rule else []), format_columns(header, table)]
        common = [text for text in self._remarks() if all(text in row.remarks for row in self.predictions)]
        for row in self.predictions:
            told = [*row.reasons, *(text for text in row.remarks if text not in common), row.decision_remark]
            told = [text for text in told if text]
            lines += [f"{row.sample}: {'; '.join(told)}"] if told else []
        return "\n".join([*lines, *(f"all samples: {text}" for text in common)])

    def _remarks(self) -> list[str]:
        return list(dict.fromkeys(text for row in self.predictions for text in row.remarks))

    def to_csv(self) -> str:
        """Return CSV text: a header of the documented keys, one line a sample."""
        stream = io.StringIO()
        writer: csv.DictWriter[str] | None = None
        for row in self.predictions:
            cells = {
                key: "; ".join(value) if isinstance(value, list) else value for key, value in row.to_dict().items()
            }
            if writer is None:
                writer = csv.DictWriter(stream, list(cells), lineterminator="\n")
                writer.writeheader()
            writer.writerow(cells)
        return stream.getvalue()


def _probability(row: Prediction) -> str:
    """The probability of conformity in percent, never rounded to certainty."""
    if row.conformity is None:
        return "–"
    percent = 100 * row.conformity
    return "> 99.9 %" if percent > 99.9 else "< 0.1 %" if percent < 0.1 else f"{percent:.1f} %"


def _decimals(row: Prediction) -> int:
    """Decimals that show two significant digits of the standard error: more say nothing."""
    error = row.standard_error
    return min(max(1 - math.floor(math.log10(error)), 0), 12) if 0 < error < math.inf else 3
