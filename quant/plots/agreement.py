"""Predicted and reference values: how well they agree."""

import numpy as np
from matplotlib.axes import Axes

from quant.calibration.result import AnalyteResult
from quant.plots.spectra import processed_ordinate
from quant.plots.style import (
    FITTED,
    INK,
    LEFT_OUT,
    LINE,
    RULE,
    THIN,
    VALIDATION,
    VERMILION,
    axes_or_new,
    label_axes,
    legend,
    printable,
    with_unit,
    zero_line,
)
from quant.regression.band_area import BandArea
from quant.text_table import format_number
from quant.units import AXIS_UNITS

SQUARE = (4.4, 4.2)  # [inch]


def plot_predicted(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw predicted against reference values, on equal scales with the line of perfect agreement.

    Fitted calibration samples, left-out samples and validation samples differ in mark; validation samples carry their
    95 % intervals.
    """
    crossed, checked = result.cross_validation, result.validation
    ax = axes_or_new(ax, SQUARE)
    ax.plot(result.reference, result.fitted, **FITTED.options(), zorder=2)
    left_out = crossed.left_out_predictions(result.factors)
    ax.plot(crossed.reference, left_out, **LEFT_OUT.options(), zorder=3)
    shown = [result.reference, result.fitted, left_out]
    if checked is not None:
        ax.vlines(checked.reference, checked.low, checked.high, color=VERMILION, linewidth=THIN, zorder=3)
        ax.plot(checked.reference, checked.predicted, **VALIDATION.options(), zorder=4)
        shown += [checked.reference, checked.predicted, checked.low, checked.high]
    everything = np.concatenate(shown)
    everything = everything[np.isfinite(everything)]
    low, high = float(everything.min()), float(everything.max())
    margin = 0.04 * (high - low) or 1.0
    ax.set(xlim=(low - margin, high + margin), ylim=(low - margin, high + margin), aspect="equal")
    ax.axline((low, low), slope=1.0, color=INK, linewidth=THIN, zorder=1)
    ax.yaxis.set_major_locator(ax.xaxis.get_major_locator())
    label_axes(
        ax, with_unit(f"reference {result.analyte}", result.unit), with_unit(f"predicted {result.analyte}", result.unit)
    )
    legend(ax, loc="upper left")
    return ax


def plot_errors(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw errors (predicted - reference) against reference values, with the line of no error and the bias.

    Validation samples with their 95 % intervals; without any, left-out samples of the cross-validation.
    """
    crossed, checked = result.cross_validation, result.validation
    ax = axes_or_new(ax, SQUARE)
    zero_line(ax)
    if checked is None:
        errors = crossed.left_out_predictions(result.factors) - crossed.reference
        ax.plot(crossed.reference, errors, **LEFT_OUT.options(), zorder=3)
    else:
        low, high = checked.low - checked.reference, checked.high - checked.reference
        ax.vlines(checked.reference, low, high, color=VERMILION, linewidth=THIN, zorder=2)
        ax.plot(checked.reference, checked.predicted - checked.reference, **VALIDATION.options(), zorder=3)
        bias = checked.figures.bias
        line = ax.axhline(bias, color=RULE, linewidth=LINE, linestyle=(0, (4, 2)), zorder=1)
        line.set_label(printable(f"bias {format_number(bias, 3)} {result.unit}".rstrip()))
    label_axes(
        ax, with_unit(f"reference {result.analyte}", result.unit), with_unit("predicted − reference", result.unit)
    )
    ax.margins(y=0.14)
    legend(ax, loc="upper left", ncols=2)
    return ax


def plot_calibration_line(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw the signal of a band-area calibration against the reference value, with the line; else nothing."""
    picture = result.picture
    ax = axes_or_new(ax, SQUARE)
    if picture.signals is not None and picture.line is not None:
        slope, intercept = picture.line
        ax.plot(result.reference, picture.signals, **{**FITTED.options(), "label": "calibration samples"}, zorder=3)
        if picture.curve is not None:
            ax.plot(*picture.curve, color=INK, linewidth=LINE, zorder=2, label="calibration quadratic")
        else:
            ax.axline((0.0, intercept), slope=slope, color=INK, linewidth=LINE, zorder=2).set_label("calibration line")
        ax.set_xlim(left=min(0.0, float(result.reference.min())))
        ax.set_ylim(bottom=min(0.0, intercept, float(picture.signals.min())))
        legend(ax, loc="upper left")
    label_axes(ax, with_unit(f"reference {result.analyte}", result.unit), signal_name(result))
    return ax


def signal_name(result: AnalyteResult) -> str:
    """Say what the signal of a band-area calibration is: "band area [absorbance · cm⁻¹]", "ratio of bands" ..."""
    method = result.model.method
    if not isinstance(method, BandArea):
        return "signal"
    if method.reference_band is not None:
        return "signal of the band over that of the reference band"
    area = all(band.get("signal") == "area" for band in method.bands or ({"signal": "area"},))
    ordinate = processed_ordinate(result)
    return f"band area [{ordinate} · {AXIS_UNITS[result.picture.axis_unit]}]" if area else f"band height [{ordinate}]"
