"""The common look of all pictures: colours, marks, lines, labels.

Every kind of sample differs in colour, in mark and in lightness, so that the pictures hold in print without colour and
for readers who do not see all colours. Vermilion and (darkened) blue are those of Okabe & Ito (2008); the scale for
reference values runs from sand over teal to navy, getting darker throughout.
"""

import textwrap
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.axis import Axis
from matplotlib.colors import LinearSegmentedColormap
from matplotlib.figure import Figure
from matplotlib.ticker import LogLocator, NullFormatter

from quant.arrays import FloatArray
from quant.units import AXIS_UNITS

INK, RULE, SHADE, HATCH = "#22303c", "#8b98a5", "#e9eef2", "#c4ced6"
BLUE, VERMILION, OCHRE = "#005b96", "#d55e00", "#9a6b00"
VALUES = LinearSegmentedColormap.from_list("sand to navy", ["#d9b44a", "#4c9a8b", "#123a5c"])

SIZE = (7.6, 3.1)  # of a picture as wide as the page [inch]
HALF = (4.4, 3.0)  # of one half as wide [inch]
SMALL, NORMAL = 7.5, 8.5  # type [point]
THIN, LINE = 0.6, 1.1  # lines [point]
CHARACTERS = 12.0  # of a label that fit into one inch of a picture, its margins allowed for
LONGEST_LABEL = 24  # characters of a sample ID written into a picture


@dataclass(frozen=True)
class Mark:
    """How one kind of sample is drawn, and what the legend calls it."""

    label: str
    colour: str
    shape: str
    size: float
    filled: bool

    def options(self) -> dict[str, Any]:
        """Return the options for `Axes.plot`, without a connecting line."""
        face = self.colour if self.filled else "none"
        return {
            "label": self.label,
            "linestyle": "none",
            "marker": self.shape,
            "markersize": self.size,
            "markerfacecolor": face,
            "markeredgecolor": self.colour,
            "markeredgewidth": 0.8,
        }


FITTED = Mark("calibration, fitted", RULE, "o", 5.0, filled=False)
LEFT_OUT = Mark("cross-validation, left out", BLUE, "D", 2.8, filled=True)
VALIDATION = Mark("validation", VERMILION, "s", 4.2, filled=True)


def axes_or_new(ax: Axes | None, size: tuple[float, float] = SIZE) -> Axes:
    """Return the axes given, or those of a new figure, with quiet frame and ticks."""
    axes = Figure(figsize=size, layout="constrained").add_subplot() if ax is None else ax
    axes.spines[["top", "right"]].set_visible(False)
    axes.spines[["left", "bottom"]].set(color=RULE, linewidth=THIN)
    axes.tick_params(colors=INK, labelsize=SMALL, width=THIN, length=3, color=RULE)
    return axes


def figure_of(ax: Axes) -> Figure:
    """Return the whole figure that axes belong to.

    Raises
    ------
    TypeError
        The axes belong to no figure.
    """
    figure = ax.get_figure(root=True)
    if not isinstance(figure, Figure):
        raise TypeError("these axes belong to no figure; draw on axes of a Figure.")
    return figure


def logarithmic(axis: Axis) -> None:
    """Let an axis of a logarithmic scale carry plain numbers: 0.02, 0.05, 0.1 ..."""
    axis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
    axis.set_major_formatter(lambda value, _: f"{value:g}")
    axis.set_minor_formatter(NullFormatter())


def label_axes(ax: Axes, x: str, y: str) -> None:
    """Label both axes, in lines that fit; names come from files, so no character in them is a formula."""
    width, height = figure_of(ax).get_size_inches()
    ax.set_xlabel(wrapped(x, width), fontsize=NORMAL, color=INK, parse_math=False)
    ax.set_ylabel(wrapped(y, height), fontsize=NORMAL, color=INK, parse_math=False)


def wrapped(text: str, length: float) -> str:
    """Break text into lines that fit into a length, three at most of each line it has. [inch]"""
    width = max(int(CHARACTERS * length), 8)
    return "\n".join(textwrap.fill(printable(line), width, max_lines=3, placeholder=" …") for line in text.splitlines())


ABOVE: dict[str, Any] = {"loc": "lower left", "bbox_to_anchor": (0.0, 1.0), "columnspacing": 1.4}
"""Where a legend stands that must not cover anything: in a row above the picture."""


def legend(ax: Axes, **options: Any) -> None:
    """Add a legend without a frame; its words are no formulas."""
    box = ax.legend(frameon=False, fontsize=SMALL, labelcolor=INK, handletextpad=0.5, borderaxespad=0.3, **options)
    for text in box.get_texts():
        text.set_parse_math(False)


def zero_line(ax: Axes) -> None:
    """Draw the line y = 0."""
    ax.axhline(0.0, color=INK, linewidth=THIN, zorder=1)


def with_unit(name: str, unit: str) -> str:
    """Return "name [unit]", or the name alone where there is no unit."""
    return f"{name} [{unit}]" if unit else name


def printable(text: str) -> str:
    """Return text with a sign in place of everything that cannot be printed or stand in an SVG."""
    return "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text)


def short(sample: str) -> str:
    """Return a sample ID on one line, short enough for a picture."""
    line = printable(sample)
    return line if len(line) <= LONGEST_LABEL else f"{line[: LONGEST_LABEL - 1]}…"


def spectral_axis(ax: Axes, axis: FloatArray, unit: str) -> str:
    """Set the ends of the spectral axis, wavenumbers falling from left to right; return its label."""
    ends = (float(np.min(axis)), float(np.max(axis)))
    ax.set_xlim(ends[::-1] if unit == "cm-1" else ends)
    names = {"cm-1": "wavenumber", "nm": "wavelength", "um": "wavelength"}
    return with_unit(names[unit], AXIS_UNITS[unit]) if unit in names else AXIS_UNITS[unit]
