"""Pictures as SVG for a page of HTML."""

import re
from xml.etree import ElementTree as ET

from matplotlib.figure import Figure

from quant.plots.agreement import plot_predicted
from quant.plots.applicability import plot_applicability
from quant.plots.spectra import plot_spectra
from quant.plots.style import label_axes, with_unit
from quant.plots.svg import to_svg

VALIDATED = '[validation]\nsamples = ["{}"]\n'
HOSTILE = '<script>alert("1")</script>$\\frac{$&\''


def test_the_same_bytes_every_time(pls):
    assert to_svg(plot_spectra(pls), "p", "x") == to_svg(plot_spectra(pls), "p", "x")


def test_nothing_reaches_outside_and_no_style_leaks(pls):
    svg = to_svg(plot_predicted(pls), "p", "What it shows")
    assert "<style" not in svg
    assert "<metadata" not in svg
    assert set(re.findall(r'(?:href|src)="([^"]*)"', svg)) == set(re.findall(r'href="(#p-[^"]*)"', svg))
    assert set(re.findall(r"https?://[^\"' ]+", svg)) == {"http://www.w3.org/2000/svg", "http://www.w3.org/1999/xlink"}
    assert ET.fromstring(svg).get("aria-label") == "What it shows"


def test_every_reference_finds_its_target_under_the_prefix(pls):
    svg = to_svg(plot_predicted(pls), "p7", "x")
    ids = re.findall(r' id="([^"]*)"', svg)
    used = set(re.findall(r'(?:url\(|href=")#([^")]*)', svg))
    assert len(ids) == len(set(ids))
    assert used
    assert used == set(ids)
    assert all(name.startswith("p7-") for name in ids)


def test_hostile_names_are_text(make):
    ax = plot_applicability(make(VALIDATED.format("S21..S28"), odd=True))
    ax.texts[0].set_text(HOSTILE)
    label_axes(ax, with_unit(HOSTILE, "$x$"), "a\x00\x07")
    svg = to_svg(ax, "p", HOSTILE)
    assert "<script" not in svg
    texts = [element.text for element in ET.fromstring(svg).iter("{http://www.w3.org/2000/svg}text")]
    assert HOSTILE in texts
    assert f"{HOSTILE} [$x$]" in texts


def test_letters_that_no_font_has_are_left_to_the_reader():
    ax = Figure().add_subplot()
    label_axes(ax, "溶剤", "残留")
    assert "溶剤" in to_svg(ax, "p", "x")
