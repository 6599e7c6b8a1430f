"""A revalidation: the bias against what is allowed, the standards one by one, the remedies side by side."""

from typing import Any

import numpy as np
from matplotlib.axes import Axes

from quant.plots.style import (
    BLUE,
    HALF,
    INK,
    LINE,
    OCHRE,
    RULE,
    SHADE,
    SMALL,
    THIN,
    VERMILION,
    axes_or_new,
    label_axes,
    legend,
    with_unit,
    zero_line,
)
from quant.revalidation.history import ControlChart
from quant.revalidation.result import RevalidationResult

STRIP = (4.6, 1.15)  # [inch]


def plot_equivalence(result: RevalidationResult, ax: Axes | None = None) -> Axes:
    """Draw the 90 % interval of the bias over the band that is allowed."""
    ax = axes_or_new(ax, STRIP)
    allowed, bias = result.basis.allowed_bias, result.bias
    ax.axvspan(-allowed, allowed, color=SHADE, zorder=0)
    ax.axvline(0.0, color=INK, linewidth=THIN, zorder=1)
    if bias is not None:
        colour = BLUE if bias.shown else VERMILION
        ax.plot([bias.low, bias.high], [0, 0], color=colour, linewidth=3 * LINE, solid_capstyle="butt", zorder=2)
        ax.plot([bias.bias], [0], marker="D", color=colour, markersize=5, zorder=3)
    ax.set_ylim(-1, 1)
    ax.set_yticks([])
    ax.spines["left"].set_visible(False)
    ax.margins(x=0.08)
    label_axes(ax, with_unit("bias, with what is allowed shaded", result.unit), "")
    return ax


def plot_standards(result: RevalidationResult, ax: Axes | None = None) -> Axes:
    """Draw each standard's difference over its reference value, with the bias allowed and the bias found."""
    ax = axes_or_new(ax, HALF)
    zero_line(ax)
    allowed = result.basis.allowed_bias
    ax.axhspan(-allowed, allowed, color=SHADE, zorder=0)
    errors = result.after - result.reference
    marks: dict[str, Any] = {"linestyle": "none", "markersize": 4.5}
    if result.before is not None:
        ax.plot(
            result.reference, result.after - result.before, marker="o", color=VERMILION, label="after − before", **marks
        )
    ax.plot(
        result.reference,
        errors,
        marker="s",
        markerfacecolor="none",
        markeredgecolor=BLUE,
        label="after − reference",
        **marks,
    )
    label_axes(ax, with_unit(f"reference {result.analyte}", result.unit), with_unit("difference", result.unit))
    ax.margins(y=0.2)
    legend(ax, loc="upper left", ncols=2)
    return ax


def plot_remedies(result: RevalidationResult, ax: Axes | None = None) -> Axes:
    """Draw the SEP to expect behind each remedy, the proposed one marked, with the validated and the allowed SEP."""
    ax = axes_or_new(ax, HALF)
    rows = [row for row in result.remedies if row.expected_sep is not None][::-1]
    sizes = [row.expected_sep or 0.0 for row in rows]
    colours = [OCHRE if row.proposed else RULE if row.qualifies else SHADE for row in rows]
    ax.barh(np.arange(len(rows)), sizes, color=colours, edgecolor=RULE, linewidth=THIN, height=0.62)
    ax.axvline(result.basis.allowed_sep, color=INK, linewidth=THIN, linestyle=(0, (4, 2)))
    ax.axvline(result.basis.sep, color=BLUE, linewidth=THIN)
    ax.set_yticks(np.arange(len(rows)), [row.name.replace("_", " ") for row in rows], fontsize=SMALL)
    label_axes(ax, with_unit("expected SEP", result.unit), "")
    return ax


def plot_history(chart: ControlChart, ax: Axes | None = None) -> Axes:
    """Draw single values and EWMA with their limits, and the interval in which the mean moved."""
    ax = axes_or_new(ax)
    place = np.arange(chart.values.size)
    for level in (chart.low, chart.high):
        ax.axhline(level, color=RULE, linewidth=THIN, linestyle=(0, (4, 2)))
    ax.axhline(chart.target, color=INK, linewidth=THIN)
    if chart.change is not None:
        ax.axvspan(chart.change.earliest - 0.5, chart.change.latest - 0.5, color=SHADE, zorder=0, label="mean moved")
    ax.fill_between(place, chart.target - chart.ewma_half, chart.target + chart.ewma_half, color=BLUE, alpha=0.12)
    ax.plot(place, chart.values, marker="o", markersize=3.5, linestyle="none", color=RULE, label="single values")
    ax.plot(place, chart.ewma, color=BLUE, linewidth=LINE, label="EWMA, with its limits")
    beyond = list(chart.beyond)
    ax.plot(place[beyond], chart.values[beyond], marker="o", markersize=4.5, linestyle="none", color=VERMILION)
    ticks = np.unique(np.linspace(0, place.size - 1, min(place.size, 8)).round().astype(int))
    ax.set_xticks(ticks, [chart.labels[i] for i in ticks])
    label_axes(ax, "check", "value")
    legend(ax, loc="upper left", ncols=3)
    return ax
