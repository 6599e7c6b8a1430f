"""The bytes of an ordinate table: what each character is, where lines begin, and the abscissa of each line."""

import math
import re
from dataclasses import dataclass

import numpy as np

from quant.arrays import AnyArray, FloatArray, IntArray
from quant.readers.jcamp_dx.alphabet import BLANK, DIGIT, DIGITS, KINDS, LINE_END, MINUS, PLUS, POINT

EXACT_DIGITS = 15  # a double holds any integer of so many
_AFFN = re.compile(rb"[+-]?(?:\d+\.?\d*|\.\d+)(?:[Ee][+-]\d+)?")
_EXPONENT = re.compile(rb"[Ee][+-]\d")
_EXPONENT_SIGNS = (b"E+", b"E-", b"e+", b"e-")  # before anything but a sign, E is a pseudo-digit
_KNOWN = bytes(code for code in range(256) if KINDS[code] != 255)


class TokenError(Exception):
    """What is wrong with a table, and in which line of it (counted from 0, blank lines too)."""

    def __init__(self, row: int, problem: str) -> None:
        self.row = row
        super().__init__(problem)


@dataclass(frozen=True)
class Lines:
    """The lines of a table that are not blank.

    Attributes
    ----------
    data : bytes
        The table, closed by a line end.
    kind : array of uint8, shape (n_bytes,)
        What each character is: see `quant.readers.jcamp_dx.alphabet`.
    digit : array of uint8, shape (n_bytes,)
        Which digit each character is; 255 if it is none.
    begin, abscissa_end, end : array of int, shape (n_lines,)
        Where the abscissa begins and ends, and where the line ends.
    rows : array of int, shape (n_lines,)
        Number of the line in the table, counted from 0.
    abscissae : array of shape (n_lines,)
        As written. [XUNITS / XFACTOR]
    decimals : int
        The most decimals that an abscissa is written with.
    plain : bool
        Ordinates are written with decimals or exponents.
    """

    data: bytes
    kind: AnyArray
    digit: AnyArray
    begin: IntArray
    abscissa_end: IntArray
    end: IntArray
    rows: IntArray
    abscissae: FloatArray
    decimals: int
    plain: bool

    def row_at(self, position: int) -> int:
        """Return the number of the line that a character stands in."""
        return int(self.rows[np.searchsorted(self.begin, position, side="right") - 1])

    def part(self, start: int, stop: int) -> "Lines":
        """Return some of the lines, from `start` to before `stop`."""
        low, high = int(self.begin[start]), int(self.end[stop - 1]) + 1
        chosen = slice(start, stop)
        return Lines(
            self.data[low:high],
            self.kind[low:high],
            self.digit[low:high],
            self.begin[chosen] - low,
            self.abscissa_end[chosen] - low,
            self.end[chosen] - low,
            self.rows[chosen],
            self.abscissae[chosen],
            self.decimals,
            self.plain,
        )

    def ordinates(self) -> list[str]:
        """Return the text of each line behind its abscissa."""
        bounds = zip(self.abscissa_end.tolist(), self.end.tolist(), strict=True)
        text = self.data.decode("ascii")
        return [text[start:stop] for start, stop in bounds]


def scan_lines(data: bytes) -> Lines:
    """Find the lines of a ``(X++(Y..Y))`` table and read their abscissae.

    Raises
    ------
    TokenError
        A character of no meaning, a line that does not begin with a number, or no line at all.
    """
    if not data.endswith(b"\n"):
        data += b"\n"
    foreign = data.translate(None, _KNOWN)
    if foreign:
        place = data.index(foreign[:1])
        found = data[place:].decode("utf-8", errors="replace")[:1]
        raise TokenError(data.count(b"\n", 0, place), f"the character {found!r} among the ordinates")
    kind = np.frombuffer(data.translate(KINDS), np.uint8)
    digit = np.frombuffer(data.translate(DIGITS), np.uint8)
    begin, end, rows = _line_bounds(kind)
    values, decimals, stop, points, odd = _abscissae(data, kind, digit, begin)
    exponents = 0
    if odd.size:
        kind = kind.copy()
        for line in odd.tolist():
            number = _odd_abscissa(data, int(begin[line]), int(rows[line]))
            values[line], stop[line] = float(number), begin[line] + len(number)
            decimals[line] = decimals_of(number.decode())
            points[line] = number.count(b".")
            exponents += b"e" in number.lower()
            kind[begin[line] : stop[line]] = DIGIT  # no character of it begins an ordinate
    plain = data.count(b".") > points.sum()
    if not plain and (b"E" in data or b"e" in data) and any(sign in data for sign in _EXPONENT_SIGNS):
        plain = len(_EXPONENT.findall(data)) > exponents
    return Lines(data, kind, digit, begin, stop, end, rows, values, int(decimals.max()), plain)


def decimals_of(number: str) -> int:
    """Return how many decimals a number is written with.

    >>> decimals_of("0.50"), decimals_of("12"), decimals_of("1.25E-3"), decimals_of("5E2")
    (2, 0, 5, -2)
    """
    mantissa, _, exponent = number.strip().lower().partition("e")
    decimals = len(mantissa.partition(".")[2]) - int(exponent[:5] or 0)
    return max(-300, min(300, decimals))  # powers of ten beyond these are no doubles


def _line_bounds(kind: AnyArray) -> tuple[IntArray, IntArray, IntArray]:
    """Return where each line that is not blank begins (blanks skipped) and ends, and its number."""
    end = np.flatnonzero(kind == LINE_END)
    begin = np.concatenate([[0], end[:-1] + 1])
    while (skip := kind[begin] == BLANK).any():
        begin += skip
    rows = np.flatnonzero(kind[begin] != LINE_END)
    if not rows.size:
        raise TokenError(0, "no ordinates")
    return begin[rows], end[rows], rows


def _abscissae(
    data: bytes, kind: AnyArray, digit: AnyArray, begin: IntArray
) -> tuple[FloatArray, IntArray, IntArray, IntArray, IntArray]:
    """Return value, decimals and end of the number at each line's beginning, the points seen, and which lines are odd.

    Odd are numbers with an exponent, with more digits than are exact, or no numbers at all.
    """
    codes = np.frombuffer(data, np.uint8)
    negative = codes[begin] == MINUS
    place = begin + ((codes[begin] == PLUS) | negative)
    value, digits = np.zeros(begin.size, np.int64), np.zeros(begin.size, np.int64)
    decimals, points = np.zeros(begin.size, np.int64), np.zeros(begin.size, np.int64)
    for _ in range(EXACT_DIGITS + 2):
        is_digit, is_point = kind[place] == DIGIT, kind[place] == POINT
        going_on = is_digit | is_point
        if not going_on.any():
            break
        value = np.where(is_digit, 10 * value + digit[place], value)
        digits += is_digit
        decimals += is_digit & (points > 0)
        points += is_point
        place += going_on
    before_exponent = (codes[place] | 0x20) == ord("e")
    sign = codes[np.minimum(place + 1, codes.size - 1)]
    before_exponent &= (sign == PLUS) | (sign == MINUS)
    odd = (digits == 0) | (digits > EXACT_DIGITS) | (points > 1) | before_exponent
    # Both are exact doubles, so that their quotient is the double nearest to what is written.
    values = np.where(negative, -value, value) / 10.0 ** np.minimum(decimals, EXACT_DIGITS)
    return values, decimals, place, points, np.flatnonzero(odd)


def _odd_abscissa(data: bytes, start: int, row: int) -> bytes:
    """Return the number that a line begins with, read by the letter."""
    number = _AFFN.match(data, start)
    if number is None:
        found = data[start:].partition(b"\n")[0][:40].decode("ascii").strip()
        raise TokenError(row, f"{found!r} where a line should begin with its abscissa")
    if not math.isfinite(float(number[0])):
        raise TokenError(row, "an abscissa too large")
    return number[0]
