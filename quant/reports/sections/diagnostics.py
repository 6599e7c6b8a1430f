"""Which samples stand out, what the model looks at, and whether errors behave."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.plots.diagnostics import plot_ellipse, plot_importance, plot_influence
from quant.reports.pictures import Picture, picture
from quant.text_table import Row


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return samples that stand out, trends, tests of the errors' shape, limits, and the pictures."""
    found = analyte.audit.diagnostics
    rows: list[Row] = [
        ("Hotelling's T², 99 % limit for calibration samples", found.t_squared_limit, ""),
        ("Hotelling's T², 99 % limit for new samples", found.t_squared_limit_new, ""),
        ("leverage to look at (three times the mean)", found.leverage_flag, ""),
        ("residual spectrum Q, 99 % limit from left-out samples", found.residual_limit, ""),
        ("studentised error, 99 % limit over all samples", found.studentised_limit, ""),
        ("largest distance between neighbours (gap limit)", found.gap_limit, ""),
    ]
    shape = found.normality
    tests: list[Row] = [] if shape is None else list(shape.rows())
    for test, whose in ((found.joint, "left-out"), (found.joint_validation, "validation")):
        if test is not None:
            tests += [(f"{name}, {whose} samples", value, unit) for name, value, unit in test.rows()]
    for line in (found.mandel, found.lack_of_fit):
        tests += [] if line is None else line.rows()
    return {
        "outstanding": found.outstanding,
        "trends": found.trends,
        "rows": rows,
        "tests": tests,
        "normal": None if shape is None else shape.within_rule,
        "pictures": _pictures(analyte, place),
    }


def _pictures(analyte: AnalyteResult, place: str) -> list[Picture]:
    found = analyte.audit.diagnostics
    pictures = []
    if found.studentised is not None:
        caption = "Studentised errors of the fit against leverage; dashed: limits. Samples that stand out are named."
        pictures.append(picture(plot_influence, analyte, f"{place}-influence", caption, narrow=True))
    if found.joint is not None or found.joint_validation is not None:
        caption = "Joint 95 % confidence of intercept and slope. The cross has to lie inside."
        pictures.append(picture(plot_ellipse, analyte, f"{place}-ellipse", caption, narrow=True))
    if found.selectivity_ratio is not None:
        caption = "Where the model looks: variable importance (VIP) and selectivity ratio along the axis."
        pictures.append(picture(plot_importance, analyte, f"{place}-importance", caption))
    return pictures
