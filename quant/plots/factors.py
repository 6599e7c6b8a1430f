"""Errors against the number of factors."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import MaxNLocator

from quant.calibration.result import AnalyteResult
from quant.plots.style import (
    ABOVE,
    BLUE,
    INK,
    LINE,
    RULE,
    SMALL,
    THIN,
    axes_or_new,
    label_axes,
    legend,
    logarithmic,
    with_unit,
)

LOGARITHMIC_FROM = 8.0  # ratio of the largest error to the smallest


def plot_factors(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw RMSECV (± its standard error) and RMSEC against the number of factors.

    The chosen number is marked, and what each rule would choose. No factor at all, the mean, is left to the table.
    """
    crossed = result.cross_validation
    ax = axes_or_new(ax)
    counts = np.array(crossed.factor_counts)
    shown = counts >= min(1, int(counts[-1]))
    fitted = {count: value for count, value in enumerate(result.picture.rmsec) if count in counts[shown]}
    if counts.size == 1:  # a straight line has no simpler self
        fitted = {int(counts[0]): float(result.picture.rmsec[-1])}
    bars = ax.errorbar(counts[shown], crossed.rmsecv[shown], yerr=crossed.rmsecv_se[shown], color=BLUE, marker="D",
                       markersize=3.5, linewidth=LINE, elinewidth=THIN, capsize=2.5, capthick=THIN)  # fmt: skip
    bars.set_label("RMSECV ± standard error (left out)")
    ax.plot(list(fitted), list(fitted.values()), color=RULE, marker="o", markersize=4, markerfacecolor="white",
            linewidth=LINE, linestyle=(0, (4, 2)), label="RMSEC (fitted)")  # fmt: skip
    ax.axvline(result.factors, color=INK, linewidth=THIN, zorder=0)
    ax.plot([result.factors], [crossed.rmsecv[crossed.factor_counts.index(result.factors)]], linestyle="none",
            marker="o", markersize=11, markerfacecolor="none", markeredgecolor=INK, markeredgewidth=LINE,
            label=f"chosen: {result.factors} ({result.rule})")  # fmt: skip
    _scale(ax)
    for row, (rule, count) in enumerate(crossed.choices.items()):
        height = 0.96 - 0.075 * row
        ax.plot([count], [height], marker="v", markersize=4, color=INK, transform=ax.get_xaxis_transform())
        left = count > 0.7 * counts[-1]  # of its mark, where there is no room to the right
        ax.annotate(f"{rule.replace('_', ' ')}: {count}", (count, height), xycoords=ax.get_xaxis_transform(),
                    xytext=(-6 if left else 6, 0), textcoords="offset points", ha="right" if left else "left",
                    va="center", fontsize=SMALL, color=INK)  # fmt: skip
    label_axes(ax, "number of factors", with_unit("error", result.unit))
    legend(ax, ncols=3, **ABOVE)
    return ax


def _scale(ax: Axes) -> None:
    """Whole numbers below; errors from zero, or on a logarithmic scale where they differ much."""
    ax.xaxis.set_major_locator(MaxNLocator(nbins=16, integer=True))
    heights = np.concatenate([np.asarray(line.get_ydata(), dtype=np.float64) for line in ax.get_lines()[:2]])
    positive = heights[heights > 0]
    if positive.size and positive.max() > LOGARITHMIC_FROM * positive.min():
        ax.set_yscale("log")
        logarithmic(ax.yaxis)
        low, high = ax.get_ylim()
        ax.set_ylim(low, high * (high / low) ** 0.3)
    else:
        ax.set_ylim(0, 1.35 * ax.get_ylim()[1])
