"""Keep ranges of the axis, or leave them out; missing points (NaN) may come in, and go out where they are kept."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray
from quant.checks import name_some
from quant.errors import ParameterError
from quant.estimator.base import Step
from quant.spectra.segments import axis_values, describe_segment


def inside_ranges(axis: FloatArray, ranges: list[tuple[float, float]]) -> BoolArray:
    """Tell which points lie in any of the ranges, ends included.

    Parameters
    ----------
    axis : array of shape (points,)
        Strictly rising or falling. [axis unit]
    ranges : list of pairs
        Two ends each, in either order. [axis unit]

    Returns
    -------
    bool array of shape (points,)

    Raises
    ------
    ParameterError
        A range that is not a pair of finite numbers, or that holds no point.
    """
    inside = np.zeros(axis.size, dtype=np.bool_)
    empty = []
    for pair in ranges:
        ends = np.asarray(pair, dtype=np.float64)
        if ends.shape != (2,) or not np.isfinite(ends).all():
            raise ParameterError(
                f"ranges holds {pair!r}; expected the two ends of a range, finite axis values. Write each range as a "
                "pair, as in [[1800, 1700], [1500, 1450]]."
            )
        held = (axis >= ends.min()) & (axis <= ends.max())
        if not held.any():
            empty.append(f"[{ends[0]:g}, {ends[1]:g}]")
        inside |= held
    if empty:
        raise ParameterError(
            f"Range(s) without a single point: {name_some(empty)}; the axis covers "
            f"{describe_segment(axis, slice(0, axis.size))}. Change or remove the range, and check its unit."
        )
    return inside


class _Ranges(Step):
    """What keeping and leaving out have in common."""

    fitted = ("kept_",)
    linear = True
    required = ("ranges",)
    allow_nan = True
    leave_out: ClassVar[bool]

    def __init__(self, ranges: list[tuple[float, float]] | None = None, axis: ArrayLike | None = None) -> None:
        self.ranges = ranges
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Find the points that stay."""
        points = self.check_fit(X).shape[1]
        self.kept_ = np.flatnonzero(self._kept(axis_values(self.axis, points)))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return the points that stay, shape (n, points kept)."""
        return self.check_new(X)[:, self.kept_]

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Axis values of the points that stay. [axis unit]"""
        return axis[self._kept(axis)]

    def _kept(self, axis: FloatArray) -> BoolArray:
        if self.ranges is None:
            return np.ones(axis.size, dtype=np.bool_)
        kept = inside_ranges(axis, self.ranges) ^ self.leave_out
        if not kept.any():
            raise ParameterError(
                f"{self.name}: no point of the axis, {describe_segment(axis, slice(0, axis.size))}, is kept by "
                f"ranges = {[list(pair) for pair in self.ranges]}. At least one has to stay: change the ranges."
            )
        return kept


class KeepRanges(_Ranges):
    """Keep the points inside any of the ranges.

    Parameters
    ----------
    ranges : list of pairs, optional
        Ends in either order, both included; None keeps everything. [axis unit]
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "keep_ranges"
    leave_out = False


class LeaveOutRanges(_Ranges):
    """Leave out the points inside any of the ranges.

    Parameters
    ----------
    ranges : list of pairs, optional
        Ends in either order, both left out; None keeps everything. [axis unit]
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "leave_out_ranges"
    leave_out = True
