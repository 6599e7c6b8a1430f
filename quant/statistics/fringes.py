"""Path length of a cell, or thickness of a film, from its interference fringes."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import paired_vectors
from quant.errors import NotEnoughDataError, ParameterError
from quant.result import Result, documented
from quant.statistics.straight_line import fit_line
from quant.text_table import Row, format_rows

CM_TO_UM = 1e4
FEWEST_EXTREMES = 5


@dataclass(frozen=True, kw_only=True)
class FringeThickness(Result):
    """Path length from all maxima and minima of the fringes."""

    thickness: float = documented("Path length or thickness", "µm")
    standard_error: float = documented("Its standard error, from the scatter of the extremes", "µm")
    period: float = documented("Distance of neighbouring maxima", "cm⁻¹")
    extremes: tuple[float, ...] = documented("Positions of maxima and minima, rising", "cm⁻¹")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("thickness", self.thickness, "µm"),
            ("its standard error", self.standard_error, "µm"),
            ("period", self.period, "cm⁻¹"),
            ("maxima and minima", len(self.extremes), ""),
        ]

    def __str__(self) -> str:
        return f"Thickness from fringes\n{format_rows(self.rows())}"


def thickness_from_count(
    fringes: float, first: float, last: float, *, refractive_index: float = 1.0, incidence: float = 0.0
) -> float:
    """Path length b = N / [2·sqrt(n² − sin²θ)·|ν1 − ν2|] from counted fringes.

    Parameters
    ----------
    fringes : float
        N, complete fringes between the two wavenumbers.
    first, last : float
        ν1 and ν2. [cm⁻¹]
    refractive_index : float
        n of what lies between the windows: 1 for an empty cell.
    incidence : float
        θ, angle of incidence. [degree]

    Returns
    -------
    float
        [µm]

    Raises
    ------
    ParameterError
        No fringe, equal wavenumbers, an index below 1, or an angle outside 0 to 90 degrees.

    References
    ----------
    .. [1] Standard textbooks of infrared spectroscopy; ASTM E168 (from memory).
    """
    if not (math.isfinite(fringes) and fringes > 0):
        raise ParameterError(f"fringes = {fringes}; expected a number above zero.")
    width = abs(first - last)
    if not (math.isfinite(width) and width > 0):
        raise ParameterError(f"first = {first}, last = {last}; expected two different wavenumbers in cm⁻¹.")
    return CM_TO_UM * fringes / (2 * _optical_index(refractive_index, incidence) * width)


def thickness_from_spectrum(
    wavenumbers: ArrayLike, values: ArrayLike, *, refractive_index: float = 1.0, incidence: float = 0.0
) -> FringeThickness:
    """Path length from a stretch of spectrum that shows fringes and nothing else.

    Every maximum and minimum, placed by a parabola, is half a fringe from the next; the slope of a straight line of the
    positions against their number is half the period. Take absorbance or transmittance alike.

    Parameters
    ----------
    wavenumbers, values : array of shape (n,)
        In rising or falling order. [cm⁻¹], [ordinate]
    refractive_index, incidence
        As `thickness_from_count` takes them.

    Raises
    ------
    NotEnoughDataError
        Fewer than five extremes, or extremes so uneven that they are no fringes.
    ParameterError
        Axis values that neither rise nor fall, or numbers out of their bounds.
    SampleMismatchError
        Wavenumbers and values differ in number.
    """
    x, y = paired_vectors("wavenumbers", wavenumbers, "values", values, least=FEWEST_EXTREMES)
    if x[0] > x[-1]:
        x, y = x[::-1], y[::-1]
    if (np.diff(x) <= 0).any():
        raise ParameterError("wavenumbers must rise or fall throughout; sort the spectrum.")
    places = _extremes(x, y)
    if places.size < FEWEST_EXTREMES:
        raise NotEnoughDataError(
            f"{places.size} maxima and minima; at least {FEWEST_EXTREMES} are needed. Take a wider stretch."
        )
    steps = np.diff(places)
    if steps.max() > 2 * steps.min():
        raise NotEnoughDataError(
            f"Maxima and minima lie {steps.min():.4g} to {steps.max():.4g} cm⁻¹ apart: that is noise or bands, no even "
            "fringes. Take a stretch without bands, and smooth it if it is noisy."
        )
    line = fit_line(np.arange(places.size), places)
    index = _optical_index(refractive_index, incidence)
    thickness = CM_TO_UM / (4 * index * line.slope)  # the slope is half a period
    return FringeThickness(
        thickness=thickness,
        standard_error=thickness * line.slope_sd / line.slope,
        period=2 * line.slope,
        extremes=tuple(float(place) for place in places),
    )


def _optical_index(refractive_index: float, incidence: float) -> float:
    if not (math.isfinite(refractive_index) and refractive_index >= 1):
        raise ParameterError(f"refractive_index = {refractive_index}; expected 1 (empty cell) or more.")
    if not 0 <= incidence < 90:
        raise ParameterError(f"incidence = {incidence}; expected an angle from 0 to below 90 degrees.")
    return math.sqrt(refractive_index**2 - math.sin(math.radians(incidence)) ** 2)


def _extremes(x: FloatArray, y: FloatArray) -> FloatArray:
    """Return the positions of inner maxima and minima, by the parabola through the three points at each."""
    slope = np.diff(y)
    at = np.flatnonzero(slope[:-1] * slope[1:] < 0) + 1
    left, right = x[at - 1] - x[at], x[at + 1] - x[at]
    rise, fall = (y[at - 1] - y[at]) / left, (y[at + 1] - y[at]) / right
    bend = (fall - rise) / (right - left)
    return np.asarray(x[at] - (rise - bend * left) / (2 * bend))
