"""The page as a whole: whole, closed in itself, and safe with hostile names."""

import re
from dataclasses import replace
from html.parser import HTMLParser

import pytest

from quant.reports.contents import SECTIONS
from quant.reports.page import render_page

VOID = {"meta", "br", "hr", "img", "input", "link"}
NAMESPACES = {"http://www.w3.org/2000/svg", "http://www.w3.org/1999/xlink"}
HOSTILE = '<script src="https://evil.example/x.js">alert(1)</script>'
HOSTILE_ID = "\"'><img src=x onerror=alert(1)>$\\frac{"


class Checker(HTMLParser):
    """Collects tags, attributes and text, and sees that every tag is closed in turn."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.open: list[str] = []
        self.tags: set[str] = set()
        self.attributes: list[tuple[str, str]] = []
        self.texts: list[str] = []
        self.faults: list[str] = []

    def handle_startendtag(self, tag, attrs):
        self.tags.add(tag)
        self.attributes += attrs

    def handle_starttag(self, tag, attrs):
        self.handle_startendtag(tag, attrs)
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        if not self.open or self.open.pop() != tag:
            self.faults.append(f"</{tag}> at {self.getpos()}")

    def handle_data(self, data):
        self.texts.append(data)


def read(page: str) -> Checker:
    checker = Checker()
    checker.feed(page)
    checker.close()
    return checker


@pytest.fixture(scope="module", params=["pls", "band", "unvalidated", "audited", "undecided", "hostile"])
def page(request):
    return render_page(request.getfixturevalue(request.param))


def test_every_tag_is_closed_in_turn(page):
    checker = read(page)
    assert checker.faults == []
    assert checker.open == []
    assert checker.texts


def test_an_unclosed_tag_is_seen():
    assert read("<p><b>x</p>").faults == ["</p> at (1, 7)"]
    assert read("<div>").open == ["div"]


def test_nothing_is_loaded_and_nothing_runs(page):
    checker = read(page)
    assert checker.tags.isdisjoint({"script", "link", "iframe", "object", "embed", "form", "base"})
    for name, value in checker.attributes:
        assert not name.startswith("on")
        if name in ("href", "src", "xlink:href"):
            assert value.startswith(("#", "data:image/png;base64,"))
        else:
            assert name.startswith("xmlns") or not re.search(r"url\((?!#)|://", value)
    style = page.partition("<style>")[2].partition("</style>")[0]
    assert not re.search(r"url\(|@import|//", style)


def test_ids_are_unique_and_links_find_them(page):
    attributes = read(page).attributes
    ids = [value for name, value in attributes if name == "id"]
    assert len(ids) == len(set(ids))
    links = {value[1:] for name, value in attributes if name == "href" and value.startswith("#")}
    assert links
    assert links <= set(ids)


def test_hostile_names_are_shown_as_they_are(hostile):
    page = render_page(hostile)
    checker = read(page)
    assert "<script" not in page
    assert "<img" not in page
    texts = [text.strip() for text in checker.texts]
    assert texts.count(HOSTILE) >= 3  # title, heading, analyte
    assert f"{HOSTILE_ID}V1" in texts
    lettering = "".join(re.findall(r"<svg .*?</svg>", page, re.DOTALL))
    assert "&lt;script" in lettering  # in the labels of axes


def test_the_same_bytes_every_time(pls):
    assert render_page(pls) == render_page(pls)


def test_sections_stand_in_order_each_once(pls):
    page = render_page(pls)
    anchors = [f"a1-{section.name}" if section.each_analyte else section.name for section in SECTIONS]
    assert re.findall(r'<section id="([^"]*)">', page) == anchors
    # as read, factors, agreement, errors, influence, ellipse, importance, regression vector, limits
    assert len(re.findall(r"<svg ", page)) == 9


def test_several_analytes_have_a_block_each(pls):
    first = pls.analytes[0]
    second = replace(first, analyte="water", model=first.model)
    page = render_page(replace(pls, analytes=(first, second)))
    assert re.findall(r'<h2 class="analyte">([^<]*)</h2>', page) == ["acetone", "water"]
    assert re.findall(r'<a class="analyte" href="#(a\d)">', page) == ["a1", "a2"]
    assert page.count("<article") == 2
    attributes = read(page).attributes
    ids = [value for name, value in attributes if name == "id"]
    assert len(ids) == len(set(ids))
