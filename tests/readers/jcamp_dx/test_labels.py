"""Labels and blocks."""

from pathlib import Path

import pytest

from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import plain_label, read_blocks

FILE = Path("a.dx")


@pytest.mark.parametrize("written", ["DATA TYPE", "DATATYPE", "Data-Type", "data_type", " DATA / TYPE "])
def test_labels_compare_without_case_and_separators(written: str) -> None:
    assert plain_label(written) == "DATATYPE"


def test_records_know_label_value_and_line() -> None:
    (block,) = read_blocks(FILE, "##TITLE= a $$ not this\n##= nor this\n##OWNER= b\n  c\n##END=\n")
    assert [(r.written, r.value, r.line) for r in block.records] == [("TITLE", "a", 1), ("OWNER", "b\nc", 3)]
    assert block.ended
    assert block.deviations == []


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_all_line_ends_count_alike(end: str) -> None:
    (block,) = read_blocks(FILE, end.join(["##TITLE= a", "##OWNER= b", "##END=", ""]))
    assert [record.line for record in block.records] == [1, 2]


def test_blocks_nest() -> None:
    text = "##TITLE= all\n##BLOCKS= 2\n##TITLE= one\n##END=\n##TITLE= two\n##END=\n##OWNER= me\n##END=\n"
    blocks = read_blocks(FILE, text)
    assert [[record.value for record in block.records] for block in blocks] == [["all", "2", "me"], ["one"], ["two"]]


def test_blanks_before_a_label_and_a_missing_end_are_noted() -> None:
    (block,) = read_blocks(FILE, "##TITLE= a\n ##OWNER= b\n")
    assert block.deviations == ["blanks before ##", "##END= is missing"]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("##OWNER= b\n", "found ##OWNER="),
        ("1 2\n3 4\n", "no label at all"),
        ("##TITLE= a\n##END=\n##OWNER= b\n", "line 3: ##OWNER= after ##END="),
        ("##TITLE= a\n##OWNER= b", "line 2: the file ends within a line"),
    ],
)
def test_what_is_no_sequence_of_blocks_is_refused(text: str, words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        read_blocks(FILE, text)


def test_a_label_that_contradicts_itself_is_refused_when_it_is_needed() -> None:
    (block,) = read_blocks(FILE, "##TITLE= a\n##FIRSTX= 1\n##FIRST X= 1\n##LASTX= 2\n##LASTX= 3\n##END=\n")
    record = block.find("FIRSTX")
    assert record is not None
    assert record.value == "1"
    with pytest.raises(FileFormatError, match="line 5"):
        block.find("LASTX")


def test_a_lost_end_does_not_make_the_next_block_an_inner_one() -> None:
    text = "##TITLE= one\n##XYDATA= (X++(Y..Y))\n1 2\n##TITLE= two\n##XYDATA= (X++(Y..Y))\n1 2\n##END=\n"
    one, two = read_blocks(FILE, text)
    assert (one.ended, two.ended) == (False, True)
    assert two.outer is None
    assert "##END= is missing" in one.deviations
    assert "##END= is missing" not in two.deviations


def test_a_mark_within_a_line_is_text() -> None:
    (block,) = read_blocks(FILE, "##TITLE= a ## b # c\n##OWNER= d\n# e\n##END= $$ f\n")
    assert [record.value for record in block.records] == ["a ## b # c", "d\n# e"]
    assert block.deviations == []
