"""Separators, cells and numbers of delimited text."""

from pathlib import Path

import pytest

from quant.errors import FileFormatError
from quant.readers.delimited import (
    find_column,
    number_from,
    numbers_from,
    position_from,
    read_rows,
    sample_column_of,
    separator_of,
)

FILE = Path("a.csv")


@pytest.mark.parametrize(
    ("line", "decimal", "separator"),
    [("a\tb;c,d e", ".", "\t"), ("a;b,c d", ".", ";"), ("a,b c", ".", ","), ("a b", ".", " "), ("1,5 2", ",", " ")],
)
def test_separators_found_out(line: str, decimal: str, separator: str) -> None:
    assert separator_of(line, decimal) == separator


def test_a_separator_given_counts() -> None:
    assert separator_of("a\tb", ".", ",") == ","
    assert separator_of("a,b", ".", "tab") == "\t"
    assert separator_of("a,b", ".", "space") == " "


@pytest.mark.parametrize(
    ("cell", "decimal", "number"),
    [
        ("1.5", ".", 1.5),
        (" -.5e-3 ", ".", -0.0005),
        ("1,5", ",", 1.5),
        ("1.5", ",", None),  # one thousand five hundred, or one and a half?
        ("1.234,5", ",", None),
        ("1,5", ".", None),
        ("1_000", ".", None),
        ("nan", ".", None),
        ("inf", ".", None),
        ("\u0661", ".", None),
        ("", ".", None),
    ],
)
def test_numbers(cell: str, decimal: str, number: float | None) -> None:
    assert number_from(cell, decimal) == number


@pytest.mark.parametrize(
    ("heading", "decimal", "expected"),
    [
        ("1650.2 nm", ".", (1650.2, "nm")),
        ("900nm", ".", (900.0, "nm")),
        ("1000 cm-1", ".", (1000.0, "cm-1")),
        ("900,5", ",", (900.5, None)),
        ("X900", ".", None),
        ("900 samples", ".", None),
        ("", ".", None),
    ],
)
def test_positions(heading: str, decimal: str, expected: tuple[float, str | None] | None) -> None:
    assert position_from(heading, decimal) == expected


def test_rows_know_their_lines() -> None:
    text = 'a,b\r\n\r\n"two\nlines",x\r"say ""yes""",\n,\n'
    assert read_rows(FILE, text, ",") == [(1, ["a", "b"]), (3, ["two\nlines", "x"]), (5, ['say "yes"', ""])]


def test_an_open_quote_is_refused_with_its_line() -> None:
    with pytest.raises(FileFormatError, match="line 2"):
        read_rows(FILE, 'a,b\n"c,d\ne,f\n', ",")


def test_a_wrong_number_names_line_column_and_content() -> None:
    with pytest.raises(FileFormatError, match="line 7: found 'x1' in column 'b'; expected a number"):
        numbers_from(FILE, 7, ["1", "x1"], ["a", "b"], ".")
    with pytest.raises(FileFormatError, match=r'decimal = ","'):
        numbers_from(FILE, 7, ["1", "0,5"], ["a", "b"], ".")


def test_columns_are_found_or_guessed() -> None:
    headings = ["Sample", "ethanol", "900", "batch"]
    assert find_column(FILE, headings, "batch", "note") == 3
    with pytest.raises(FileFormatError, match=r"the columns are Sample, ethanol, batch\. Did you mean 'ethanol'\?"):
        find_column(FILE, headings, "Ethanol", "values")
    with pytest.raises(FileFormatError, match="2 columns are called 'a'"):
        find_column(FILE, ["a", "a"], "a", "values")


@pytest.mark.parametrize("name", ["sample", "Sample", "SAMPLE_ID", "Sample ID", "id"])
def test_the_column_of_sample_ids(name: str) -> None:
    assert sample_column_of(FILE, ["batch", name], None) == 1
    assert sample_column_of(FILE, ["batch", name], "batch") == 0


def test_no_column_of_sample_ids() -> None:
    with pytest.raises(FileFormatError, match=r"The columns are batch, code: name the right one as sample_column"):
        sample_column_of(FILE, ["batch", "code", "900 nm"], None)
