"""The abscissa of every point, and the check of it against the numbers that lines begin with."""

from collections.abc import Iterator

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.errors import FileFormatError
from quant.readers.jcamp_dx.count import Scale
from quant.readers.jcamp_dx.labels import Block

_UNCERTAIN = 0.5  # share of the point spacing by which an abscissa may be off
_WORTH_A_NOTE = 0.1
_ROUNDED_STEP = 0.01  # share by which DELTAX may be rounded


def axis_values(
    block: Block, scale: Scale, found: FloatArray, first: IntArray, rounding: float, n_points: int, lines: list[int]
) -> FloatArray:
    """Return the abscissa of every point: FIRSTX to LASTX at equal steps if the lines bear that out.

    Where they do not, what they do bear out is taken, and noted: FIRSTX and DELTAX; FIRSTX and LASTX exchanged; or, if
    every line holds one ordinate, the abscissae as written.

    Parameters
    ----------
    block : Block
    scale : Scale
    found : array of shape (n_lines,)
        Abscissae that lines begin with. [XUNITS]
    first : array of int, shape (n_lines,)
        The points they belong to.
    rounding : float
        Half a unit of their last decimal. [XUNITS]
    n_points : int
    lines : list of int
        Numbers of the lines: the label's, then those of the data.

    Raises
    ------
    FileFormatError
        The lines contradict the labels, or the labels leave the axis open.
    """
    tolerance = rounding + 1e-9 * float(np.abs(found).max())
    refusal: FileFormatError | None = None
    for x, how in _candidates(block, scale, found, first, n_points, lines[0]):
        step = abs(float(x[-1] - x[0])) / (n_points - 1)
        off = (np.abs(found - x[first]) - tolerance) / step
        worst = float(off.max())
        if worst <= _UNCERTAIN:
            if how:
                block.deviates(how)
            if worst > _WORTH_A_NOTE:
                block.deviates(f"abscissae drift by up to {worst:.2f} point spacings")
            _compare_step(block, scale, x, verified=int(first.max()) > 0)
            return x
        wrong = int((off > _UNCERTAIN).argmax())
        refusal = refusal or FileFormatError(
            block.path,
            f"found the abscissa {found[wrong]:.10g}; expected {x[first[wrong]]:.10g} from FIRSTX, LASTX and the "
            "number of points. Ordinates are missing or damaged before this line, or the axis is not evenly spaced.",
            line=lines[1 + wrong],
        )
    assert refusal is not None  # there is at least the first axis
    raise refusal


def _candidates(
    block: Block, scale: Scale, found: FloatArray, first: IntArray, n_points: int, line: int
) -> Iterator[tuple[FloatArray, str]]:
    """Yield axes that the labels may mean, the standard's first, and how each departs from what they say."""
    start, last, step = scale.first, scale.last, scale.step
    if start is None:
        start = float(found[0])
        block.deviates("##FIRSTX= is missing, the first abscissa is taken")
    if last is None:
        if step is None:
            raise FileFormatError(
                block.path, "neither ##LASTX= nor ##DELTAX=; expected the end of the axis.", line=line
            )
        last = start + (n_points - 1) * step
        block.deviates("##LASTX= is missing, FIRSTX and DELTAX are taken")
    if start == last:
        raise FileFormatError(block.path, f"##FIRSTX= and ##LASTX= are both {start:g}; expected a range.", line=line)
    yield np.linspace(start, last, n_points), ""
    if step and scale.last is not None:
        end = start + (n_points - 1) * step
        yield np.linspace(start, end, n_points), f"##LASTX= {last:g} does not fit, FIRSTX and DELTAX give {end:g}"
    yield np.linspace(last, start, n_points), "##FIRSTX= and ##LASTX= are exchanged"
    spacing = abs(last - start) / (n_points - 1)
    if first.size == n_points and max(abs(found[0] - start), abs(found[-1] - last)) <= _UNCERTAIN * spacing:
        yield found, "abscissae are not evenly spaced; each line has its own, which is taken"


def _compare_step(block: Block, scale: Scale, x: FloatArray, *, verified: bool) -> None:
    """Note a DELTAX that is not the step of the axis; refuse it where only the first abscissa bears the axis out."""
    if scale.step is None:
        return
    step = float(x[-1] - x[0]) / (x.size - 1)
    if scale.step * step < 0:
        block.deviates("##DELTAX= has the wrong sign")
    off = abs(abs(scale.step) - abs(step))
    if off > _ROUNDED_STEP * abs(step) and not verified:
        raise FileFormatError(
            block.path,
            f"##DELTAX= is {scale.step:g} where FIRSTX, LASTX and {x.size} points give {step:.6g}; expected them to "
            "agree, for no line but the first has an abscissa. Export it again.",
        )
    if off * (x.size - 1) > _UNCERTAIN * abs(step):
        block.deviates(f"##DELTAX= is {scale.step:g} where the step is {step:.6g}")
