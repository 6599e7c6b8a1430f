"""Numbers under labels, and the decimal sign they are written with."""

import re

import numpy as np

from quant.errors import FileFormatError
from quant.readers.delimited import number_from
from quant.readers.jcamp_dx.labels import Block

_NUMERIC = ("XFACTOR", "YFACTOR", "FIRSTX", "LASTX", "DELTAX", "FIRSTY", "MAXX", "MINX", "MAXY", "MINY", "RESOLUTION")
# Not a thousands sign: a leading 0, four digits before, or other than three digits behind.
_SURELY_DECIMAL = re.compile(r"[+-]?(?:0+,\d+|\d{4,},\d+|\d+,(?:\d{1,2}|\d{4,}))(?:[Ee][+-]?\d+)?")


def decimal_of(block: Block, stated: str | None) -> str:
    """Return the decimal sign of a block: the one stated, or a comma where the labels leave no other reading."""
    values = [record.value for record in block.records if record.label in _NUMERIC]
    if stated is not None:
        return stated
    if any("." in value for value in values):
        return "."
    if any(_SURELY_DECIMAL.fullmatch(value) for value in values):
        block.deviates("decimal commas")
        return ","
    return "."


def number_of(block: Block, label: str, decimal: str) -> float | None:
    """Return the number under a label, or None where there is none.

    Raises
    ------
    FileFormatError
        The text is no number.
    """
    record = block.find(label)
    if record is None:
        return None
    value = number_from(record.value.replace(",", ".") if decimal == "," else record.value)
    if value is None or not np.isfinite(value):
        advice = ' If the comma is the decimal sign, set decimal = ",".' if "," in record.value else ""
        raise FileFormatError(
            block.path, f"##{label}= {record.value[:40]!r}; expected a number.{advice}", line=record.line
        )
    return value


def factor_of(block: Block, label: str, decimal: str) -> float | None:
    """Return the factor under a label, or None where there is none.

    Raises
    ------
    FileFormatError
        The text is no number, or 0.
    """
    value = number_of(block, label, decimal)
    if value == 0:
        raise FileFormatError(block.path, f"##{label}= 0; expected a factor other than 0.")
    return value


def count_of(block: Block, label: str, decimal: str) -> int | None:
    """Return the whole number under a label, or None where there is none.

    Raises
    ------
    FileFormatError
        The text is no whole number of 0 or more.
    """
    value = number_of(block, label, decimal)
    if value is not None and not (value == int(value) and value >= 0):
        raise FileFormatError(block.path, f"##{label}= {value:g}; expected a whole number.")
    return None if value is None else int(value)
