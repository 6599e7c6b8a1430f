"""YFACTOR, FIRSTY, MAXY and MINY against the ordinates."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import Block, Record, plain_label
from quant.readers.jcamp_dx.statements import y_factor_of

Y = np.array([40.0, 100.0, np.nan, -20.0])  # as written; times 0.01 below


def block(**labels: str) -> Block:
    records = [Record(label, plain_label(label), text, line) for line, (label, text) in enumerate(labels.items(), 1)]
    return Block(Path("a.dx"), records)


@pytest.mark.parametrize(
    "labels",
    [
        {},
        {"FIRSTY": "0.40", "MAXY": "1.00", "MINY": "-0.20"},
        {"FIRSTY": "0.41"},  # one ordinate unit off: made before rounding
        {"MAXY": "1"},  # stated to whole numbers only
        {"MAXY": "1.0000001"},  # single precision
    ],
)
def test_statements_that_hold_need_no_note(labels: dict[str, str]) -> None:
    held = block(YFACTOR="0.01", **labels)
    assert y_factor_of(held, Y, ".") == 0.01
    assert held.deviations == []


@pytest.mark.parametrize(
    ("labels", "notes"),
    [
        ({"FIRSTY": "40"}, ["##FIRSTY= is not scaled by YFACTOR"]),
        ({"FIRSTY": "0.9"}, ["##FIRSTY= 0.9 where the first ordinate is 0.4"]),  # the only one: nobody to side with
        (
            {"MAXY": "200.00", "MINY": "-90.00", "FIRSTY": "0.40"},
            ["##MAXY= 200 where the largest ordinate is 1", "##MINY= -90 where the smallest ordinate is -0.2"],
        ),
    ],
)
def test_statements_of_another_kind_are_noted(labels: dict[str, str], notes: list[str]) -> None:
    told = block(YFACTOR="0.01", **labels)
    y_factor_of(told, Y, ".")
    assert sorted(told.deviations) == sorted(notes)


@pytest.mark.parametrize(
    ("labels", "words"),
    [
        ({"FIRSTY": "0.40", "MAXY": "0.90"}, "line 3: ##MAXY= 0.9; found 1 in the table"),
        ({"FIRSTY": "0.40", "MINY": "-0.10"}, "line 3: ##MINY= -0.1; found -0.2"),
        ({"FIRSTY": "0.50", "MINY": "-0.20"}, "line 2: ##FIRSTY= 0.5; found 0.4"),
        ({"MAXY": "1.50", "MINY": "-0.20"}, "line 2: ##MAXY= 1.5; found 1"),
    ],
)
def test_one_that_fails_where_others_hold_is_damage(labels: dict[str, str], words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        y_factor_of(block(YFACTOR="0.01", **labels), Y, ".")


def test_a_negative_factor_turns_the_extremes() -> None:
    turned = block(YFACTOR="-0.01", FIRSTY="-0.40", MAXY="0.20", MINY="-1.00")
    assert y_factor_of(turned, Y, ".") == -0.01
    assert turned.deviations == []


def test_ordinates_that_are_all_missing_say_nothing() -> None:
    assert y_factor_of(block(YFACTOR="2", MAXY="1", FIRSTY="1"), np.full(3, np.nan), ".") == 2


def test_first_ordinate_0_does_not_show_a_factor() -> None:
    with pytest.raises(FileFormatError, match="no ##YFACTOR="):
        y_factor_of(block(FIRSTY="0"), np.array([0.0, 1.0]), ".")
