"""Pictures as SVG that can stand in a page of HTML: the same bytes every time, and nothing that reaches outside."""

import io
import re
import warnings
from typing import Any
from xml.etree import ElementTree as ET

import matplotlib as mpl
from matplotlib.axes import Axes

from quant.plots.style import figure_of

SVG, XLINK = "http://www.w3.org/2000/svg", "http://www.w3.org/1999/xlink"
RESOLUTION = 220  # of the parts that are drawn as images [dots per inch]
FONTS = ["DejaVu Sans", "Verdana"]  # equally wide

_REFERENCE = re.compile(r"(url\(#|^#)([^)]+)")

ET.register_namespace("", SVG)
ET.register_namespace("xlink", XLINK)


def to_svg(ax: Axes, prefix: str, description: str) -> str:
    """Return the figure of some axes as an SVG element for a page of HTML.

    Parameters
    ----------
    ax : Axes
    prefix : str
        Put before every id, so that the pictures of one page do not meddle with each other. Letters, digits, hyphens.
    description : str
        What a reader who cannot see the picture is told.
    """
    stream = io.BytesIO()
    settings: Any = {"svg.hashsalt": "quant", "svg.fonttype": "none", "font.sans-serif": FONTS}
    with mpl.rc_context(settings), warnings.catch_warnings():
        warnings.filterwarnings(
            "ignore", message="Glyph .* missing from", category=UserWarning
        )  # the reader's fonts decide
        nothing = {"Date": None, "Creator": None, "Format": None, "Type": None}
        figure_of(ax).savefig(stream, format="svg", dpi=RESOLUTION, metadata=nothing)
    root = ET.fromstring(stream.getvalue())
    _drop(root, "metadata")
    for styles in root.iter(f"{{{SVG}}}defs"):
        _drop(styles, "style")  # it would hold for the whole page; stands at the root instead
    _rename(root, prefix)
    root.attrib.pop("width", None)
    root.attrib.pop("height", None)
    root.set("style", "stroke-linejoin: round; stroke-linecap: butt")
    root.set("role", "img")
    root.set("aria-label", description)
    return ET.tostring(root, encoding="unicode")


def _drop(parent: ET.Element, name: str) -> None:
    for child in parent.findall(f"{{{SVG}}}{name}"):
        parent.remove(child)


def _rename(root: ET.Element, prefix: str) -> None:
    """Put the prefix before every id that is referred to; drop the others."""
    used = {
        match[2] for element in root.iter() for value in element.attrib.values() for match in _REFERENCE.finditer(value)
    }
    for element in root.iter():
        for key, value in list(element.attrib.items()):
            if key != "id":
                element.set(key, _REFERENCE.sub(rf"\g<1>{prefix}-\g<2>", value))
            elif value in used:
                element.set(key, f"{prefix}-{value}")
            else:
                del element.attrib[key]
