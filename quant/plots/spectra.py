"""Pictures along the spectral axis: spectra, the ranges and bands in use, the regression vector."""

from itertools import pairwise
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.colors import Normalize
from matplotlib.ticker import MaxNLocator

from quant.arrays import FloatArray
from quant.calibration.result import AnalyteResult
from quant.plots.style import (
    HALF,
    HATCH,
    INK,
    LINE,
    NORMAL,
    OCHRE,
    RULE,
    SHADE,
    SIZE,
    SMALL,
    THIN,
    VALUES,
    axes_or_new,
    figure_of,
    label_axes,
    spectral_axis,
    with_unit,
    wrapped,
    zero_line,
)
from quant.regression.band_area import BandArea
from quant.spectra.segments import segments
from quant.units import AXIS_UNITS, QUANTITIES

MOST_AS_LINES = 20_000  # points drawn as lines of an SVG; beyond, the lines (not the lettering) become an image
SILENT = ("absorbance", "keep_ranges", "leave_out_ranges", "resample", "mean_centre")  # leave the ordinate's meaning
REFERENCE_BAND: dict[str, Any] = {"hatch": "////", "facecolor": "none", "edgecolor": HATCH}
AROUND_BANDS = 0.35  # of the width of what is shown, to either side of the bands


def plot_spectra(result: AnalyteResult, ax: Axes | None = None, *, processed: bool = False) -> Axes:
    """Draw the spectra, coloured by reference value; a line breaks where points have been cut out.

    Parameters
    ----------
    result : AnalyteResult
    ax : Axes, optional
        Where to draw; default: a new figure.
    processed : bool
        Draw them after preprocessing instead of as read. As read, the ranges that preprocessing keeps are shaded.
    """
    picture = result.picture
    ax = axes_or_new(ax)
    axis, spectra = (picture.processed_axis, picture.processed) if processed else (picture.axis, picture.spectra)
    if not processed:
        for low, high in kept_ranges(result):
            ax.axvspan(low, high, color=SHADE, linewidth=0, zorder=0)
    draw_spectra(ax, axis, spectra, picture.shown_values, with_unit(result.analyte, result.unit))
    ordinate = processed_ordinate(result) if processed else QUANTITIES[picture.quantity]
    label_axes(ax, spectral_axis(ax, axis, picture.axis_unit), ordinate)
    return ax


def plot_bands(result: AnalyteResult, ax: Axes | None = None, *, number: int | None = None) -> Axes:
    """Draw the preprocessed spectra about the bands of a band-area calibration, the bands shaded.

    Bands are shaded plainly; the reference band that they are divided by is hatched; dotted lines carry the baseline.

    Parameters
    ----------
    result : AnalyteResult
    ax : Axes, optional
        Where to draw; default: a new figure.
    number : int, optional
        Show the surroundings of one band, counted from 0, the reference band last; default: all.
    """
    picture = result.picture
    ax = axes_or_new(ax, SIZE if number is None else HALF)
    unit = with_unit(result.analyte, result.unit)
    draw_spectra(ax, picture.processed_axis, picture.processed, picture.shown_values, unit)
    bands = _bands(result)
    for i, (low, high, _, reference) in enumerate(bands):
        style = REFERENCE_BAND if reference else {"facecolor": SHADE}
        if low < high:
            ax.axvspan(low, high, linewidth=0, zorder=0, **style)
        else:  # a height at one position
            ax.axvline(low, color=RULE, linewidth=LINE, zorder=0)
        if number in (None, i):
            text, place = "reference band" if reference else "band", ((low + high) / 2, 1.01)
            ax.text(*place, text, transform=ax.get_xaxis_transform(), ha="center", fontsize=SMALL, color=INK)
    shown = bands if number is None else bands[number : number + 1]
    if number is not None:
        for position in shown[0][2]:
            ax.axvline(position, color=INK, linewidth=LINE, linestyle=(0, (1, 2)), zorder=1)
    ends = [end for low, high, line, _ in shown for end in (low, high, *line)] or [*picture.processed_axis[[0, -1]]]
    window = _window(picture.processed_axis, min(ends), max(ends))
    inside = (picture.processed_axis >= window.min()) & (picture.processed_axis <= window.max())
    seen = picture.processed[:, inside]
    if seen.size and seen.max() > seen.min():
        ax.set_ylim(seen.min() - 0.05 * np.ptp(seen), seen.max() + 0.05 * np.ptp(seen))
    label_axes(ax, spectral_axis(ax, window, picture.axis_unit), processed_ordinate(result))
    return ax


def plot_regression_vector(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw the regression vector, two jackknife standard errors shaded; nothing for methods without one."""
    picture = result.picture
    ax = axes_or_new(ax)
    zero_line(ax)
    if picture.regression_vector is not None:
        error = result.audit.diagnostics.vector_error
        for run in segments(picture.processed_axis):
            axis, vector = picture.processed_axis[run], picture.regression_vector[run]
            if error is not None:
                ax.fill_between(axis, vector - 2 * error[run], vector + 2 * error[run], color=SHADE, linewidth=0)
            ax.plot(axis, vector, color=OCHRE, linewidth=LINE)
    unit = f"[{result.unit or result.analyte} per unit of the ordinate]"
    label_axes(ax, spectral_axis(ax, picture.processed_axis, picture.axis_unit), f"regression vector\n{unit}")
    return ax


def kept_ranges(result: AnalyteResult) -> list[tuple[float, float]]:
    """Return the ranges that preprocessing keeps, (low, high) each; empty where it keeps all. [axis unit]"""
    picture = result.picture
    ends = [picture.processed_axis[[run.start, run.stop - 1]] for run in segments(picture.processed_axis)]
    whole = len(ends) == 1 and picture.processed_axis.size == picture.axis.size
    return [] if whole else [(float(pair.min()), float(pair.max())) for pair in ends]


def processed_ordinate(result: AnalyteResult) -> str:
    """Say what the ordinate is after preprocessing: "2nd derivative of absorbance [per nm²], SNV"."""
    steps = result.model.steps
    name = "absorbance" if any(step.name == "absorbance" for step in steps) else QUANTITIES[result.picture.quantity]
    others = []
    for step in steps:
        order = step.get_params().get("derivative", 0)
        if order:
            place = {1: "1st", 2: "2nd", 3: "3rd"}.get(order, f"{order}th")
            power = {1: "", 2: "²", 3: "³"}.get(order, f"^{order}")
            unit = AXIS_UNITS[result.picture.axis_unit]
            name = f"{place} derivative of {name} [per {f'({unit})' if power and unit != 'nm' else unit}{power}]"
        elif step.name not in SILENT:
            others.append(step.name.upper() if step.name in ("snv", "msc") else step.name.replace("_", " "))
    return ", ".join([name, *others])


def draw_spectra(ax: Axes, axis: FloatArray, spectra: FloatArray, values: FloatArray, label: str) -> None:
    """Draw spectra in their own order (sorted by value, the high ones would hide the low), and the scale of values."""
    runs = segments(axis)
    lines = [np.column_stack([axis[run], spectrum[run]]) for spectrum in spectra for run in runs]
    low, high = float(values.min()), float(values.max())
    collection = LineCollection(
        lines,
        array=np.repeat(values, len(runs)),
        cmap=VALUES,
        norm=Normalize(low, high if high > low else low + 1.0),
        linewidths=0.6,
        alpha=0.85,
        rasterized=spectra.size > MOST_AS_LINES,
        zorder=2,
    )
    ax.add_collection(collection)
    for end in _cuts(axis, runs):
        ax.axvspan(*end, color=SHADE, alpha=0.45, linewidth=0, zorder=0)
    ax.autoscale_view(scalex=False)
    bar = figure_of(ax).colorbar(collection, ax=ax, pad=0.015, aspect=28, ticks=MaxNLocator(5))
    bar.outline.set_visible(False)
    bar.ax.tick_params(colors=INK, labelsize=SMALL, width=THIN, length=2, color=RULE)
    bar.set_label(wrapped(label, figure_of(ax).get_size_inches()[1]), fontsize=NORMAL, color=INK, parse_math=False)


def _cuts(axis: FloatArray, runs: list[slice]) -> list[tuple[float, float]]:
    """Return where points have been cut out, between the runs. [axis unit]"""
    return [(float(axis[before.stop - 1]), float(axis[after.start])) for before, after in pairwise(runs)]


def _bands(result: AnalyteResult) -> list[tuple[float, float, tuple[float, ...], bool]]:
    """Return low and high end, positions of the baseline, and whether it is the reference band. [axis unit]"""
    method, spans = result.model.method, result.picture.bands
    if not isinstance(method, BandArea):
        return []
    specs = [*(method.bands or ()), *([method.reference_band] if method.reference_band else [])]
    return [
        (*span, tuple(float(end) for end in spec.get("baseline") or ()), spec is method.reference_band)
        for span, spec in zip(spans, specs, strict=True)
    ]


def _window(axis: FloatArray, low: float, high: float) -> FloatArray:
    """Return the two ends of what is shown about bands, within the axis. [axis unit]"""
    margin = max(AROUND_BANDS * (high - low), 10 * float(np.median(np.abs(np.diff(axis)))))
    return np.array([max(low - margin, float(axis.min())), min(high + margin, float(axis.max()))])
