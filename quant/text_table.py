"""How results print: numbers to four significant digits, columns that line up."""

import math
from collections.abc import Sequence
from numbers import Integral, Real
from typing import TypeAlias

import numpy as np

from quant.errors import ParameterError

Row: TypeAlias = tuple[str, object, str]  # name, value, unit

_GAP = "  "


def format_number(value: object, digits: int = 4) -> str:
    """Return a value as text, a number to `digits` significant digits.

    Digits before the decimal point are never rounded away, whole numbers print in full, and powers of ten appear only
    below 1e-4 and above 1e6. None, which no number could be computed for, is "–"; NaN is "not available"; truth values
    are "yes" and "no"; any other value is its own text.

    Parameters
    ----------
    value : object
        What to print.
    digits : int
        Significant digits, at least 1.

    Examples
    --------
    >>> format_number(0.0312456), format_number(123456.7), format_number(2e-7)
    ('0.03125', '123457', '2.000e-07')
    """
    if value is None:
        return "–"
    if isinstance(value, bool | np.bool_):
        return "yes" if value else "no"
    if isinstance(value, Integral):
        return str(int(value))
    if isinstance(value, Real):
        return _format_real(float(value), digits)
    return str(value)


def format_rows(rows: Sequence[Row]) -> str:
    """Return one line a row: the name, the value, and the unit (such as "% m/m") behind it.

    Numbers are aligned to the right; a value that is text starts where the numbers' column starts.
    """
    names = max((len(name) for name, _, _ in rows), default=0)
    numbers = max((len(format_number(value)) for _, value, _ in rows if _is_number(value)), default=0)
    lines = []
    for name, value, unit in rows:
        text = format_number(value)
        padded = text.rjust(numbers) if _is_number(value) else text.ljust(numbers)
        lines.append(f"{name.ljust(names)}{_GAP}{padded} {unit}".rstrip())
    return "\n".join(lines)


def format_columns(header: Sequence[str], rows: Sequence[Sequence[object]]) -> str:
    """Return a header line and one line a row, columns of numbers aligned to the right, of text to the left.

    Raises
    ------
    ParameterError
        A row has more or fewer cells than the header.
    """
    for number, row in enumerate(rows):
        if len(row) != len(header):
            raise ParameterError(f"row {number} has {len(row)} cells; the header has {len(header)}.")
    columns = []
    for index, title in enumerate(header):
        values = [row[index] for row in rows]
        texts = [title, *(format_number(value) for value in values)]
        width = max(map(len, texts))
        numeric = bool(values) and all(map(_is_number, values))
        columns.append([text.rjust(width) if numeric else text.ljust(width) for text in texts])
    return "\n".join(_GAP.join(cells).rstrip() for cells in zip(*columns, strict=True))


def _format_real(number: float, digits: int) -> str:
    if math.isnan(number):
        return "not available"
    if math.isinf(number):
        return "infinite" if number > 0 else "-infinite"
    if number == 0:
        return "0"
    scientific = f"{number:.{digits - 1}e}"
    if not 1e-4 <= abs(number) <= 1e6:
        return scientific
    exponent = int(scientific.split("e")[1])  # of the rounded number: 9.9996 has two digits before the point
    return f"{number:.{max(digits - 1 - exponent, 0)}f}"


def _is_number(value: object) -> bool:
    return value is None or (isinstance(value, Real) and not isinstance(value, bool))
