"""Division of each spectrum by its own size: length, area, or the signal of a band."""

from typing import Any, ClassVar, Literal, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import NotEnoughDataError, QuantityError
from quant.estimator.base import Step
from quant.spectra.bands import BandSet, BandSpec, place_bands, refuse_gaps
from quant.spectra.segments import axis_values, segments

LEAST_SIGNAL = 1e-9  # of the spectrum times the band's width: less is rounding error, and no spectrum's size


def unit_length(spectra: ArrayLike) -> FloatArray:
    """Divide each spectrum by its length, √Σ xᵢ².

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]

    Returns
    -------
    array of shape (spectra, points)
        [1]

    Raises
    ------
    QuantityError
        A spectrum of zeros.
    """
    X = as_matrix("spectra", spectra)
    length = np.linalg.norm(X, axis=1)
    _refuse(length <= 0, "length (they are zero throughout)", "expected spectra with a signal")
    return np.asarray(X / length[:, np.newaxis], dtype=np.float64)


def unit_area(spectra: ArrayLike, axis: ArrayLike | None = None) -> FloatArray:
    """Divide each spectrum by its area, ∫|x| over the axis.

    Trapezia within each contiguous segment, nothing across a cut. The modulus makes the area of a derivative, which has
    lobes of either sign, a size.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    axis : array of shape (points,), optional
        Strictly rising or falling; None numbers the points 0, 1, 2, ... [axis unit]

    Returns
    -------
    array of shape (spectra, points)
        [1/axis unit]

    Raises
    ------
    NotEnoughDataError
        No two neighbouring points.
    QuantityError
        A spectrum of zeros.
    """
    X = as_matrix("spectra", spectra)
    area = np.abs(X) @ _widths(axis_values(axis, X.shape[1]))
    _refuse(area <= 0, "area (they are zero throughout)", "expected spectra with a signal")
    return np.asarray(X / area[:, np.newaxis], dtype=np.float64)


def _widths(axis: FloatArray) -> FloatArray:
    """Return how much of the axis each point stands for in the trapezium rule, shape (points,). [axis unit]"""
    width = np.zeros(axis.size)
    for run in segments(axis):
        half = np.abs(np.diff(axis[run])) / 2
        width[run.start : run.stop - 1] += half
        width[run.start + 1 : run.stop] += half
    if not width.any():
        raise NotEnoughDataError(
            f"An area needs at least two neighbouring points; found n_features = {axis.size}. Keep wider ranges."
        )
    return width


def normalise_band(spectra: ArrayLike, band: BandSpec | None = None, axis: ArrayLike | None = None) -> FloatArray:
    """Divide each spectrum by the signal of a band.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    band : dict, optional
        See `quant.spectra.bands.place_bands`; by default the area of the whole axis.
    axis : array of shape (points,), optional
        Strictly rising or falling; None numbers the points 0, 1, 2, ... [axis unit]

    Returns
    -------
    array of shape (spectra, points)
        [1 for heights, 1/axis unit for areas]

    Raises
    ------
    AxisMismatchError, ParameterError
        The band or the axis does not fit, or the band meets a gap of the axis.
    QuantityError
        Spectra in which the band shows no signal above zero.
    """
    X = as_matrix("spectra", spectra)
    return _divide(X, _place(band, axis, X.shape[1]))


def _place(band: BandSpec | None, axis: ArrayLike | None, points: int) -> BandSet:
    x = axis_values(axis, points)
    placed = place_bands(None if band is None else [band], None, x, points)
    refuse_gaps("normalise_band", placed)
    return placed


def _divide(X: FloatArray, placed: BandSet) -> FloatArray:
    band = placed.bands[0]
    signal = placed.signals(X)
    width = float(band.x[-1] - band.x[0]) if band.signal == "area" else 1.0
    _refuse(
        signal <= LEAST_SIGNAL * width * np.abs(X).max(axis=1),
        f"signal above zero in the band ({band.where})",
        "nothing can be divided by it",
    )
    return np.asarray(X / signal[:, np.newaxis], dtype=np.float64)


def _refuse(bad: ArrayLike, what: str, expected: str) -> None:
    rows = np.flatnonzero(bad)
    if rows.size:
        raise QuantityError(
            f"{rows.size} spectra have no {what}, in row(s) {name_some(rows)} (counted from 0); {expected}. Leave them "
            "out, measure them again, or normalise in another way."
        )


class UnitLength(Step):
    """Divide each spectrum by its length, the root of the sum of squares."""

    name: ClassVar[str] = "unit_length"

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra of length 1, shape (n, points)."""
        return unit_length(self.check_new(X))


class UnitArea(Step):
    """Divide each spectrum by its area, the modulus summed by trapezia within each contiguous segment.

    Parameters
    ----------
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "unit_area"

    def __init__(self, axis: ArrayLike | None = None) -> None:
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Check the axis; nothing is learnt."""
        _widths(axis_values(self.axis, self.check_fit(X).shape[1]))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra of area 1, shape (n, points)."""
        return unit_area(self.check_new(X), self.axis)


class NormaliseBand(Step):
    """Divide each spectrum by the signal of a band (internal standard, path length).

    Parameters
    ----------
    signal : {"area", "height", "height_at"}
        Area, greatest height, or height at a position.
    range : pair, optional
        From, to, for area and height; by default the whole axis. [axis unit]
    position : float, optional
        Where, for height_at. [axis unit]
    baseline : pair, optional
        Two positions that carry a straight baseline under the band; none: no baseline. [axis unit]
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "normalise_band"

    def __init__(
        self,
        signal: Literal["area", "height", "height_at"] = "area",
        range: tuple[float, float] | None = None,  # noqa: A002 (the word for it wherever a recipe speaks of bands)
        position: float | None = None,
        baseline: tuple[float, float] | None = None,
        axis: ArrayLike | None = None,
    ) -> None:
        self.signal = signal
        self.range = range
        self.position = position
        self.baseline = baseline
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Check that the axis holds the band; nothing is learnt."""
        points = self.check_fit(X).shape[1]
        _place(self._band(axis_values(self.axis, points)), self.axis, points)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra in which the band has the signal 1, shape (n, points)."""
        matrix = self.check_new(X)
        return normalise_band(matrix, self._band(axis_values(self.axis, matrix.shape[1])), self.axis)

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Return the axis unchanged, once it is known to hold the band. [axis unit]"""
        _place(self._band(axis), axis, axis.size)
        return axis

    def _band(self, axis: FloatArray) -> dict[str, Any]:
        given = {"range": self.range, "position": self.position, "baseline": self.baseline}
        band = {"signal": self.signal, **{key: value for key, value in given.items() if value is not None}}
        return (
            band
            if self.position is not None or self.range is not None or self.signal == "height_at"
            else {**band, "range": (axis[0], axis[-1])}
        )
