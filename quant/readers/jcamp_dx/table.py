"""The table of a JCAMP-DX block: abscissae, ordinates, and the checks that bind them."""

import re
from dataclasses import dataclass
from itertools import chain

import numpy as np

from quant.arrays import FloatArray
from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import Block, Record
from quant.readers.jcamp_dx.tokens import Ordinates, TokenError, decode_compressed

_AFFN = r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[Ee][+-]\d+)?"
_ABSCISSA = re.compile(rf"\s*({_AFFN})", re.ASCII)
_PLAIN_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[Ee][+-]?\d+)?|\?", re.ASCII)
_EXPONENTS = ("E+", "E-", "e+", "e-")  # before anything but a sign, E is a pseudo-digit
_NOT_PLAIN = re.compile(r"[^0-9+\-.Ee,; \t]")
_BLANK_LEFT_OUT = re.compile(r"(?<=[\d.?])(?=[+-])", re.ASCII)  # in PAC form a sign stands for the blank before it
_UNCERTAIN_STEP = 0.5  # share of the point spacing by which an abscissa may be off
_WORTH_A_NOTE = 0.1


@dataclass(frozen=True)
class Table:
    """Abscissae of the points and ordinates, factors not yet applied to the ordinates."""

    x: FloatArray
    y: FloatArray


@dataclass(frozen=True)
class Scale:
    """What the labels say of the abscissa; None where they say nothing. [XUNITS]"""

    first: float | None
    last: float | None
    step: float | None
    n_points: int | None
    factor: float


def decode_line_table(block: Block, record: Record, scale: Scale) -> Table:
    """Decode ``(X++(Y..Y))``: each line an abscissa and ordinates at equal steps, in any of the forms.

    Raises
    ------
    FileFormatError
        Damage: line, what was found, what was expected.
    """
    numbers, lines = _data_lines(block, record)
    written, ordinates = _decode(block, numbers, lines)
    if ordinates.rounded:
        block.deviates("a check value differs by one ordinate unit from the sum of the differences")
    if not ordinates.closed:
        block.deviates("the last line of differences has no check value after it")
    abscissae = np.array(list(map(float, written))) * scale.factor
    n_points = _agreed_count(block, ordinates.values.size, scale, numbers[-1])
    x = _axis(block, record, scale, abscissae, n_points)
    _check_abscissae(block, numbers, written, abscissae, x[ordinates.first], scale.factor, x)
    return Table(x, ordinates.values)


def decode_pairs(block: Block, record: Record, scale: Scale) -> Table:
    """Decode ``(XY..XY)``: pairs of plain numbers.

    Raises
    ------
    FileFormatError
        A line that is not pairs of numbers.
    """
    numbers, lines = _data_lines(block, record)
    rows = [_plain_values(block, number, line) for number, line in zip(numbers, lines, strict=True)]
    odd = next((number for number, row in zip(numbers, rows, strict=True) if len(row) % 2), None)
    if odd is not None:
        raise FileFormatError(block.path, "an odd count of numbers; expected pairs of X and Y.", line=odd)
    pairs = np.array(list(chain.from_iterable(rows))).reshape(-1, 2)
    _agreed_count(block, len(pairs), scale, numbers[-1])
    return Table(pairs[:, 0] * scale.factor, pairs[:, 1])


def _data_lines(block: Block, record: Record) -> tuple[list[int], list[str]]:
    """Return numbers and texts of the lines below the label that are not blank."""
    lines = record.text.split("\n")
    kept = [(record.line + i, line) for i, line in enumerate(lines) if i and line.strip()]
    if not kept:
        raise FileFormatError(
            block.path, f"no data under ##{record.written}=; expected lines of numbers.", line=record.line
        )
    foreign = next(((number, line) for number, line in kept if not line.isascii()), None)
    if foreign is not None:
        raise FileFormatError(block.path, f"found {foreign[1].strip()[:40]!r}; expected numbers.", line=foreign[0])
    return [number for number, _ in kept], [line for _, line in kept]


def _decode(block: Block, numbers: list[int], lines: list[str]) -> tuple[list[str], Ordinates]:
    """Return the abscissae as written and the ordinates."""
    abscissae, rests = [], []
    for number, line in zip(numbers, lines, strict=True):
        match = _ABSCISSA.match(line)
        if match is None:
            raise FileFormatError(
                block.path, f"found {line.strip()[:40]!r}; expected a line that starts with its abscissa.", line=number
            )
        abscissae.append(match[1])
        rests.append(line[match.end() :])
    together = "".join(rests)
    if "." in together or any(mark in together for mark in _EXPONENTS):
        return abscissae, _decode_plain(block, numbers, rests)
    try:
        return abscissae, decode_compressed(rests)
    except TokenError as problem:
        raise FileFormatError(
            block.path,
            f"found {problem}; expected ordinates in AFFN or ASDF form. Copy or export the file again.",
            line=numbers[problem.row],
        ) from problem


def _decode_plain(block: Block, numbers: list[int], lines: list[str]) -> Ordinates:
    """Decode ordinates that are decimal numbers."""
    rows = [_plain_values(block, number, line) for number, line in zip(numbers, lines, strict=True)]
    counts = np.array([len(row) for row in rows])
    if not counts.all():
        number = numbers[int((counts == 0).argmax())]
        raise FileFormatError(block.path, "found an abscissa without ordinates; expected at least one.", line=number)
    return Ordinates(np.array(list(chain.from_iterable(rows))), np.cumsum(counts) - counts)


def _plain_values(block: Block, number: int, line: str) -> list[float]:
    """Return the numbers of a line in AFFN or PAC form, NaN for "?"."""
    text = line.replace(",", " ").replace(";", " ")
    if not _NOT_PLAIN.search(text):  # float() would take 1_000, nan, inf
        try:
            return list(map(float, text.split()))
        except ValueError:
            pass  # blanks left out, or damage: looked at below
    words = _BLANK_LEFT_OUT.sub(" ", text).replace("?", " ? ").split()
    wrong = next((word for word in words if not _PLAIN_NUMBER.fullmatch(word)), None)
    if wrong is not None:
        raise FileFormatError(block.path, f"found {wrong[:40]!r}; expected numbers in AFFN or PAC form.", line=number)
    return [float("nan") if word == "?" else float(word) for word in words]


def _agreed_count(block: Block, found: int, scale: Scale, last_line: int) -> int:
    """Return the number of points; NPOINTS may be off by one in a file that has its END."""
    expected = scale.n_points
    if found < 2:
        raise FileFormatError(block.path, f"found {found} ordinate(s); expected at least 2.", line=last_line)
    if expected is None:
        block.deviates("##NPOINTS= is missing")
    elif found != expected:
        if abs(found - expected) > 1 or not block.ended or _step_speaks_against(found, scale):
            raise FileFormatError(
                block.path,
                f"found {found} ordinates; expected {expected} (##NPOINTS=). The file is cut or damaged.",
                line=last_line,
            )
        block.deviates(f"##NPOINTS= is {expected} where {found} ordinates are")
    if expected is None and not block.ended:
        raise FileFormatError(
            block.path,
            "neither ##NPOINTS= nor ##END=; expected one of them, to tell a whole file from a cut one.",
            line=last_line,
        )
    return found


def _step_speaks_against(found: int, scale: Scale) -> bool:
    """Tell whether DELTAX fits the stated number of points better than the number found."""
    if scale.step is None or scale.first is None or scale.last is None or scale.n_points is None or scale.n_points < 2:
        return False
    span, step = abs(scale.last - scale.first), abs(scale.step)
    return abs(span / (scale.n_points - 1) - step) < abs(span / (found - 1) - step)


def _axis(block: Block, record: Record, scale: Scale, abscissae: FloatArray, n_points: int) -> FloatArray:
    """Return the abscissa of every point: FIRSTX to LASTX at equal steps."""
    first, last = scale.first, scale.last
    if first is None:
        first = float(abscissae[0])
        block.deviates("##FIRSTX= is missing, the first abscissa is taken")
    if last is None:
        if scale.step is None:
            raise FileFormatError(
                block.path, "neither ##LASTX= nor ##DELTAX=; expected the end of the axis.", line=record.line
            )
        last = first + (n_points - 1) * scale.step
        block.deviates("##LASTX= is missing, FIRSTX and DELTAX are taken")
    elif scale.step is not None and (last - first) * scale.step < 0:
        block.deviates("##DELTAX= has the wrong sign")
    if first == last:
        raise FileFormatError(
            block.path, f"##FIRSTX= and ##LASTX= are both {first:g}; expected a range.", line=record.line
        )
    return np.linspace(first, last, n_points)


def _check_abscissae(
    block: Block,
    numbers: list[int],
    written: list[str],
    found: FloatArray,
    expected: FloatArray,
    factor: float,
    x: FloatArray,
) -> None:
    """Compare the abscissa of each line with that of its point, up to the rounding of what is written."""
    step = abs(float(x[1] - x[0]))
    digits = max(map(_decimals, written))
    rounding = abs(factor) * 0.5 * 10.0**-digits + 1e-9 * float(np.abs(x).max())
    off = np.abs(found - expected) - rounding
    worst = int(off.argmax())
    if off[worst] > _UNCERTAIN_STEP * step:
        first = int((off > _UNCERTAIN_STEP * step).argmax())
        raise FileFormatError(
            block.path,
            f"found the abscissa {found[first]:.10g}; expected {expected[first]:.10g} from FIRSTX, LASTX and the "
            "number of points. Ordinates are missing or damaged before this line, or the axis is not evenly spaced.",
            line=numbers[first],
        )
    if off[worst] > _WORTH_A_NOTE * step:
        block.deviates(f"abscissae drift by up to {off[worst] / step:.2f} point spacings")


def _decimals(number: str) -> int:
    """Return how many decimals a number is written with."""
    if "e" not in number and "E" not in number:
        return len(number) - 1 - number.find(".") if "." in number else 0
    mantissa, _, exponent = number.lower().partition("e")
    return _decimals(mantissa) - int(exponent)
