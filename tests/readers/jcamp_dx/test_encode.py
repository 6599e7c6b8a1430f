"""Integers to lines."""

import pytest

from quant.readers.jcamp_dx.encode import LINE_LENGTH, encode_lines

# Appl. Spectrosc. 42 (1988) 151-162, Table VIIb: found (public test data quoting it); the first is plain there.
VALUES = [1, 2, 3, 3, 2, 1, 0, -1, -2, -3]


@pytest.mark.parametrize(
    ("form", "lines"),
    [
        ("FIX", ["0 1 2 3 3 2 1 0 -1 -2 -3"]),
        ("PAC", ["0+1+2+3+3+2+1+0-1-2-3"]),
        ("SQZ", ["0ABCCBA@abc"]),
        ("DIF", ["0AJJ%jjjjjj", "9c"]),
        ("DIFDUP", ["0AJT%jX", "9c"]),
    ],
)
def test_the_published_line_in_every_form(form: str, lines: list[str]) -> None:
    assert encode_lines([str(i) for i in range(10)], VALUES, form) == lines


def test_a_missing_ordinate_breaks_the_differences() -> None:
    assert encode_lines(list("01234"), [1, None, None, 5, 7], "DIF") == ["0A??EK", "4G"]
    assert encode_lines(list("012"), [1, 2, None], "DIFDUP") == ["0AJ?"]


def test_long_tables_are_broken_and_checked_line_by_line() -> None:
    values = [(i * i) % 1000 for i in range(100)]
    lines = encode_lines([str(i) for i in range(100)], values, "DIF")
    assert max(map(len, lines)) <= LINE_LENGTH
    assert len(lines) > 2
    assert lines[-1] == "99H01"  # 99² = 9801


def test_counts_of_repetition_may_have_several_digits() -> None:
    lines = encode_lines([str(i) for i in range(150)], [2 * i for i in range(150)], "DIFDUP")
    assert lines == ["0@KS49", "149B98"]
