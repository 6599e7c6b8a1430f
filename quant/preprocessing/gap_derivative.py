"""Gap-segment derivatives."""

from operator import index
from typing import ClassVar, Literal, Self

import numpy as np
from numpy.lib.stride_tricks import sliding_window_view
from numpy.typing import ArrayLike

from quant.arrays import FloatArray, IntArray
from quant.checks import as_matrix, name_some
from quant.errors import ParameterError
from quant.estimator.base import Step
from quant.spectra.segments import axis_values, describe_segment, equal_spacing, segments


def gap_derivative(
    spectra: ArrayLike, gap: int = 5, segment: int = 5, derivative: int = 1, axis: ArrayLike | None = None
) -> FloatArray:
    """Return differences of means over short segments of points, per axis unit.

    With mᵢ the mean over the segment around point i and h the distance of neighbouring points, the first derivative is
    (mᵢ₊gap − mᵢ₋gap)/(2·gap·h), the second (mᵢ₋gap − 2·mᵢ + mᵢ₊gap)/(gap·h)².

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    gap : int
        Points from the middle to the middle of either outer segment, from 1.
    segment : int
        Odd number of points that are averaged; 1 takes points as they are.
    derivative : int
        1 or 2.
    axis : array of shape (points,), optional
        Equally spaced within each contiguous range; None numbers the points 0, 1, 2, ... [axis unit]

    Returns
    -------
    array of shape (spectra, points kept)
        The points at which everything averaged lies in the same contiguous range: the first and last
        gap + (segment − 1)/2 points of each range are left out. [unit of `spectra` / axis unit^derivative]

    Raises
    ------
    ParameterError
        A number out of its range, an axis that is not equally spaced, or a range too short.

    References
    ----------
    .. [1] K. H. Norris, P. C. Williams, Cereal Chemistry 61 (1984) 158-165; from memory. There, gaps are counted in
       other ways; results are not divided by the distance.
    """
    X = as_matrix("spectra", spectra)
    x = axis_values(axis, X.shape[1])
    runs = _runs(x, gap, segment, derivative)
    distance = gap * equal_spacing(x)
    parts = []
    for run in runs:
        means = sliding_window_view(X[:, run], segment, axis=1).mean(axis=-1)
        before, at, after = means[:, : -2 * gap], means[:, gap:-gap], means[:, 2 * gap :]
        parts.append(
            (after - before) / (2.0 * distance) if derivative == 1 else (before - 2.0 * at + after) / distance**2
        )
    return np.hstack(parts)


def _runs(axis: FloatArray, gap: int, segment: int, derivative: int) -> list[slice]:
    """Return the contiguous ranges, each known to be long enough."""
    try:
        index(gap), index(segment)
    except TypeError as problem:
        raise ParameterError(f"gap = {gap!r}, segment = {segment!r}; expected whole numbers.") from problem
    if gap < 1:
        raise ParameterError(f"gap = {gap}; expected at least 1 point from the middle to either side.")
    if segment < 1 or segment % 2 == 0:
        raise ParameterError(
            f"segment = {segment}; expected an odd number of points, so that one is in the middle. "
            f"Use {max(segment - 1, 1)} or {max(segment + 1, 3)}."
        )
    if derivative not in (1, 2):
        raise ParameterError(f"derivative = {derivative!r}; expected 1 or 2. Take savitzky_golay for others.")
    runs, least = segments(axis), 2 * gap + segment
    short = [run for run in runs if run.stop - run.start < least]
    if short:
        raise ParameterError(
            f"gap_derivative: gap = {gap} and segment = {segment} reach over {least} points, more than in the range(s) "
            f"{name_some(describe_segment(axis, run) for run in short)}; expected ranges of at least {least} points. "
            "Make gap or segment smaller, or keep wider ranges."
        )
    equal_spacing(axis)
    return runs


def _kept(runs: list[slice], reach: int) -> IntArray:
    return np.concatenate([np.arange(run.start + reach, run.stop - reach) for run in runs])


class GapDerivative(Step):
    """Take the first or second derivative per axis unit as differences of means over short segments (Norris).

    Within each contiguous range; its first and last gap + (segment − 1)/2 points are left out.

    Parameters
    ----------
    gap : int
        Points from the middle to the middle of either outer segment, from 1.
    segment : int
        Odd number of points that are averaged; 1 takes points as they are.
    derivative : int
        1 or 2.
    axis : array of shape (points,), optional
        Axis values of the input, equally spaced within each contiguous range; None numbers the points 0, 1, 2, ...
        A falling axis gives the same derivative as a rising one. [axis unit]
    """

    name: ClassVar[str] = "gap_derivative"
    linear = True

    def __init__(
        self, gap: int = 5, segment: int = 5, derivative: Literal[1, 2] = 1, axis: ArrayLike | None = None
    ) -> None:
        self.gap = gap
        self.segment = segment
        self.derivative = derivative
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Check that the axis suits gap and segment; nothing is learnt."""
        self.axis_after(axis_values(self.axis, self.check_fit(X).shape[1]))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return derivatives, shape (n, points kept)."""
        return gap_derivative(self.check_new(X), self.gap, self.segment, self.derivative, self.axis)

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Axis values of the points that are kept. [axis unit]"""
        runs = _runs(axis, self.gap, self.segment, self.derivative)
        return axis[_kept(runs, self.gap + self.segment // 2)]
