"""Validation against standards, and against the recipe's own criteria."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the recipe's criteria, the seal, and a table a standard."""
    checked, seal = analyte.validation, analyte.audit.seal
    return {
        "criteria": analyte.criteria,
        "own": () if checked is None else checked.acceptance,
        "accepted": analyte.accepted,
        "kind": "there are no validation samples" if checked is None else checked.kind,
        "independent": seal is None or seal.independent,
        "seal": seal,
        "tables": analyte.audit.standards,
    }
