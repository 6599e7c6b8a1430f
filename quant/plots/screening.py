"""RMSECV over the position and the width of windows."""

import numpy as np
from matplotlib.axes import Axes

from quant.errors import ParameterError
from quant.plots.style import (
    ABOVE,
    INK,
    SMALL,
    THIN,
    VALUES,
    axes_or_new,
    figure_of,
    label_axes,
    legend,
    spectral_axis,
    with_unit,
)
from quant.screening.result import ScreenResult
from quant.units import AXIS_UNITS

SIZE = (7.6, 4.2)  # [inch]
WORST = 75.0  # percentile of RMSECV that already has the colour of the worst: differences among good ones count


def plot_windows(result: ScreenResult, ax: Axes | None = None) -> Axes:
    """Draw RMSECV of every window behind the winner's preprocessing over its middle and its width.

    The lowest is marked, and the winner, if it is a window. Windows that were not drawn from a larger number stay
    blank.

    Parameters
    ----------
    result : ScreenResult
    ax : Axes, optional
        Where to draw; default: a new figure.

    Raises
    ------
    ParameterError
        The search was not one of windows.
    """
    found = result.windows
    if found is None:
        raise ParameterError('No windows were searched; expected a result of search = "windows". Draw another one.')
    ax = axes_or_new(ax, SIZE)
    start, stop = np.array(found.start), np.array(found.stop)
    n = found.edges.size - 1
    grid = np.full((n, n), np.nan)
    grid[start, stop - 1] = found.rmsecv
    # A window has two ends; a cell reaches half a block about each. In middle and width it becomes a rhombus.
    ends = np.concatenate(
        [2 * found.edges[:1] - found.edges[1:2], found.edges, 2 * found.edges[-1:] - found.edges[-2:-1]]
    )
    middles = (ends[1:] + ends[:-1]) / 2
    first, last = np.meshgrid(middles[:-1], middles[1:], indexing="ij")
    drawn = ax.pcolormesh(
        (first + last) / 2, np.abs(last - first), np.ma.masked_invalid(grid), cmap=VALUES, shading="flat",
        rasterized=True, vmin=float(found.rmsecv.min()), vmax=float(np.percentile(found.rmsecv, WORST)),
    )  # fmt: skip
    ax.set_ylim(0, 1.03 * float(np.ptp(found.edges)))
    best = int(np.argmin(found.rmsecv))
    _mark(ax, "lowest", "o", (float(found.edges[start[best]]), float(found.edges[stop[best]])))
    if len(result.winner.ranges) == 1:
        _mark(ax, "winner", "s", result.winner.ranges[0])
    legend(ax, ncols=2, **ABOVE)
    label = spectral_axis(ax, found.edges, result.axis_unit)
    label_axes(ax, f"middle of the window: {label}", with_unit("width", AXIS_UNITS[result.axis_unit]))
    bar = figure_of(ax).colorbar(drawn, ax=ax, extend="max")
    bar.set_label(with_unit("RMSECV", result.unit), fontsize=SMALL, color=INK, parse_math=False)
    bar.ax.tick_params(labelsize=SMALL, colors=INK, width=THIN)
    return ax


def _mark(ax: Axes, name: str, shape: str, ends: tuple[float, float]) -> None:
    low, high = sorted(ends)
    ax.plot([(low + high) / 2], [high - low], linestyle="none", marker=shape, markersize=9 if shape == "o" else 6,
            markerfacecolor="none", markeredgecolor=INK, label=f"{name}: {low:g} to {high:g}")  # fmt: skip
