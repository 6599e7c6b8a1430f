"""Compressed ordinates: published lines, single tokens, and what is refused."""

import numpy as np
import pytest

from quant.readers.jcamp_dx import tokens
from quant.readers.jcamp_dx.scan import TokenError, scan_lines
from quant.readers.jcamp_dx.tokens import Ordinates

# McDonald R.S., Wilks P.A., Appl. Spectrosc. 42 (1988) 151-162, Table VIIb: found (public test data quoting it).
TABLE_VII = [1, 2, 3, 3, 2, 1, 0, -1, -2, -3]
# Same paper, Table VI.3, DIFDUP with check line: found (public test data quoting it). SQZ and DIF of it: computed.
TABLE_VI = [
    *(0, 0, 0, 0, 2, 4, 4, 4, 7, 5, 4, 4, 5, 5, 7, 10, 11, 11, 6, 5, 7, 6, 9, 9, 7, 10, 10, 9, 10, 11, 12, 15, 16, 16),
    *(14, 17, 38, 38, 35, 38, 42, 47, 54, 59, 66, 75, 78, 88, 96, 104, 110, 121, 128),
]
VI_DIFDUP = "@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P"
VI_DIF = "@%%%KK%%Lkj%J%KLJ%njKjL%kL%jJJJLJ%kLK1%lLMNPNPRLJ0QQOJ1P"
VI_SQZ = "@@@@BDDDGEDDEEGA0A1A1FEGFIIGA0A0IA0A1A2A5A6A6A4A7C8C8C5C8D2D7E4E9F6G5G8H8I6A04A10A21A28"


def decode_compressed(lines: list[str]) -> Ordinates:
    """Decode ordinates behind an abscissa that is always 0."""
    return tokens.decode_compressed(scan_lines("\n".join(f"0 {line}" for line in lines).encode()))


@pytest.mark.parametrize(
    "line", ["1 2 3 3 2 1 0 -1 -2 -3", "1+2+3+3+2+1+0-1-2-3", "1BCCBA@abc", "1JJ%jjjjjj", "1JT%jX", "1JJ%jX"]
)
def test_table_vii_in_every_form(line: str) -> None:
    assert decode_compressed([line]).values.tolist() == TABLE_VII


@pytest.mark.parametrize("line", [VI_DIFDUP, VI_DIF])
def test_table_vi_with_its_check_line(line: str) -> None:
    decoded = decode_compressed([line, "A28"])
    assert decoded.values.tolist() == TABLE_VI
    assert decoded.first.tolist() == [0, 52]  # the second line's abscissa belongs to the 53rd point
    assert decoded.closed
    assert not decoded.rounded


def test_table_vi_in_squeezed_form() -> None:
    assert decode_compressed([VI_SQZ]).values.tolist() == TABLE_VI


@pytest.mark.parametrize(  # computed from the tables of pseudo-digits
    ("line", "expected"),
    [
        ("A23a23", [123, -123]),
        ("A0j5", [10, -5]),
        ("A000J000TJ%%", [1000, 2000, 3000, 3001, 3001, 3001]),
        ("@S0", [0] * 10),
        ("AS2", [1] * 12),
        ("Bs", [2] * 9),
        ("I99J", [999, 1000]),
        ("i99K", [-999, -997]),
        ("AJ9", [1, 20]),
        ("E3e", [53, -5]),  # E and no sign is the digit 5
        ("1, 2; 3\t4", [1, 2, 3, 4]),
        ("+12-7", [12, -7]),
    ],
)
def test_single_tokens(line: str, expected: list[int]) -> None:
    assert decode_compressed([line]).values.tolist() == expected


def test_a_missing_ordinate_is_nan_and_may_be_repeated() -> None:
    assert np.array_equal(decode_compressed(["A?SB?TC"]).values, [1, np.nan, 2, np.nan, np.nan, 3], equal_nan=True)


def test_no_check_value_after_a_line_that_ends_with_a_value() -> None:
    decoded = decode_compressed(["AJB", "BJ", "C"])
    assert decoded.values.tolist() == [1, 2, 2, 2, 3]
    assert decoded.first.tolist() == [0, 3, 4]


def test_a_check_value_off_by_one_is_told_and_counts_from_there() -> None:
    decoded = decode_compressed(["AJ", "CJ"])  # 1 2, then 3 where 2 is expected
    assert decoded.values.tolist() == [1, 2, 4]
    assert decoded.rounded


@pytest.mark.parametrize(
    ("lines", "row", "words"),
    [
        (["+1jj", "+4jj"], 1, "check value 4 where the line before ends at -1"),  # found: public test data
        (["AJ", "?J"], 1, "missing"),
        (["A", "JJ"], 1, "starts with a difference"),
        (["A", "SA"], 1, "count instead of a value"),
        (["AST"], 0, "two counts"),
        (["?J"], 0, "missing ordinate"),
        (["A", "B+"], 1, "sign without a number"),
        (["A", "", "B"], 1, "without ordinates"),
        (["AJ", "B" + "R99999999999999" * 6000], 0, "too large"),
        (["A", "B#"], 1, "'#'"),
        (["A", "B\x00"], 1, "character"),
        (["A1234567890123456"], 0, "digits"),
        (["AS99999999"], 0, "repetition"),
    ],
)
def test_damage_is_refused_with_its_line(lines: list[str], row: int, words: str) -> None:
    with pytest.raises(TokenError, match=words) as refusal:
        decode_compressed(lines)
    assert refusal.value.row == row


def test_portions_are_decoded_as_the_whole(monkeypatch: pytest.MonkeyPatch) -> None:
    lines = ["AJT", "DJ", "E?", "A%", "AJ?TB", "BL", "E", "@SAT"]
    whole = decode_compressed(lines)
    assert len(whole.values) == 16
    for size in range(1, 40):
        monkeypatch.setattr(tokens, "PORTION", size)
        parts = decode_compressed(lines)
        assert np.array_equal(parts.values, whole.values, equal_nan=True), size
        assert parts.first.tolist() == whole.first.tolist()
        assert (parts.rounded, parts.closed, parts.checked) == (whole.rounded, whole.closed, whole.checked)
        with pytest.raises(TokenError, match="check value") as refusal:
            decode_compressed([*lines[:5], "H", *lines[6:], "AJ", "I"])
        assert refusal.value.row == 9


@pytest.mark.parametrize(
    ("line", "abscissa", "decimals"),
    [
        ("599.860@", 599.86, 3),
        ("-5+1", -5.0, 0),
        ("+.5 1", 0.5, 1),
        ("6.00E+02A", 600.0, 0),
        ("5E-1 A", 0.5, 1),
        ("  12.\tA", 12.0, 0),
        ("0.12345678901234567@", 0.12345678901234567, 17),
        ("600E3", 600.0, 0),  # E and no sign is the digit 5 of the ordinate
    ],
)
def test_abscissae(line: str, abscissa: float, decimals: int) -> None:
    lines = scan_lines(line.encode())
    assert lines.abscissae.tolist() == [abscissa]
    assert lines.decimals == decimals
    assert not lines.plain
    assert tokens.decode_compressed(lines).values.size == 1


@pytest.mark.parametrize("table", ["1 2.5", "1 2E+1", "1E+1 2e-1", "0.5+1+2.5", "1.2.3A"])
def test_decimals_and_exponents_among_ordinates_are_seen(table: str) -> None:
    assert scan_lines(table.encode()).plain


@pytest.mark.parametrize("line", ["A1", "E+1", ".", "-", "?"])
def test_a_line_without_abscissa_is_refused(line: str) -> None:
    with pytest.raises(TokenError) as refusal:
        tokens.decode_compressed(scan_lines(f"\n0 1\n{line}".encode()))
    assert refusal.value.row == 2
