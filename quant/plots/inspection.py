"""Pictures of data that nothing was modelled from yet: spectra by value, the range of values, analytes together."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import MaxNLocator

from quant.inspection.picture import InspectionPicture
from quant.inspection.spread import widest_gap
from quant.plots.spectra import draw_spectra
from quant.plots.style import (
    BLUE,
    HALF,
    HATCH,
    INK,
    RULE,
    SHADE,
    SMALL,
    THIN,
    VERMILION,
    axes_or_new,
    label_axes,
    legend,
    spectral_axis,
    with_unit,
)
from quant.units import QUANTITIES

BARS = 20  # of the range of values


def plot_overlaid(
    picture: InspectionPicture, ax: Axes | None = None, *, analyte: int = 0, processed: bool = False
) -> Axes:
    """Draw mean spectra over each other, coloured by the value of an analyte; ranges used are shaded.

    Parameters
    ----------
    picture : InspectionPicture
    ax : Axes, optional
        Where to draw; default: a new figure.
    analyte : int
        Position of the analyte; samples without a value of it are left out.
    processed : bool
        Draw them after preprocessing instead of as read.
    """
    ax = axes_or_new(ax)
    values = picture.values[list(picture.shown), analyte]
    known = np.isfinite(values)
    axis, spectra, ordinate = picture.axis, picture.spectra, QUANTITIES[picture.quantity]
    if processed and picture.processed is not None and picture.processed_axis is not None:
        axis, spectra, ordinate = picture.processed_axis, picture.processed, "after preprocessing"
    elif not picture.used.all() and picture.used.any():
        used = picture.axis[picture.used]
        # Ranges are cut where points in between are not used.
        places = np.flatnonzero(picture.used)
        for run in np.split(np.arange(used.size), np.flatnonzero(np.diff(places) > 1) + 1):
            ax.axvspan(float(used[run].min()), float(used[run].max()), color=SHADE, linewidth=0, zorder=0)
    if known.any():
        draw_spectra(ax, axis, spectra[known], values[known], with_unit(*picture.analytes[analyte]))
    label_axes(ax, spectral_axis(ax, axis, picture.axis_unit), ordinate)
    return ax


def plot_range(picture: InspectionPicture, ax: Axes | None = None, *, analyte: int = 0) -> Axes:
    """Draw how the values of an analyte fill their range: bars, one stroke a sample, the widest gap hatched."""
    ax = axes_or_new(ax, HALF)
    column = picture.values[:, analyte]
    calibration, validation = column[: picture.n_calibration], column[picture.n_calibration :]
    calibration, validation = np.sort(calibration[np.isfinite(calibration)]), validation[np.isfinite(validation)]
    if calibration.size:
        counts, _, _ = ax.hist(calibration, bins=BARS, color=HATCH, linewidth=0, zorder=1)
        depth = 0.07 * float(np.max(counts))
        ax.vlines(calibration, -depth, 0, color=BLUE, linewidth=2 * THIN, label="calibration samples", zorder=3)
        if validation.size:
            ax.vlines(
                validation, -2.3 * depth, -1.3 * depth, color=VERMILION, linewidth=2 * THIN, label="validation samples"
            )
        gap = widest_gap(calibration) if calibration.size > 4 and np.ptp(calibration) > 0 else None
        if gap is not None:
            low, high = calibration[gap[0] : gap[0] + 2]
            ax.axvspan(low, high, facecolor="none", edgecolor=RULE, hatch="////", linewidth=0, label="gap", zorder=0)
        ax.set_ylim(bottom=-(2.6 if validation.size else 1.3) * depth)
        legend(ax, loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=3)
    ax.axhline(0.0, color=RULE, linewidth=THIN)
    ticks = MaxNLocator(6, integer=True).tick_values(0, max(ax.get_ylim()[1], 1))
    ax.set_yticks([tick for tick in ticks if 0 <= tick <= ax.get_ylim()[1]])
    label_axes(ax, with_unit(*picture.analytes[analyte]), "calibration samples")
    return ax


def plot_together(picture: InspectionPicture, ax: Axes | None = None, *, pair: tuple[int, int] = (0, 1)) -> Axes:
    """Draw the values of two analytes against each other, with their correlation among the calibration samples."""
    ax = axes_or_new(ax, HALF)
    a, b = picture.values[:, pair[0]], picture.values[:, pair[1]]
    n = picture.n_calibration
    ax.plot(a[:n], b[:n], linestyle="none", marker="o", markersize=3.6, color=BLUE, label="calibration samples")
    if n < len(a):
        ax.plot(a[n:], b[n:], linestyle="none", marker="s", markersize=3.2, color=VERMILION, label="validation samples")
    r = correlation(picture, pair)
    if r is not None:
        ax.text(1.0, 1.01, f"r = {r:+.2f}", transform=ax.transAxes, fontsize=SMALL, color=INK, ha="right")
    legend(ax, loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2)
    label_axes(ax, with_unit(*picture.analytes[pair[0]]), with_unit(*picture.analytes[pair[1]]))
    return ax


def correlation(picture: InspectionPicture, pair: tuple[int, int]) -> float | None:
    """Return the correlation of two analytes among the calibration samples, or None where there is none."""
    a, b = picture.values[: picture.n_calibration, list(pair)].T
    known = np.isfinite(a) & np.isfinite(b)
    if known.sum() < 3 or np.ptp(a[known]) == 0 or np.ptp(b[known]) == 0:
        return None
    return float(np.corrcoef(np.stack([a[known], b[known]]))[0, 1])
