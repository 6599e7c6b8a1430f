"""Compressed ordinates of JCAMP-DX (SQZ, DIF, DUP, and PAC or plain integers among them), decoded as arrays.

Every byte is looked up once in tables that say what it is; tokens, their digits, repetitions and running sums are then
whole-array operations.
"""

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from quant.arrays import AnyArray, BoolArray, FloatArray, IntArray
from quant.readers.jcamp_dx.alphabet import (
    DIFFERENCE,
    DIGIT,
    LEADING,
    MINUS,
    MISSING,
    PLUS,
    POINT,
    REPEAT,
    SIGNS,
    TOKEN_KINDS,
)
from quant.readers.jcamp_dx.scan import EXACT_DIGITS, Lines, TokenError

MOST_POINTS = 2_000_000  # a count of repetitions beyond this is damage, not a spectrum
PORTION = 2**17  # bytes decoded at a time
_LARGEST_SUM = 2**62  # of differences; beyond it 64 bits run over


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
    checked : bool
        The last line is a check value and nothing else.
    second_checks : bool
        The second line begins with a check value.
    """

    values: FloatArray
    first: IntArray
    rounded: bool = False
    closed: bool = True
    checked: bool = False
    second_checks: bool = False


def decode_compressed(lines: Lines) -> Ordinates:
    """Decode ordinates that are integers in any form.

    Raises
    ------
    TokenError
        A count or a difference that has no meaning there, a number too large, or a check value that is not the last
        ordinate.
    """
    # In portions that fit the cache; each begins with the last line of the one before, which its first line may check.
    edges = np.unique(np.searchsorted(lines.begin, np.arange(0, len(lines.data), PORTION)))
    portions: list[Ordinates] = []
    n_points = 0
    for start, stop in pairwise([*edges[edges < lines.rows.size].tolist(), lines.rows.size]):
        portion = _decode(lines.part(max(start - 1, 0), stop))
        known = 0
        if start:
            known = int(portion.first[1]) + portion.second_checks
        first = portion.first[1 if start else 0 :] + (n_points - known)
        portions.append(replace(portion, values=portion.values[known:], first=first))
        n_points += portions[-1].values.size
        if n_points > MOST_POINTS:
            raise _too_many(int(lines.rows[stop - 1]))
    last = portions[-1]
    return Ordinates(
        np.concatenate([portion.values for portion in portions]),
        np.concatenate([portion.first for portion in portions]),
        any(portion.rounded for portion in portions),
        last.closed,
        last.checked,
    )


def _decode(lines: Lines) -> Ordinates:
    starts = _token_starts(lines)
    line_first = np.searchsorted(starts, lines.begin)  # the token behind each abscissa
    codes = np.frombuffer(lines.data, np.uint8).take(starts).tobytes()
    what = np.frombuffer(codes.translate(TOKEN_KINDS), np.uint8)
    _check_grammar(lines, starts, what, line_first)
    number = _token_values(lines, starts, codes)

    if (what == REPEAT).any():
        what, number, line_first = _repeated(lines, starts, what, number, line_first)
    is_difference = what == DIFFERENCE
    values = _running_sums(lines, number, is_difference)
    checks = np.zeros(line_first.size, bool)
    checks[1:] = is_difference[line_first[1:] - 1]
    check = line_first[checks]
    rounded = _check_sums(lines, values, what, line_first, check)

    ordinates = values.astype(np.float64)
    ordinates[what == MISSING] = np.nan
    kept = np.ones(what.size, bool)
    kept[check] = False
    # A check value carries the number of the point it repeats.
    first = line_first - np.cumsum(checks)
    checked = bool(check.size and check[-1] == what.size - 1)
    return Ordinates(ordinates[kept], first, rounded, not is_difference[-1], checked, bool(checks[1:2].any()))


def _too_many(row: int) -> TokenError:
    return TokenError(row, f"counts of repetition that give more than {MOST_POINTS} ordinates")


def _token_starts(lines: Lines) -> IntArray:
    """Return where ordinate tokens start."""
    kind = lines.kind
    belongs = kind >= MISSING
    goes_on = (kind[1:] <= DIGIT) & (kind[1:] >= POINT) & (kind[:-1] >= POINT)
    belongs[1:] ^= goes_on
    belongs[lines.begin] = False  # the abscissa
    return np.flatnonzero(belongs)


def _token_values(lines: Lines, starts: IntArray, codes: bytes) -> IntArray:
    """Return the signed integer of each token."""
    behind = lines.digit[1:]
    leading = np.frombuffer(codes.translate(LEADING), np.uint8)
    following = behind.take(starts)
    going_on = following < 10
    _refuse_bare_signs(lines, starts, codes, going_on)
    value = (leading * (1 + 9 * going_on.view(np.uint8)) + following * going_on).astype(np.int64)  # at most 99
    among = np.flatnonzero(going_on)
    place = starts.take(among)
    for _ in range(EXACT_DIGITS):
        place += 1
        longer = np.flatnonzero(behind.take(place) < 10)
        if not longer.size:
            break
        among, place = among.take(longer), place.take(longer)
        value[among] = 10 * value.take(among) + behind.take(place)
    else:
        raise TokenError(lines.row_at(int(starts[among[0]])), f"a number of more than {EXACT_DIGITS} digits")
    signed: IntArray = value * np.frombuffer(codes.translate(SIGNS), np.int8)
    return signed


def _refuse_bare_signs(lines: Lines, starts: IntArray, codes: bytes, has_digit: BoolArray) -> None:
    leading = np.frombuffer(codes, np.uint8)
    bare = ((leading == PLUS) | (leading == MINUS)) & ~has_digit
    if bare.any():
        raise TokenError(lines.row_at(int(starts[bare.argmax()])), "a sign without a number")


def _check_grammar(lines: Lines, starts: IntArray, what: AnyArray, line_first: IntArray) -> None:
    """Refuse tokens that have no meaning where they stand."""
    empty = np.flatnonzero(np.diff(line_first, append=starts.size) == 0)
    if empty.size:
        raise TokenError(int(lines.rows[empty[0]]), "an abscissa without ordinates")
    opening = what[line_first]
    wrong = np.flatnonzero((opening == DIFFERENCE) | (opening == REPEAT))
    if wrong.size:
        raise TokenError(
            int(lines.rows[wrong[0]]), "a line that starts with a difference or a count instead of a value"
        )
    repeats = what == REPEAT
    for fault, words in (
        (repeats[1:] & repeats[:-1], "two counts of repetition in a row"),
        ((what[1:] == DIFFERENCE) & (what[:-1] == MISSING), "a difference to a missing ordinate"),
    ):
        if fault.any():
            raise TokenError(lines.row_at(int(starts[fault.argmax() + 1])), words)


def _repeated(
    lines: Lines, starts: IntArray, what: AnyArray, number: IntArray, line_first: IntArray
) -> tuple[AnyArray, IntArray, IntArray]:
    """Write out what is repeated; a difference repeated is added again."""
    repeats = np.flatnonzero(what == REPEAT)
    counts = np.ones(what.size, np.int64)
    counts[repeats - 1] = np.minimum(number[repeats], MOST_POINTS + 1)
    counts[repeats] = 0
    position = np.cumsum(counts)
    if position[-1] > MOST_POINTS:
        place = int(starts[int((position > MOST_POINTS).argmax())])
        raise _too_many(lines.row_at(place))
    return np.repeat(what, counts), np.repeat(number, counts), (position - counts)[line_first]


def _running_sums(lines: Lines, number: IntArray, is_difference: BoolArray) -> IntArray:
    """Return ordinates: values as they are, differences summed up from the value before."""
    absolute = np.flatnonzero(~is_difference)
    if absolute.size == number.size:
        return number
    start = number[absolute]
    steps = number
    steps[absolute] = 0
    if float(np.abs(steps).max()) * steps.size > _LARGEST_SUM:
        raise TokenError(int(lines.rows[0]), "differences too large to be summed")
    total = np.cumsum(steps)
    total += np.repeat(start - total[absolute], np.diff(absolute, append=number.size))
    return total


def _check_sums(lines: Lines, values: IntArray, what: AnyArray, line_first: IntArray, check: IntArray) -> bool:
    """Compare each check value with the ordinate before it; return whether one is off by one."""
    rows = lines.rows[np.searchsorted(line_first, check)]
    missing = what[check] == MISSING
    if missing.any():
        row = int(rows[missing.argmax()])
        raise TokenError(row, "a missing ordinate where the last one should be repeated as a check")
    off = np.abs(values[check] - values[check - 1])
    if (off > 1).any():
        worst = int((off > 1).argmax())
        raise TokenError(
            int(rows[worst]),
            f"the check value {values[check[worst]]} where the line before ends at {values[check[worst] - 1]} "
            "(one is damaged)",
        )
    return bool((off == 1).any())
