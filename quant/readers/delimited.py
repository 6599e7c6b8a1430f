"""Delimited text: separators, cells, numbers; shared by the readers of tables."""

import csv
import difflib
import math
import re
from collections.abc import Sequence
from functools import lru_cache
from pathlib import Path
from typing import TypeAlias

from quant.checks import name_some
from quant.errors import FileFormatError
from quant.units import axis_unit_named

Row: TypeAlias = tuple[int, list[str]]  # line counted from 1, cells

SAMPLE_COLUMNS = ("sample", "sample_id", "sample id", "id")
_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?", re.ASCII)
_BLANKS = re.compile(r"[ \t]+")  # a protected blank parts thousands, never cells
_COMMA_NUMBER = re.compile(r"[+-]?\d*,\d+(?:[eE][+-]?\d+)?", re.ASCII)
_POSITION = re.compile(rf"(?P<number>{_NUMBER.pattern})\s*(?P<unit>\D.*)?", re.ASCII)
_SIGNS = {"tab": "\t", "space": " "}
SIGN_WORDS = {"\t": "tab", " ": "space"}
"""Separators as recipes name them, where the sign itself is hard to see."""

_GROUP_SIGNS = {",": ",", ".": ".", "'": "'’", "space": " \u00a0\u2009\u202f"}
_GROUPED = {
    word: re.compile(rf"[+-]?[1-9]\d{{0,2}}(?:[{re.escape(signs)}]\d{{3}})+(?=\D|$)", re.ASCII)
    for word, signs in _GROUP_SIGNS.items()
}


def separator_of(line: str, decimal: str, given: str | None = None) -> str:
    """Return the sign between cells: the one given, else the first of tab, semicolon, comma, blank that `line` holds.

    >>> separator_of("a;b,c", "."), separator_of("1,5 2,5", ",")
    (';', ' ')
    """
    if given is not None:
        return separator_sign(given)
    return next((sign for sign in "\t;," if sign in line and sign != decimal), " ")


def separator_sign(word: str) -> str:
    """Return the sign that a recipe's word for a separator means, such as a tabulator for "tab"."""
    return _SIGNS.get(word, word)


def read_rows(path: Path, text: str, separator: str) -> list[Row]:
    """Return the rows that are not blank, cells stripped of blanks.

    Raises
    ------
    FileFormatError
        A quote that is never closed.
    """
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    if separator == " ":
        lines = [_BLANKS.sub(" ", line.strip(" \t")) for line in lines]
        if '"' not in text:
            return [(number, line.split(" ")) for number, line in enumerate(lines, 1) if line]
    rows: list[Row] = []
    table = csv.reader((f"{line}\n" for line in lines), delimiter=separator, strict=True, skipinitialspace=True)
    start = 1
    try:
        for cells in table:
            if any(map(str.strip, cells)):
                rows.append((start, cells))
            start = table.line_num + 1
    except csv.Error as problem:
        raise FileFormatError(
            path, f"{problem}; expected cells whose quotes are opened and closed. Export it again.", line=start
        ) from problem
    return rows


def number_from(cell: str, decimal: str = ".", thousands: str | None = None) -> float | None:
    """Return the number that a cell holds, or None if it holds none.

    Parameters
    ----------
    cell : str
    decimal : {".", ","}
    thousands : {",", ".", "'", "space"}, optional
        The sign that may part groups of three digits; where it stands between other numbers of digits, the cell is
        no number.

    >>> number_from("1,5", ","), number_from("1_000"), number_from("-2e3"), number_from("1.234,5", ",", ".")
    (1.5, None, -2000.0, 1234.5)
    """
    text = _ungrouped(cell.strip(), thousands)
    if decimal == ",":
        text = text.replace(".", "_").replace(",", ".")
    return float(text) if _NUMBER.fullmatch(text) else None


def looks_like_a_number(text: str) -> bool:
    """Tell a damaged number such as ``9O2`` from a name: more digits than letters."""
    digits = sum(map(str.isdigit, text))
    return digits > sum(map(str.isalpha, text))


def groups_in(text: str) -> list[str]:
    """Return the signs that part three digits from others somewhere in a text: each may be a sign of thousands."""
    return [word for word, pattern in _GROUPED.items() if re.search(r"(?<!\d)" + pattern.pattern, text)]


def position_from(heading: str, decimal: str = ".", thousands: str | None = None) -> tuple[float, str | None] | None:
    """Return axis position and unit that a column's heading gives, or None if it is no position.

    >>> position_from("1650.2 nm"), position_from("900"), position_from("X900")
    ((1650.2, 'nm'), (900.0, None), None)
    """
    text = _ungrouped(heading.strip(), thousands)
    if decimal == ",":
        text = text.replace(".", "_").replace(",", ".")
    match = _POSITION.fullmatch(text)
    if match is None:
        return None
    value = float(match["number"])
    if not math.isfinite(value):
        return None  # 1e999 is no position
    if not match["unit"]:
        return value, None
    unit = _unit_named(match["unit"])
    return None if unit is None else (value, unit)


@lru_cache(maxsize=64)  # thousands of headings carry one unit
def _unit_named(text: str) -> str | None:
    return axis_unit_named(text)


def _ungrouped(text: str, thousands: str | None) -> str:
    """Return a number without the signs between its groups of three digits."""
    if thousands is None or (match := _GROUPED[thousands].match(text)) is None:
        return text
    return "".join(c for c in match[0] if c not in _GROUP_SIGNS[thousands]) + text[match.end() :]


def numbers_from(
    path: Path,
    line: int,
    cells: Sequence[str],
    headings: Sequence[str],
    decimal: str,
    missing: Sequence[str] = ("", "nan"),
    thousands: str | None = None,
) -> list[float]:
    """Return the numbers of a row, NaN where a cell holds a word for a missing value.

    Raises
    ------
    FileFormatError
        A cell that is no number; line, column and content are named.
    """
    numbers = []
    for cell, heading in zip(cells, headings, strict=True):
        number = number_from(cell, decimal, thousands)
        if number is None:
            if cell.strip().lower() not in missing:
                raise FileFormatError(path, not_a_number(cell, decimal, f"in column {heading!r}"), line=line)
            number = float("nan")
        numbers.append(number)
    return numbers


def not_a_number(cell: str, decimal: str, place: str) -> str:
    """Return what to say of a cell that should hold a number; numbers with other signs get the remedy."""
    text = cell.strip()
    groups = [word for word in groups_in(text) if word != decimal and number_from(text, decimal, word) is not None]
    advice = ['Set decimal = ",".'] if decimal == "." and _COMMA_NUMBER.fullmatch(text) else []
    advice += [f'Set thousands = "{word}".' for word in groups]
    remedy = " Or: ".join(advice) or "Mend the cell."
    return f"found {text[:40]!r} {place}; expected a number with {decimal!r} as decimal sign. {remedy}"


def find_column(path: Path, headings: Sequence[str], column: str, purpose: str) -> int:
    """Return the place of a column.

    Raises
    ------
    FileFormatError
        There is none of that name (the message guesses), or there are two.
    """
    places = [place for place, heading in enumerate(headings) if heading == column]
    if len(places) == 1:
        return places[0]
    named = [heading for heading in headings if number_from(heading) is None]
    if places:
        raise FileFormatError(path, f"{len(places)} columns are called {column!r} ({purpose}); expected one.", line=1)
    guess = difflib.get_close_matches(column, named, n=1)
    hint = f" Did you mean {guess[0]!r}?" if guess else ""
    raise FileFormatError(
        path,
        f"no column {column!r} ({purpose}); the columns are {name_some(named, 12) or 'numbers only'}.{hint}",
        line=1,
    )


def sample_column_of(path: Path, headings: Sequence[str], given: str | None) -> int:
    """Return the place of the column of sample IDs: the one given, else the one called sample, sample_id or id.

    Raises
    ------
    FileFormatError
        There is none.
    """
    if given is not None:
        return find_column(path, headings, given, "sample_column")
    lower = [heading.lower() for heading in headings]
    for name in SAMPLE_COLUMNS:
        if name in lower:
            return find_column(path, headings, headings[lower.index(name)], "sample IDs")
    named = [heading for heading in headings if position_from(heading) is None]
    raise FileFormatError(
        path,
        f"no column of sample IDs; expected one called {', '.join(SAMPLE_COLUMNS[:2])} or {SAMPLE_COLUMNS[-1]}. "
        f"The columns are {name_some(named, 12) or 'numbers only'}: name the right one as sample_column.",
        line=1,
    )


def check_width(path: Path, row: Row, expected: int) -> None:
    """Refuse a row that has more or fewer cells than the header.

    Raises
    ------
    FileFormatError
        It has.
    """
    line, cells = row
    if len(cells) != expected:
        raise FileFormatError(
            path,
            f"found {len(cells)} cells; expected {expected}, as in the header. Mend the row or the separator.",
            line=line,
        )


def note_cells(cells: Sequence[str], headings: Sequence[str], places: Sequence[int]) -> dict[str, str]:
    """Return the notes of a row: the cells at `places` that are not empty, under their headings."""
    return {headings[place]: text for place in places if (text := cells[place].strip())}
