"""The page of an inspection: whole, closed in itself, safe with hostile names; and its JSON."""

import json
import re
from dataclasses import replace
from html.parser import HTMLParser

import numpy as np
import pytest
from markupsafe import escape

from quant.inspection.inspect import inspect
from quant.recipe.load import recipe_from_text
from quant.reports.inspection_page import inspection_json, render_inspection
from quant.reports.write import write_inspection
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

HOSTILE = "\"'><img src=x onerror=alert(1)>$\\frac{"
RECIPE = """title = "<script>alert(1)</script>"
[spectra]
files = ["none"]
[reference]
file = "none"
[[analyte]]
name = "acid"
unit = "%"
[[preprocessing]]
step = "snv"
"""


@pytest.fixture(scope="module")
def result():
    rng = np.random.default_rng(1)
    values = rng.random((12, 2)).round(2)
    axis = np.arange(1000.0, 1100.0)
    spectra = values[:, :1] * np.exp(-(((axis - 1050) / 8) ** 2)) + 1e-3 * rng.standard_normal((12, 100))
    spectra[3] = spectra[0]
    ids = [f"{HOSTILE}{i}" for i in range(12)]
    analytes = [Analyte("acid", "%"), Analyte(HOSTILE, "<b>")]
    samples = pair_samples(SpectraSet(spectra, SpectralAxis(axis, "cm-1"), ids), ReferenceTable(ids, analytes, values))
    return inspect(recipe_from_text(RECIPE), samples=samples)


class Tags(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.seen: list[str] = []
        self.attributes: list[tuple[str, str | None]] = []
        self.faults: list[str] = []

    def handle_starttag(self, tag, attrs):
        self.seen.append(tag)
        self.attributes += attrs
        if tag not in ("meta", "br"):
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.seen.append(tag)
        self.attributes += attrs

    def handle_endtag(self, tag):
        if not self.open or self.open.pop() != tag:
            self.faults.append(tag)


def test_the_page_is_closed_in_itself(result):
    tags = Tags()
    page = render_inspection(result)
    tags.feed(page)
    assert (tags.faults, tags.open) == ([], [])
    assert set(tags.seen).isdisjoint({"script", "img", "link", "iframe", "object"})
    assert tags.seen.count("figure") == 2 * 2 + 2 + 1  # spectra twice an analyte, ranges, one pair of analytes
    for name, value in tags.attributes:
        assert not name.startswith("on")
        assert name.startswith("xmlns") or not re.search(r"url\((?!#)|://", value or "")
        if name in ("href", "src", "xlink:href"):
            assert value.startswith(("#", "data:image/png;base64,"))


def test_every_finding_stands_on_the_page_the_gravest_first(result):
    page = render_inspection(result)
    assert result.found("exact_duplicates")
    places = [page.index(f"<h3>{escape(finding.title)}</h3>") for finding in result.findings]
    assert places == sorted(places)
    assert result.headline() in page


def test_an_inspection_without_findings_and_processed_spectra(result):
    bare = replace(result, findings=(), picture=replace(result.picture, processed=None, processed_axis=None))
    page = render_inspection(bare)
    assert "0 stops, 0 doubts, 0 notes" in page
    assert "after preprocessing, coloured" not in page


def test_json_explains_every_key(result):
    record = json.loads(inspection_json(result))
    keys = record["keys"]

    def paths(value, path=""):
        match value:
            case dict():
                for key, entry in value.items():
                    named = path.endswith("origins")
                    yield from paths(entry, f"{path}.*" if named else f"{path}.{key}".lstrip("."))
                    if not named:
                        yield f"{path}.{key}".lstrip(".")
            case list():
                for entry in value:
                    yield from paths(entry, f"{path}[]")

    found = set(paths({key: value for key, value in record.items() if key != "keys"}))
    assert found
    assert found <= set(keys)
    assert "picture" not in record
    assert record["accepted"] is True


def test_both_files_are_written_and_the_same_twice(result, tmp_path):
    first, second = write_inspection(result, tmp_path / "a"), write_inspection(result, tmp_path / "b")
    assert (first.html.name, first.json.name) == ("inspection.html", "inspection.json")
    assert first.html.read_bytes() == second.html.read_bytes()
    assert first.json.read_bytes() == second.json.read_bytes()
