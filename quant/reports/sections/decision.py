"""The limit that results are decided against."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.text_table import Row


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the limit, the guard band of a typical result, and where acceptance and rejection begin."""
    rule = analyte.audit.decision
    if rule is None:
        return {"told": "", "rows": [], "decidable": True, "remark": "", "kind": "upper"}
    known, parts = analyte.uncertainty, analyte.audit.uncertainty.parts
    resolvable = known.laboratory_error is not None and known.laboratory_error**2 <= known.s0**2 / 2
    variance = parts.true_value if resolvable else parts.reference_result
    typical = max(variance, 0.0) ** 0.5
    band, sign = rule.factor * typical, 1 if rule.kind == "upper" else -1
    against = "against the true value" if resolvable else "laboratory error included"
    rows: list[Row] = [
        (f"typical standard uncertainty ({against})", typical, analyte.unit),
        ("factor, Student's t", rule.factor, ""),
        ("guard band", band, analyte.unit),
        ("accepted up to" if sign > 0 else "accepted from", rule.limit - sign * band, analyte.unit),
        ("rejected above" if sign > 0 else "rejected below", rule.limit + sign * band, analyte.unit),
    ]
    return {
        "told": rule.told,
        "rows": rows if rule.decidable else [],
        "decidable": rule.decidable,
        "remark": rule.remark,
        "kind": rule.kind,
    }
