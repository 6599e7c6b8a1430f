"""What the labels say of the ordinates: YFACTOR, FIRSTY, MAXY and MINY, compared with what was decoded.

Squeezed and plain ordinates have no check values; the labels are then the only witnesses of damage.
"""

from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import Block
from quant.readers.jcamp_dx.numbers import factor_of, number_of
from quant.readers.jcamp_dx.scan import decimals_of

_SINGLE_PRECISION = 1e-6  # share by which a stated ordinate may be off
_FACTORS = 2.0  # multiples of YFACTOR by which it may be off: labels are often made before ordinates are rounded


@dataclass(frozen=True)
class _Statement:
    """One label: what it says, and the ordinate it speaks of before and after YFACTOR."""

    label: str
    line: int
    stated: float
    written: float
    scaled: float
    allowed: float
    allowed_written: float

    @property
    def holds(self) -> bool:
        return abs(self.scaled - self.stated) <= self.allowed

    @property
    def holds_unscaled(self) -> bool:
        return abs(self.written - self.stated) <= self.allowed_written


def y_factor_of(block: Block, y: FloatArray, decimal: str) -> float:
    """Return YFACTOR, and compare what the labels say with the ordinates as written.

    One statement that fails where others hold means damage, except limits that the ordinates keep without reaching them
    when both are of that kind (0 and 100, say, for a picture).

    Raises
    ------
    FileFormatError
        No YFACTOR and no FIRSTY that shows it to be 1; or statements that contradict the ordinates.
    """
    factor = factor_of(block, "YFACTOR", decimal)
    statements = _statements(block, y, 1.0 if factor is None else factor, decimal)
    if factor is None:
        first = next((statement for statement in statements if statement.label == "FIRSTY"), None)
        if first is None or not first.holds_unscaled or first.stated == 0:
            raise FileFormatError(
                block.path, "no ##YFACTOR=, and no ##FIRSTY= that would show it to be 1. Export it again."
            )
        block.deviates("##YFACTOR= is missing, 1 is taken as FIRSTY has it")
        factor = 1.0
    failing = [statement for statement in statements if not (statement.holds or statement.holds_unscaled)]
    for statement in statements:
        if statement in failing:
            if _shows_damage(statement, statements, failing):
                raise FileFormatError(
                    block.path,
                    f"##{statement.label}= {statement.stated:g}; found {statement.scaled:g} in the table, while "
                    "other labels agree with it. An ordinate or the label is damaged: copy or export the file again.",
                    line=statement.line,
                )
            block.deviates(f"##{statement.label}= {_difference(statement)}")
        elif not statement.holds:
            block.deviates(f"##{statement.label}= is not scaled by YFACTOR")
    return factor


def _statements(block: Block, y: FloatArray, factor: float, decimal: str) -> list[_Statement]:
    least, most = float(np.fmin.reduce(y)), float(np.fmax.reduce(y))  # NaN only where every ordinate is missing
    low, high = (least, most) if factor > 0 else (most, least)
    found = []
    for label, ordinate in (("FIRSTY", float(y[0])), ("MAXY", high), ("MINY", low)):
        record, stated = block.find(label), number_of(block, label, decimal)
        if record is None or stated is None or np.isnan(ordinate):
            continue
        rounding = 0.5 * 10.0 ** -decimals_of(record.value.replace(",", ".")) + _SINGLE_PRECISION * abs(stated)
        allowed = rounding + _FACTORS * abs(factor)
        found.append(_Statement(label, record.line, stated, ordinate, ordinate * factor, allowed, rounding))
    return found


def _shows_damage(statement: _Statement, statements: list[_Statement], failing: list[_Statement]) -> bool:
    """Tell whether a statement that fails means that the ordinates are damaged."""
    if len(failing) == len(statements):  # the labels follow some other rule, or there is but one
        return False
    above = statement.scaled > statement.stated
    if statement.label == "FIRSTY" or above == (statement.label == "MAXY"):
        return True
    other = "MINY" if statement.label == "MAXY" else "MAXY"
    return any(held.label == other and held not in failing for held in statements)


def _difference(statement: _Statement) -> str:
    what = {"FIRSTY": "the first ordinate", "MAXY": "the largest ordinate", "MINY": "the smallest ordinate"}
    return f"{statement.stated:g} where {what[statement.label]} is {statement.scaled:g}"
