"""Pictures of classical least squares: the pure spectra, and what they leave of the samples."""

from matplotlib.axes import Axes

from quant.calibration.result import AnalyteResult
from quant.plots.spectra import draw_spectra, processed_ordinate
from quant.plots.style import (
    HALF,
    INK,
    LINE,
    OCHRE,
    axes_or_new,
    label_axes,
    printable,
    spectral_axis,
    with_unit,
    zero_line,
)
from quant.spectra.segments import segments


def plot_pure_spectrum(result: AnalyteResult, ax: Axes | None = None, *, number: int = 0) -> Axes:
    """Draw a pure spectrum that classical least squares estimated; there is nothing to draw for other methods.

    Parameters
    ----------
    result : AnalyteResult
    ax : Axes, optional
        Where to draw; default: a new figure.
    number : int
        The component: 0 for the analyte, then the others, the background last.
    """
    picture = result.picture
    ax = axes_or_new(ax, HALF)
    zero_line(ax)
    name = ""
    if picture.pure_spectra is not None:
        name = picture.components[number]
        color = OCHRE if number == 0 else INK
        for run in segments(picture.processed_axis):
            ax.plot(picture.processed_axis[run], picture.pure_spectra[number][run], color=color, linewidth=LINE)
    label_axes(ax, spectral_axis(ax, picture.processed_axis, picture.axis_unit), f"pure spectrum\n{printable(name)}")
    return ax


def plot_residual_spectra(result: AnalyteResult, ax: Axes | None = None) -> Axes:
    """Draw what classical least squares leaves of the calibration samples; nothing for other methods.

    Noise without structure is what remains where all that absorbs is among the components.
    """
    picture = result.picture
    ax = axes_or_new(ax)
    if picture.residual_spectra is not None:
        label = with_unit(result.analyte, result.unit)
        draw_spectra(ax, picture.processed_axis, picture.residual_spectra, picture.shown_values, label)
    where = spectral_axis(ax, picture.processed_axis, picture.axis_unit)
    label_axes(ax, where, f"residual {processed_ordinate(result)}")
    return ax
