"""The regression vector with what is known to absorb marked on it."""

from typing import Any

from matplotlib.axes import Axes

from quant.calibration.band_shares import ANALYTE, GASES, MATRIX
from quant.calibration.result import AnalyteResult
from quant.plots.spectra import plot_regression_vector
from quant.plots.style import ABOVE, HATCH, axes_or_new, legend

# Told apart without colour, too: a full tint, stripes, dots.
REGIONS: dict[str, dict[str, Any]] = {
    ANALYTE: {"facecolor": "#a9cfe6", "edgecolor": "none"},
    MATRIX: {"facecolor": "none", "edgecolor": HATCH, "hatch": "////"},
    GASES[0]: {"facecolor": "none", "edgecolor": HATCH, "hatch": "xx"},
    GASES[1]: {"facecolor": "none", "edgecolor": HATCH, "hatch": ".."},
}


def plot_marked_vector(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw the regression vector and shade the bands of the analyte, of the matrix and of the air behind it.

    Parameters
    ----------
    result : AnalyteResult
    ax : Axes, optional
        Where to draw; default: a new figure.
    """
    ax = axes_or_new(ax)
    shares = result.chemistry.shares if result.chemistry else ()
    for region in shares:
        style = REGIONS.get(region.region)
        if style is None:
            continue
        for number, (low, high) in enumerate(region.ranges):
            label = region.region if number == 0 else None
            ax.axvspan(low, high, linewidth=0, zorder=0, label=label, **style)
    plot_regression_vector(result, ax)
    if ax.get_legend_handles_labels()[0]:
        legend(ax, ncols=4, **ABOVE)
    return ax
