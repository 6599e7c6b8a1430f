"""The data: samples, spectra, axis, and who was left out."""

from collections import Counter
from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.checks import name_some
from quant.model.calibration import Uncertainty
from quant.text_table import Row
from quant.units import AXIS_UNITS, QUANTITIES

MOST_NAMES = 40


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the sizes of the data, samples left out by reason, remarks, and samples without a partner."""
    reasons: dict[str, list[str]] = {}
    for item in analyte.left_out:
        reasons.setdefault(item.reason, []).append(item.sample)
    return {
        "rows": _rows(analyte),
        "left_out": [(name_some(samples, MOST_NAMES), reason) for reason, samples in reasons.items()],
        "remarks": analyte.remarks,
        "without_values": name_some(result.spectra_without_values, MOST_NAMES),
        "without_spectra": name_some(result.values_without_spectra, MOST_NAMES),
    }


def _rows(result: AnalyteResult) -> list[Row]:
    model, checked, known = result.model, result.validation, result.uncertainty
    axis, unit = model.axis.values, AXIS_UNITS[model.axis.unit]
    notes = [(note, ", ".join(values), "") for note, values in model.domain.items()]
    counted = Counter(result.origins)
    return [
        ("calibration samples", result.n_samples, ""),
        ("calibration spectra", result.n_spectra, ""),
        ("spectra a sample", f"{known.replicates:.3g} (harmonic mean)", ""),
        ("validation samples", 0 if checked is None else len(checked.sample_ids), ""),
        ("origins of the calibration samples", ", ".join(f"{n} {origin}" for origin, n in counted.items()), ""),
        ("ordinate as read", QUANTITIES[model.quantity], ""),
        ("axis", f"{axis[0]:g} to {axis[-1]:g} {unit}, {axis.size} points", ""),
        *notes,
        ("reference values from", float(result.reference.min()), result.unit),
        ("reference values to", float(result.reference.max()), result.unit),
        ("standard error of the laboratory", *_laboratory(known, result.unit)),
    ]


def _laboratory(known: Uncertainty, unit: str) -> tuple[object, str]:
    if known.laboratory_error is None:
        return "not stated", ""
    source = f"({known.laboratory_error_source})" if known.laboratory_error_source else ""
    return known.laboratory_error, f"{unit} {source}".strip()
