"""The text of every section for the smallest results, word by word.

To renew the golden texts after a wanted change: delete the file, run, read what was written, and compare by eye.
"""

import re
from html import unescape
from pathlib import Path

import pytest

from quant.reports.contents import SECTIONS
from quant.reports.page import render_section

GOLDEN = Path(__file__).parent / "golden"
BY_NAME = {section.name: section for section in SECTIONS}
CASES = [(name, "pls") for name in BY_NAME] + [
    ("answer", "unvalidated"),
    ("preprocessing", "derivative"),
    ("cross_validation", "band"),
    ("validation", "unvalidated"),
    ("view", "band"),
    ("limits", "band"),
    ("limits", "unvalidated"),
    ("answer", "audited"),
    ("standards", "audited"),
    ("standards", "unvalidated"),
    ("diagnostics", "band"),
    ("uncertainty", "audited"),
    ("uncertainty", "unvalidated"),
    ("detection", "band"),
    ("decision", "audited"),
    ("decision", "undecided"),
    ("chemistry", "band"),
    ("chemistry", "chemical"),
]


@pytest.fixture(scope="session")
def derivative(make):
    steps = '[[preprocessing]]\nstep = "keep_ranges"\nranges = [[1040, 1000]]\n[[preprocessing]]\nstep = "snv"\n'
    return make(f"max_factors = 2\n{steps}")


def text_of(html: str) -> str:
    """Return what a reader sees of HTML without pictures, cells apart by two blanks, one line a row."""
    html = re.sub(r"<svg .*?</svg>", "(picture)", html, flags=re.DOTALL)
    html = re.sub(r"</(td|th|dt)>\s*(?=<)", "  ", html)
    lines = [unescape(re.sub(r"<[^>]*>", "", line)).rstrip() for line in html.splitlines()]
    return "\n".join(line for line in lines if line) + "\n"


@pytest.mark.parametrize(("name", "case"), CASES)
def test_golden_text(name, case, request):
    found = text_of(render_section(BY_NAME[name], request.getfixturevalue(case)))
    file = GOLDEN / f"{name}-{case}.txt"
    if not file.exists():
        file.parent.mkdir(exist_ok=True)
        file.write_text(found, encoding="utf-8")
        pytest.fail(f"{file.name} was not there and has been written: read it")
    assert found == file.read_text(encoding="utf-8")


def test_no_golden_text_is_left_over():
    assert sorted(path.stem for path in GOLDEN.iterdir()) == sorted(f"{name}-{case}" for name, case in CASES)


def test_what_repeats_and_limits_say_is_shown(make):
    found = text_of(render_section(BY_NAME["data"], make(repeats=True, laboratory_error=None)))
    assert "standard error of the laboratory  0.02121 % m/m (from repeated determinations)" in found  # 0.03/√2
    assert "S08  acetone below the detection limit of 0.5 % m/m" in found
    assert "Repeated determinations have a standard deviation of 0.03 % m/m (14 degrees of freedom" in found
    assert (
        "1 sample(s) below a detection limit of at most 0.5 % m/m took no part in the fit; predicted above it" in found
    )
    assert "prepare blanks and low standards by weighing" in found
