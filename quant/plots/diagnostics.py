"""Diagnostics: samples that pull or stand out, the joint ellipse of slope and intercept, what the model looks at."""

import numpy as np
from matplotlib.axes import Axes

from quant.calibration.result import AnalyteResult
from quant.plots.style import (
    ABOVE,
    BLUE,
    FITTED,
    INK,
    LEFT_OUT,
    LINE,
    OCHRE,
    RULE,
    SMALL,
    THIN,
    VALIDATION,
    axes_or_new,
    label_axes,
    legend,
    short,
    spectral_axis,
    with_unit,
)
from quant.spectra.segments import segments
from quant.statistics.joint_ellipse import ellipse_points

SQUARE = (4.4, 4.2)  # [inch]
MOST_NAMED = 8
DASHED = (0, (4, 2))


def plot_influence(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw studentised errors of the fit against leverage with their limits; samples that stand out are named."""
    found = result.audit.diagnostics
    ax = axes_or_new(ax, SQUARE)
    if found.studentised is not None:
        ax.plot(found.leverage, found.studentised, **FITTED.options(), zorder=3)
        named = {row.sample for row in found.outstanding}
        order = np.argsort(-np.abs(np.nan_to_num(found.studentised)), kind="stable")
        for i in [i for i in order if result.sample_ids[i] in named and np.isfinite(found.studentised[i])][:MOST_NAMED]:
            ax.annotate(short(result.sample_ids[i]), (found.leverage[i], found.studentised[i]), xytext=(5, 2),
                        textcoords="offset points", fontsize=SMALL, color=INK, parse_math=False)  # fmt: skip
        if found.studentised_limit is not None:
            for limit in (found.studentised_limit, -found.studentised_limit):
                ax.axhline(limit, color=RULE, linewidth=LINE, linestyle=DASHED, zorder=1)
    ax.axvline(found.leverage_flag, color=RULE, linewidth=LINE, linestyle=DASHED, zorder=1)
    ax.axhline(0.0, color=INK, linewidth=THIN, zorder=1)
    label_axes(ax, "leverage (1/n included)", "studentised error of the fit")
    return ax


def plot_ellipse(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw the joint 95 % ellipses of intercept and slope, of left-out and of validation samples."""
    found = result.audit.diagnostics
    ax = axes_or_new(ax, SQUARE)
    for test, mark in ((found.joint, LEFT_OUT), (found.joint_validation, VALIDATION)):
        if test is not None:
            intercepts, slopes = ellipse_points(test)
            ax.plot(intercepts, slopes, color=mark.colour, linewidth=LINE, label=mark.label, zorder=2)
            ax.plot([test.intercept], [test.slope], **{**mark.options(), "label": None}, zorder=3)
    ax.plot([0.0], [1.0], linestyle="none", marker="+", markersize=11, color=INK, label="no error", zorder=4)
    label_axes(ax, with_unit("intercept", result.unit), "slope")
    legend(ax, ncols=2, **ABOVE)
    return ax


def plot_importance(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw VIP and selectivity ratio along the processed axis, each over its largest value; nothing for band area."""
    found, picture = result.audit.diagnostics, result.picture
    ax = axes_or_new(ax)
    for values, name, colour in ((found.vip, "VIP", BLUE), (found.selectivity_ratio, "selectivity ratio", OCHRE)):
        if values is None or not np.isfinite(values).any() or np.nanmax(values) <= 0:
            continue
        label = f"{name}, largest {np.nanmax(values):.3g}"
        for number, run in enumerate(segments(picture.processed_axis)):
            ax.plot(picture.processed_axis[run], values[run] / np.nanmax(values), color=colour, linewidth=LINE,
                    label=label if number == 0 else None)  # fmt: skip
    ax.set_ylim(bottom=0.0)
    label_axes(ax, spectral_axis(ax, picture.processed_axis, picture.axis_unit), "importance,\nlargest = 1")
    if ax.get_lines():
        legend(ax, ncols=2, **ABOVE)
    return ax
