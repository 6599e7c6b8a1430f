"""How the calibration does on samples that took no part in it."""

from typing import Any

from quant.calibration.result import NOT_PROVEN, AnalyteResult, CalibrationResult
from quant.calibration.validate import ValidationResult
from quant.plots.agreement import plot_errors, plot_predicted
from quant.reports.pictures import Picture, picture


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return figures with tests, figures by origin, a row a sample, and the pictures."""
    checked = analyte.validation
    shared = {"unit": analyte.unit, "not_proven": NOT_PROVEN, "pictures": _pictures(analyte, place)}
    if checked is None:
        return {
            **shared,
            "kind": "",
            "how": "",
            "rows": [],
            "tests": [],
            "origins": [],
            "samples": [],
            "held": "",
            "accepted": False,
        }
    rows = checked.figures.rows()
    half = [name for name, _, _ in rows].index("line")
    return {
        **shared,
        "kind": checked.kind,
        "how": checked.how,
        "accepted": checked.accepted,
        "rows": rows[:half],
        "tests": rows[half:],
        "origins": [(origin, figures) for origin, figures in checked.by_origin.items()],
        "samples": _samples(checked),
        "held": f"{int(checked.inside.sum())} of {checked.inside.size}",
    }


def _samples(checked: ValidationResult) -> list[dict[str, Any]]:
    columns = zip(
        checked.sample_ids,
        checked.reference,
        checked.predicted,
        checked.low,
        checked.high,
        checked.inside,
        checked.applicability,
        strict=True,
    )
    names = ("sample", "reference", "predicted", "low", "high", "inside", "applicability")
    return [{**dict(zip(names, row, strict=True)), "error": row[2] - row[1]} for row in columns]


def _pictures(result: AnalyteResult, place: str) -> list[Picture]:
    agreement = "Predicted against reference values, and the line of perfect agreement"
    if result.validation is None:
        agreement += "."
        errors = "Errors of left-out samples of the cross-validation; there are no validation samples."
    else:
        agreement += "; bars: 95 % intervals."
        errors = "Errors (predicted − reference) of the validation samples with their 95 % intervals."
    return [
        picture(plot_predicted, result, f"{place}-agreement", agreement, narrow=True),
        picture(plot_errors, result, f"{place}-errors", errors, narrow=True),
    ]
