"""Division of each spectrum by its own size: length, area, or the signal of a band."""

from typing import Any, ClassVar, Literal, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.estimator import Step
from quant.preprocessing.rounding import vanishes
from quant.spectra.bands import BandSet, BandSpec, place_bands
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
        The band or the axis does not fit.
    NotEnoughDataError
        An area of fewer than two points.
    QuantityError
        Spectra in which the band shows no signal above zero.
    """
    X = as_matrix("spectra", spectra)
    return _divide(X, _place(band, axis, X.shape[1]))


def _place(band: BandSpec | None, axis: ArrayLike | None, points: int) -> BandSet:
    x = axis_values(axis, points)
    if band is None and points < 2:
        raise NotEnoughDataError(
            f"The area of a band needs at least two points; found n_features = {points}. Keep wider ranges, or take "
            "the signal height_at."
        )
    placed = place_bands(None if band is None else [band], None, x, points)
    where = placed.bands[0].x
    if len(inside := segments(x[(x >= where.min()) & (x <= where.max())])) > 1 or _cut_between(x, where):
        raise ParameterError(
            f"normalise_band: the band ({placed.bands[0].where}) reaches over {len(inside)} contiguous ranges of the "
            "axis; expected one without a gap. Move the band, or cut the ranges after this step."
        )
    return placed


def _cut_between(axis: FloatArray, where: FloatArray) -> bool:
    """Tell whether points have been left out inside a band, judged by the steps of the whole axis."""
    low, high = where.min(), where.max()
    return sum(bool((axis[run].max() > low) and (axis[run].min() < high)) for run in segments(axis)) > 1


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
