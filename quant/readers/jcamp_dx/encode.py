"""Integers to the lines of an ordinate table, in each form of JCAMP-DX."""

from collections.abc import Sequence
from dataclasses import dataclass

from quant.readers.jcamp_dx.alphabet import DIF_MINUS, DIF_PLUS, DUP, MISSING_MARK, SQZ_MINUS, SQZ_PLUS

FORMS = ("DIFDUP", "DIF", "SQZ", "PAC", "FIX")
LINE_LENGTH = 80  # characters, the standard's limit


@dataclass(frozen=True)
class _Item:
    """One ordinate as it is written: its token, and whether it is a difference to the one before."""

    text: str
    is_difference: bool = False


def encode_lines(abscissae: Sequence[str], ordinates: Sequence[int | None], form: str = "DIFDUP") -> list[str]:
    """Return the lines of a ``(X++(Y..Y))`` table.

    Parameters
    ----------
    abscissae : sequence of str
        One a point; a line begins with that of its first ordinate.
    ordinates : sequence of int or None
        None where missing. [ordinate unit / YFACTOR]
    form : {"DIFDUP", "DIF", "SQZ", "PAC", "FIX"}

    Returns
    -------
    list of str
        At most 80 characters each (a single long abscissa and ordinate aside). After a line that ends with a difference
        the next one repeats the last ordinate as a check; the table ends with such a line if need be.
    """
    lines: list[str] = []
    point = 0
    waiting = False  # the line before ended with a difference: the next begins with its last ordinate
    while point < len(ordinates) or waiting:
        first = point - 1 if waiting else point
        line, last_text, count = abscissae[first] + _absolute(ordinates[first], form).text, "", 1
        point, waiting = first + 1, False
        while point < len(ordinates):
            item = _item(ordinates, point, form)
            repeated = form == "DIFDUP" and item.is_difference and item.text == last_text
            head = line[: len(line) - len(_dup(count))] if repeated else line
            longer = head + (_dup(count + 1) if repeated else item.text)
            if len(longer) > LINE_LENGTH:
                break
            line, last_text, count = longer, item.text, count + 1 if repeated else 1
            point, waiting = point + 1, item.is_difference
        lines.append(line)
    return lines


def _item(ordinates: Sequence[int | None], point: int, form: str) -> _Item:
    value, before = ordinates[point], ordinates[point - 1]
    if form not in ("DIF", "DIFDUP") or value is None or before is None:
        return _absolute(value, form)
    return _Item(_pseudo_digits(value - before, DIF_PLUS, DIF_MINUS), is_difference=True)


def _absolute(value: int | None, form: str) -> _Item:
    if form == "FIX":
        return _Item(f" {MISSING_MARK if value is None else value}")
    if value is None:
        return _Item(MISSING_MARK)
    return _Item(f"{value:+d}" if form == "PAC" else _pseudo_digits(value, SQZ_PLUS, SQZ_MINUS))


def _pseudo_digits(value: int, plus: str, minus: str) -> str:
    digits = str(abs(value))
    return (minus if value < 0 else plus)[int(digits[0])] + digits[1:]


def _dup(count: int) -> str:
    """Return a count of repetitions, nothing for 1."""
    digits = str(count)
    return DUP[int(digits[0])] + digits[1:] if count > 1 else ""
