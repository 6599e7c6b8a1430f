"""Put spectra on an equally spaced axis."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.estimator.base import Step
from quant.spectra.resampling import apply_weights, interpolation_weights
from quant.spectra.segments import axis_values, median_step

MOST_POINTS = 1_000_000  # more than any spectrometer delivers: a slip in the unit of the spacing, not a wish
ON_GRID = 1e-9  # of the spacing: the last position may miss `stop` by this much


def equal_grid(
    axis: FloatArray, start: float | None = None, stop: float | None = None, spacing: float | None = None
) -> FloatArray:
    """Return equally spaced axis values from `start` towards `stop`.

    Parameters
    ----------
    axis : array of shape (points,)
        The axis that the defaults are taken from. [axis unit]
    start, stop : float, optional
        First value, and the bound of the last, included if the points hit it; by default the ends of `axis`.
        [axis unit]
    spacing : float, optional
        Distance of neighbours, above zero; by default the median step of `axis`. [axis unit]

    Returns
    -------
    array of shape (positions,)
        Rising if `stop` is above `start`, else falling. [axis unit]

    Raises
    ------
    ParameterError
        A spacing that is not above zero, or so small that more than a million points would result.
    """
    first, last = float(axis[0] if start is None else start), float(axis[-1] if stop is None else stop)
    if spacing is None:
        spacing = median_step(axis) or 1.0
    if not np.isfinite([first, last, spacing]).all() or spacing <= 0:
        raise ParameterError(
            f"resample: start = {first:g}, stop = {last:g}, spacing = {spacing:g}; expected finite numbers and a "
            "spacing above zero (a distance: whether values rise or fall follows from start and stop)."
        )
    count = abs(last - first) / spacing
    if count >= MOST_POINTS:
        raise ParameterError(
            f"resample: a spacing of {spacing:g} from {first:g} to {last:g} makes more than {MOST_POINTS} points; "
            "give a wider spacing in the unit of the axis."
        )
    direction = 1.0 if last >= first else -1.0
    return first + direction * spacing * np.arange(int(count + ON_GRID) + 1, dtype=np.float64)


class Resample(Step):
    """Interpolate spectra onto an equally spaced axis by local cubics.

    Parameters
    ----------
    start, stop : float, optional
        First value of the new axis, and the bound of its last, included if the points hit it; by default the ends of
        the axis. The output runs from start to stop, whichever way the input runs. [axis unit]
    spacing : float, optional
        Distance of neighbours; by default the median step of the axis. [axis unit]
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "resample"
    linear = True
    fitted = ("sources_", "weights_")

    def __init__(
        self,
        start: float | None = None,
        stop: float | None = None,
        spacing: float | None = None,
        axis: ArrayLike | None = None,
    ) -> None:
        self.start = start
        self.stop = stop
        self.spacing = spacing
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Work out which points make each new point, and with what weight."""
        axis = axis_values(self.axis, self.check_fit(X).shape[1])
        grid = equal_grid(axis, self.start, self.stop, self.spacing)
        self.sources_, self.weights_ = interpolation_weights(axis, grid)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return interpolated spectra, shape (n, points of the new axis)."""
        return apply_weights(self.check_new(X), self.sources_, self.weights_)

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Return the new axis, which has to lie on the old one. [axis unit]"""
        grid = equal_grid(axis, self.start, self.stop, self.spacing)
        interpolation_weights(axis, grid)
        return grid
