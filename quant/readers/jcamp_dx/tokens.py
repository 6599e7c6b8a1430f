"""Compressed ordinates of JCAMP-DX (SQZ, DIF, DUP, and PAC or plain integers among them), decoded as arrays.

Every character is looked up once in tables that say what it begins, its leading digit and its sign; tokens, repetitions
and running sums are then whole-array operations.

References
----------
.. [1] McDonald R.S., Wilks P.A., Appl. Spectrosc. 42 (1988) 151-162, tables of pseudo-digits (from memory; the worked
   lines in the tests name their source).
"""

from dataclasses import dataclass

import numpy as np

from quant.arrays import AnyArray, FloatArray, IntArray

SQZ_PLUS, SQZ_MINUS = "@ABCDEFGHI", "\0abcdefghi"
DIF_PLUS, DIF_MINUS = "%JKLMNOPQR", "\0jklmnopqr"
DUP = "\0STUVWXYZs"
MISSING = "?"

LONGEST = 15  # digits; a double holds any integer of so many
MOST_POINTS = 10_000_000  # a count of repetitions beyond this is damage, not a spectrum

_BAD, _DIGIT, _BLANK, _LINE_END, _VALUE, _DIFFERENCE, _REPEAT, _MISSING = range(8)


def _tables() -> tuple[AnyArray, AnyArray, AnyArray]:
    kind, digit, sign = np.zeros(256, np.uint8), np.zeros(256, np.int64), np.ones(256, np.int64)
    for signs, what, factor in (
        ("0123456789", _DIGIT, 1),
        (SQZ_PLUS, _VALUE, 1),
        (SQZ_MINUS, _VALUE, -1),
        (DIF_PLUS, _DIFFERENCE, 1),
        (DIF_MINUS, _DIFFERENCE, -1),
        (DUP, _REPEAT, 1),
    ):
        for value, character in enumerate(signs):
            if character != "\0":
                kind[ord(character)], digit[ord(character)], sign[ord(character)] = what, value, factor
    for characters, what in ((" \t,;", _BLANK), ("\n", _LINE_END), ("+-", _VALUE), (MISSING, _MISSING)):
        kind[[ord(character) for character in characters]] = what
    sign[ord("-")] = -1
    return kind, digit, sign


_KIND, _DIGIT_OF, _SIGN_OF = _tables()


class TokenError(Exception):
    """What is wrong with the ordinates, and in which line of them (counted from 0)."""

    def __init__(self, row: int, problem: str) -> None:
        self.row = row
        super().__init__(problem)


@dataclass(frozen=True)
class Ordinates:
    """Decoded ordinates.

    Attributes
    ----------
    values : array of shape (n_points,)
        Each ordinate once, check values left out; NaN where missing. [ordinate unit / YFACTOR]
    first : array of int, shape (n_lines,)
        The point that the abscissa of each line belongs to (in a difference table the point repeated for the check).
    rounded : bool
        A check value differs by one from the running sum.
    closed : bool
        The last line does not wait for a check value.
    """

    values: FloatArray
    first: IntArray
    rounded: bool = False
    closed: bool = True


def decode_compressed(lines: list[str]) -> Ordinates:
    """Decode the ordinates of the lines of a table that holds integers in any form, abscissae already cut off.

    Parameters
    ----------
    lines : list of str
        ASCII text, one ordinate or more a line.

    Raises
    ------
    TokenError
        A character, a count or a difference that has no meaning there, or a check value that is not the last ordinate.
    """
    codes = np.frombuffer("\n".join(lines).encode("ascii"), np.uint8)
    kind = _KIND[codes]
    starts, length, row = _tokens(codes, kind)
    what = kind[starts]
    what[what == _DIGIT] = _VALUE
    number = _token_values(codes, starts, length, row)

    repeats = what == _REPEAT
    first_in_row = np.flatnonzero(np.diff(row, prepend=-1))
    _check_grammar(what, number, row, first_in_row, len(lines))
    item = np.flatnonzero(~repeats)
    counts = np.ones(item.size, np.int64)
    counts[np.searchsorted(item, np.flatnonzero(repeats)) - 1] = number[repeats]
    if counts.sum() > MOST_POINTS:
        raise TokenError(int(row[starts.size - 1]), f"counts of repetition that give {counts.sum()} ordinates")

    # A value repeated stays, a difference repeated is added again: running sums from the last absolute value.
    what, row, steps = (np.repeat(array, counts) for array in (what[item], row[item], number[item]))
    absolute = np.flatnonzero(what != _DIFFERENCE)
    base = np.repeat(absolute, np.diff(absolute, append=what.size))
    total = np.cumsum(np.where(what == _DIFFERENCE, steps, 0))
    values = steps[base] + total - total[base]

    line_starts = np.searchsorted(row, np.arange(len(lines)))
    check = np.zeros(what.size, bool)
    after = line_starts[1:]
    check[after] = what[after - 1] == _DIFFERENCE
    rounded = _check_sums(values, what, row, check)
    kept = np.cumsum(~check) - 1  # number of the point; a check value carries that of the point it repeats
    ordinates = np.where(what == _MISSING, np.nan, values)[~check]
    return Ordinates(ordinates, kept[line_starts], rounded, bool(what[-1] != _DIFFERENCE))


def _tokens(codes: AnyArray, kind: AnyArray) -> tuple[IntArray, IntArray, IntArray]:
    """Return where tokens start, how many characters they have, and the line of each."""
    line_ends = np.flatnonzero(kind == _LINE_END)
    bad = np.flatnonzero(kind == _BAD)
    if bad.size:
        line = int(np.searchsorted(line_ends, bad[0]))
        raise TokenError(line, f"the character {chr(codes[bad[0]])!r} among the ordinates")
    is_digit = kind == _DIGIT
    goes_on = np.zeros(codes.size + 1, bool)  # a digit behind a digit or behind a sign that takes digits
    goes_on[1:-1] = is_digit[1:] & (is_digit | ((kind >= _VALUE) & (kind != _MISSING)))[:-1]
    belongs = is_digit | (kind >= _VALUE)
    starts = np.flatnonzero(belongs & ~goes_on[:-1])
    length = np.flatnonzero(belongs & ~goes_on[1:]) + 1 - starts
    per_line = np.diff(np.searchsorted(starts, line_ends), prepend=0, append=starts.size)
    return starts, length, np.repeat(np.arange(per_line.size), per_line)


def _token_values(codes: AnyArray, starts: IntArray, length: IntArray, row: IntArray) -> IntArray:
    """Return the signed integer of each token."""
    leading = codes[starts]
    longest = int(length.max(initial=0))
    if longest > LONGEST + 1:
        raise TokenError(int(row[length.argmax()]), f"a number of {longest} digits")
    bare = (length == 1) & ((leading == ord("+")) | (leading == ord("-")))
    if bare.any():
        raise TokenError(int(row[bare.argmax()]), "a sign without a number")
    value = _DIGIT_OF[leading]
    for place in range(1, longest):
        going_on = np.flatnonzero(length > place)
        value[going_on] = 10 * value[going_on] + (codes[starts[going_on] + place] - ord("0"))
    return np.asarray(value * _SIGN_OF[leading])


def _check_grammar(what: AnyArray, number: IntArray, row: IntArray, first_in_row: IntArray, n_lines: int) -> None:
    """Refuse tokens that have no meaning where they stand."""
    if first_in_row.size != n_lines:
        empty = int(np.setdiff1d(np.arange(n_lines), row[first_in_row])[0])
        raise TokenError(empty, "an abscissa without ordinates")
    wrong = first_in_row[(what[first_in_row] == _DIFFERENCE) | (what[first_in_row] == _REPEAT)]
    if wrong.size:
        raise TokenError(int(row[wrong[0]]), "a line that starts with a difference or a count instead of a value")
    repeats = what == _REPEAT
    twice = np.flatnonzero(repeats[1:] & repeats[:-1])
    if twice.size:
        raise TokenError(int(row[twice[0] + 1]), "two counts of repetition in a row")
    after_missing = np.flatnonzero((what[1:] == _DIFFERENCE) & (what[:-1] == _MISSING))
    if after_missing.size:
        raise TokenError(int(row[after_missing[0] + 1]), "a difference to a missing ordinate")
    empty_count = np.flatnonzero(repeats & (number < 1))
    if empty_count.size:
        raise TokenError(int(row[empty_count[0]]), "a count of repetition of 0")


def _check_sums(values: IntArray, what: AnyArray, row: IntArray, check: AnyArray) -> bool:
    """Compare each check value with the ordinate before it; return whether one is off by one."""
    places = np.flatnonzero(check)
    missing = places[what[places] == _MISSING]
    if missing.size:
        raise TokenError(int(row[missing[0]]), "a missing ordinate where the last one should be repeated as a check")
    off = np.abs(values[places] - values[places - 1])
    if (off > 1).any():
        place = places[int((off > 1).argmax())]
        raise TokenError(
            int(row[place]),
            f"the check value {values[place]} where the line before ends at {values[place - 1]} (one is damaged)",
        )
    return bool((off == 1).any())
