"""What the error is made of, and which next experiment would help most."""

import math
from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.text_table import Row


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the parts of the standard error, corrected errors, the budget, and what could not be told."""
    found = analyte.audit.uncertainty
    parts, stated = found.parts, analyte.uncertainty.laboratory_error is not None
    return {
        "unit": analyte.unit,
        "parts": [
            ("presentation of the sample", None if found.replicates is None else _root(parts.presentation)),
            ("calibration, at the mean leverage", _root(parts.calibration)),
            ("unexplained: model and matrix", _root(parts.unexplained)),
            ("laboratory value", _root(parts.laboratory) if stated else None),
            ("against the true value", _root(parts.true_value) if stated else None),
            ("against a new reference result", _root(parts.reference_result)),
        ],
        "replicates": _replicates(analyte),
        "corrected": [
            (name, each)
            for name, each in (
                ("cross-validation", found.corrected_cross_validation),
                ("validation", found.corrected_validation),
            )
            if each is not None
        ],
        "budget": found.budget,
        "remarks": found.remarks,
        "free": analyte.audit.free_intervals,
        "has_free": analyte.model.left_out is not None and analyte.model.left_out.finite,
    }


def _root(variance: float) -> float | None:
    """The standard error of a part; none where its variance came out below zero."""
    return math.sqrt(variance) if variance >= 0 else None


def _replicates(analyte: AnalyteResult) -> list[Row]:
    found = analyte.audit.uncertainty
    if found.replicates is None:
        return []
    scans, unit = found.replicates, analyte.unit
    rows: list[Row] = [("SD among spectra of one packing", math.sqrt(scans.scan_variance), unit)]
    if scans.pack_variance is not None:
        rows.append((f"SD among packings ({found.packing})", _root(scans.pack_variance), unit))
    if found.white_noise_sd is not None:
        rows.append(("SD of one spectrum, were its noise white", found.white_noise_sd, unit))
    return rows
