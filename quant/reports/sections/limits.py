"""What the calibration speaks for, and how its intervals are made."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.plots.applicability import plot_applicability
from quant.regression.band_area import BandArea
from quant.reports.pictures import picture
from quant.text_table import Row


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return limits, parts of the intervals, and the picture of leverage against residual."""
    limits, known = analyte.limits, analyte.uncertainty
    caption = "Leverage against residual. Samples beyond a warning limit are named, at most eight."
    rows: list[Row] = [
        ("s0, standard error of left-out samples", known.s0, analyte.unit),
        ("t (97.5 %)", known.t, ""),
        ("degrees of freedom", known.degrees_of_freedom, ""),
        ("standard error of the laboratory", _or("not stated", known.laboratory_error), analyte.unit),
        ("SD of predictions of replicates", _or("no replicates", known.replicate_sd), analyte.unit),
        ("spectra a sample in the calibration", f"{known.replicates:.3g}", ""),
    ]
    return {
        "limits": limits,
        "unit": analyte.unit,
        "rows": [(name, value, unit if not isinstance(value, str) else "") for name, value, unit in rows],
        "band": isinstance(analyte.model.method, BandArea),
        "laboratory": known.laboratory_error,
        "pictures": [picture(plot_applicability, analyte, f"{place}-limits", caption)],
    }


def _or(words: str, value: float | None) -> float | str:
    return words if value is None else value
