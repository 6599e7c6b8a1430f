"""A straight baseline through two positions."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix
from quant.errors import NotEnoughDataError, ParameterError
from quant.estimator.base import Step
from quant.spectra.resampling import apply_weights, interpolation_weights
from quant.spectra.segments import axis_values


def straight_baseline(
    spectra: ArrayLike, axis: ArrayLike | None = None, first: float | None = None, second: float | None = None
) -> FloatArray:
    """Subtract from each spectrum the line through its values at two positions.

    Between points the spectrum is taken as straight.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    axis : array of shape (points,), optional
        Strictly rising or falling; None numbers the points 0, 1, 2, ... [axis unit]
    first, second : float, optional
        The two positions; by default the first and the last point. [axis unit]

    Returns
    -------
    array of shape (spectra, points)
        Zero at both positions. [unit of `spectra`]

    Raises
    ------
    NotEnoughDataError
        Fewer than two points.
    ParameterError
        A position outside the axis or in a gap, or both positions alike.

    References
    ----------
    .. [1] Two-point (tangent) baseline, textbooks of quantitative infrared analysis; from memory.
    """
    X = as_matrix("spectra", spectra)
    x = axis_values(axis, X.shape[1])
    anchors = _anchors(x, first, second)
    at_first, at_second = apply_weights(X, *interpolation_weights(x, anchors, points=2)).T
    along = (x - anchors[0]) / (anchors[1] - anchors[0])
    result: FloatArray = X - at_first[:, np.newaxis] - np.outer(at_second - at_first, along)
    return result


def _anchors(axis: FloatArray, first: float | None, second: float | None) -> FloatArray:
    """Return the two positions, shape (2,), checked. [axis unit]"""
    if axis.size < 2:
        raise NotEnoughDataError(f"A straight baseline needs at least two points; found n_features = {axis.size}.")
    anchors = np.array([axis[0] if first is None else first, axis[-1] if second is None else second])
    if anchors[0] == anchors[1]:
        raise ParameterError(
            f"The two positions of the baseline are both {anchors[0]:g}; a line needs two different ones: change one."
        )
    interpolation_weights(axis, anchors, points=2)
    return anchors


class StraightBaseline(Step):
    """Subtract the line through each spectrum at two positions.

    Parameters
    ----------
    first, second : float, optional
        The two positions; by default the first and the last point. [axis unit]
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "straight_baseline"
    linear = True

    def __init__(self, first: float | None = None, second: float | None = None, axis: ArrayLike | None = None) -> None:
        self.first = first
        self.second = second
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Check that the axis holds both positions."""
        _anchors(axis_values(self.axis, self.check_fit(X).shape[1]), self.first, self.second)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra without their baseline, shape (n, points)."""
        return straight_baseline(self.check_new(X), self.axis, self.first, self.second)

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Return the axis unchanged, once it is known to hold both positions. [axis unit]"""
        _anchors(axis, self.first, self.second)
        return axis
