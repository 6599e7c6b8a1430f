"""What can be told from a blank."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.text_table import Row


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return detection figures, those of ICH Q2(R2), and where noise and reference error come from."""
    found = analyte.audit.detection
    if found is None:
        return {"rows": [], "more": [], "ich": [], "remark": "", "unit": analyte.unit, "line": False}
    more: list[Row] = [
        ("method standard deviation (ISO 8466-1)", found.method_sd, analyte.unit),
        ("the same over the mean content", found.method_cv, "%"),
        ("noise of one point", found.signal_sd, f"({found.signal_sd_source})"),
        ("standard error of a reference value", found.reference_sd, f"{analyte.unit} ({found.reference_sd_source})"),
        ("sensitivity", None if found.interval is None else found.interval.sensitivity, f"per {analyte.unit}"),
        ("selectivity", found.selectivity, ""),
        ("analytical sensitivity", found.analytical_sensitivity, f"per {analyte.unit}"),
    ]
    return {
        "rows": [row for row in found.rows() if row[1] is not None],
        "more": [row for row in more if row[1] is not None],
        "ich": found.ich,
        "remark": found.remark,
        "unit": analyte.unit,
        "line": found.line is not None,
    }
