"""Leverage against residual: which spectra the calibration does not speak for."""

from typing import NamedTuple

from matplotlib.axes import Axes
from matplotlib.transforms import Bbox

from quant.arrays import FloatArray
from quant.calibration.result import AnalyteResult
from quant.plots.style import (
    ABOVE,
    FITTED,
    INK,
    LEFT_OUT,
    LINE,
    THIN,
    VALIDATION,
    Mark,
    axes_or_new,
    figure_of,
    label_axes,
    legend,
    logarithmic,
    short,
)

MOST_NAMED = 8
NAME_SIZE = 6.5  # [point]
OFFSETS = (
    (5.0, 2.0),
    (-5.0, 2.0),
    (5.0, -8.0),
    (-5.0, -8.0),
    (5.0, 10.0),
    (-5.0, 10.0),
)  # of a name from its point [point]
SIZE = (7.6, 3.9)  # [inch]


class Group(NamedTuple):
    """Samples of one kind: their mark, IDs, leverages and residuals."""

    mark: Mark
    sample_ids: tuple[str, ...]
    leverage: FloatArray
    residual: FloatArray


def plot_applicability(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw leverage against residual with the warning limits (dashed) and the stop limits (solid).

    Left-out and validation samples beyond a warning limit are named, at most eight, the farthest first.
    """
    ax = axes_or_new(ax, SIZE)
    limits, groups = result.limits, applicability_groups(result)
    for group in groups:
        ax.plot(group.leverage, group.residual, **group.mark.options(), zorder=3)
    for warn, stop, line in (
        (limits.leverage_warn, limits.leverage_stop, ax.axvline),
        (limits.residual_warn, limits.residual_stop, ax.axhline),
    ):
        line(warn, color=INK, linewidth=THIN, linestyle=(0, (5, 3)), zorder=1)
        line(stop, color=INK, linewidth=LINE, zorder=1)
    ax.plot([], [], color=INK, linewidth=THIN, linestyle=(0, (5, 3)), label="warning limit")
    ax.plot([], [], color=INK, linewidth=LINE, label="stop limit")
    if limits.residual_warn > 0 and all((group.residual > 0).all() for group in groups):
        ax.set_yscale("log")
        logarithmic(ax.yaxis)
    if all((group.leverage > 0).all() for group in groups):
        ax.set_xscale("log")
        logarithmic(ax.xaxis)
    _name(ax, outside(groups, result))
    label_axes(ax, "leverage (1/n included)", "sum of squares of the residual spectrum")
    legend(ax, ncols=5, **ABOVE)
    return ax


def applicability_groups(result: AnalyteResult) -> list[Group]:
    """Return fitted, left-out (mean over repeats) and validation samples."""
    picture, crossed, checked = result.picture, result.cross_validation, result.validation
    _, leverage, residual = crossed.at(result.factors)
    groups = [
        Group(FITTED, result.sample_ids, picture.leverage, picture.residual),
        Group(LEFT_OUT, crossed.sample_ids, leverage.mean(axis=0), residual.mean(axis=0)),
    ]
    if checked is not None:
        groups.append(Group(VALIDATION, checked.sample_ids, checked.leverage, checked.residual))
    return groups


def outside(groups: list[Group], result: AnalyteResult) -> list[tuple[str, float, float]]:
    """Return ID, leverage and residual of the samples to name: beyond a warning limit, the farthest first."""
    limits = result.limits
    found = []
    for group in groups[1:]:  # a calibration sample stands there as left out, as a new sample would
        for sample, leverage, residual in zip(group.sample_ids, group.leverage, group.residual, strict=True):
            over = leverage / limits.leverage_warn
            if limits.residual_warn > 0:
                over = max(over, residual / limits.residual_warn)
            if over > 1:
                found.append((float(over), sample, float(leverage), float(residual)))
    found.sort(key=lambda item: (-item[0], item[1]))
    return [item[1:] for item in found[:MOST_NAMED]]


def _name(ax: Axes, samples: list[tuple[str, float, float]]) -> None:
    """Write sample IDs beside their points, each where no earlier one stands, if there is such a place."""
    ax.autoscale_view()
    taken: list[Bbox] = []
    for sample, leverage, residual in samples:
        text = short(sample)
        x, y = ax.transData.transform((leverage, residual))
        scale = figure_of(ax).dpi / 72
        width, height = scale * 0.62 * NAME_SIZE * len(text), scale * 1.25 * NAME_SIZE
        places = [Bbox.from_bounds(x + scale * dx - (width if dx < 0 else 0), y + scale * dy, width, height)
                  for dx, dy in OFFSETS]  # fmt: skip
        free = [i for i, box in enumerate(places) if not box.count_overlaps(taken)]
        choice = free[0] if free else 0
        taken.append(places[choice])
        dx, dy = OFFSETS[choice]
        ax.annotate(text, (leverage, residual), xytext=(dx, dy), textcoords="offset points", fontsize=NAME_SIZE,
                    color=INK, ha="right" if dx < 0 else "left", parse_math=False)  # fmt: skip
