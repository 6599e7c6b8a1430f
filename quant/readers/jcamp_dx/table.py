"""The table of a JCAMP-DX block: abscissae, ordinates, and the checks that bind them."""

from dataclasses import dataclass

from quant.arrays import FloatArray
from quant.errors import FileFormatError
from quant.readers.jcamp_dx.abscissae import axis_values
from quant.readers.jcamp_dx.count import Scale, agree_on_count
from quant.readers.jcamp_dx.labels import Block, Record
from quant.readers.jcamp_dx.plain import decode_pairs, decode_plain
from quant.readers.jcamp_dx.scan import TokenError, scan_lines
from quant.readers.jcamp_dx.tokens import decode_compressed


@dataclass(frozen=True)
class Table:
    """Abscissae of the points and ordinates, factors not yet applied to the ordinates."""

    x: FloatArray
    y: FloatArray


def decode_line_table(block: Block, record: Record, scale: Scale) -> Table:
    """Decode ``(X++(Y..Y))``: each line an abscissa and ordinates at equal steps, in any of the forms.

    Raises
    ------
    FileFormatError
        Damage: line, what was found, what was expected.
    """
    try:
        lines = scan_lines(record.body.encode("utf-8"))
        ordinates = decode_plain(lines) if lines.plain else decode_compressed(lines)
    except TokenError as problem:
        raise _damage(block, record, problem, "ordinates in AFFN or ASDF form") from problem
    if ordinates.rounded:
        block.deviates("a check value differs by one ordinate unit from the sum of the differences")
    if not ordinates.closed:
        block.deviates("the last line of differences has no check value after it")
    found = lines.abscissae * scale.factor
    numbers = [record.line, *(record.line + 1 + lines.rows).tolist()]
    n_points = ordinates.values.size
    agree_on_count(block, n_points, scale, numbers[-1], closed=ordinates.checked)
    rounding = abs(scale.factor) * 0.5 * 10.0**-lines.decimals
    return Table(
        axis_values(block, scale, found, ordinates.first, rounding, n_points, numbers),
        ordinates.values,
    )


def decode_pair_table(block: Block, record: Record, scale: Scale) -> Table:
    """Decode ``(XY..XY)``: pairs of plain numbers.

    Raises
    ------
    FileFormatError
        A line that is not pairs of numbers, or pairs that do not run from FIRSTX to LASTX.
    """
    try:
        pairs, last = decode_pairs(record.body)
    except TokenError as problem:
        raise _damage(block, record, problem, "pairs of numbers") from problem
    agree_on_count(block, len(pairs), scale, record.line + 1 + last)
    x = pairs[:, 0] * scale.factor
    spacing = abs(float(x[-1] - x[0])) / (x.size - 1)
    for label, stated, found in (("FIRSTX", scale.first, x[0]), ("LASTX", scale.last, x[-1])):
        if stated is not None and abs(stated - found) > 0.5 * spacing:
            block.deviates(f"##{label}= is {stated:g} where the pairs have {found:g}")
    return Table(x, pairs[:, 1])


def _damage(block: Block, record: Record, problem: TokenError, expected: str) -> FileFormatError:
    return FileFormatError(
        block.path,
        f"found {problem} under ##{record.written}=; expected {expected}. Copy or export the file again.",
        line=record.line + 1 + problem.row,
    )
