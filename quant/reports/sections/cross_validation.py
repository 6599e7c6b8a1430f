"""Cross-validation, and how it chose the number of factors."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.plots.factors import plot_factors
from quant.reports.pictures import picture


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the scheme, a row for each number of factors, what each rule chooses, and the picture."""
    crossed = analyte.cross_validation
    fitted = analyte.picture.rmsec
    if len(crossed.factor_counts) == 1:
        fitted = fitted[-1:]
    rows = [
        {
            "factors": count,
            "rmsecv": crossed.rmsecv[i],
            "se": crossed.rmsecv_se[i],
            "q2": crossed.q2[i],
            "rmsec": fitted[i] if i < len(fitted) else None,
            "rules": ", ".join(rule.replace("_", " ") for rule, c in crossed.choices.items() if c == count),
            "chosen": count == analyte.factors,
        }
        for i, count in enumerate(crossed.factor_counts)
    ]
    caption = "Errors of left-out and of fitted samples; triangles: what each rule would choose."
    return {
        "scheme": crossed.scheme,
        "n_samples": crossed.n_samples,
        "n_units": crossed.n_units,
        "n_folds": crossed.n_folds,
        "unit": analyte.unit,
        "rows": rows,
        "chosen": analyte.factors,
        "rule": analyte.rule,
        "chose": bool(crossed.choices),
        "notes": crossed.guard_notes,
        "origins": list(analyte.rmsecv_by_origin.items()),
        "pictures": [picture(plot_factors, analyte, f"{place}-factors", caption)] if crossed.choices else [],
    }
