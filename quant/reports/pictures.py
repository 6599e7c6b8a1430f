"""Pictures as the templates take them."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from markupsafe import Markup

from quant.calibration.result import AnalyteResult
from quant.plots.svg import to_svg


@dataclass(frozen=True)
class Picture:
    """An SVG element and the caption below it; two narrow ones stand side by side."""

    svg: Markup
    caption: str
    narrow: bool = False


def picture(
    plot: Callable[..., Any], result: AnalyteResult, place: str, caption: str, *, narrow: bool = False, **options: Any
) -> Picture:
    """Draw one picture of a result.

    Parameters
    ----------
    plot : callable
        A function of `quant.plots` that takes a result and returns axes.
    result : AnalyteResult
    place : str
        Where in the page: letters, digits and hyphens, unlike that of any other picture.
    caption : str
        Printed below, and read out to readers who cannot see the picture.
    narrow : bool
        Half as wide as the page.
    **options
        Passed on to `plot`.
    """
    svg = to_svg(plot(result, **options), place, caption)
    return Picture(Markup(svg), caption, narrow)
