"""Ranges of sample IDs, and IDs in file names."""

import pytest

from quant.errors import ParameterError
from quant.spectra.sample_ids import expand_ids, notes_from_name, range_hint


@pytest.mark.parametrize(
    ("items", "expected"),
    [
        (["S08..S11"], ["S08", "S09", "S10", "S11"]),
        (["1..3", "x"], ["1", "2", "3", "x"]),
        (["A-9..A-10"], ["A-9", "A-10"]),
        ([" S1 ", 7], ["S1", "7"]),
        (["A1..B3"], ["A1..B3"]),
        (["S1..S1"], ["S1"]),
        (["2024-1..2024-2"], ["2024-1", "2024-2"]),
    ],
)
def test_ranges(items: list[object], expected: list[str]) -> None:
    assert expand_ids(items) == expected


@pytest.mark.parametrize("item", ["S5..S3", "S1..S999999"])
def test_ranges_that_are_none(item: str) -> None:
    with pytest.raises(ParameterError, match="rising range"):
        expand_ids([item])


@pytest.mark.parametrize(
    ("missing", "hint"),
    [
        (["x", "51-60"], " A range of samples is written '51..60'."),
        (["S08 – S11"], " A range of samples is written 'S08..S11'."),
        (["K7-N01"], ""),
        (["2024-1"], ""),
        ([], ""),
    ],
)
def test_a_range_written_with_a_dash_is_told_how_ranges_are_written(missing: list[str], hint: str) -> None:
    assert range_hint(missing) == hint


def test_named_groups_of_a_file_name() -> None:
    pattern = r"(?P<sample>[A-Z]+\d+)(_(?P<replicate>\d+))?"
    assert notes_from_name("folder/S7_2.dx", pattern) == {"sample": "S7", "replicate": "2"}
    assert notes_from_name("S7.dx", pattern) == {"sample": "S7"}


@pytest.mark.parametrize(
    ("pattern", "words"),
    [
        ("(", "no regular expression"),
        (r"S\d", "no group"),
        (r"(?P<sample>X)", "'S7.dx'"),
        (r"(?P<sample>Y*)", "does not match"),
    ],
)
def test_patterns_that_find_no_sample(pattern: str, words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        notes_from_name("S7.dx", pattern)
