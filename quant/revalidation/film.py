"""The wavenumber scale and the resolution, by the spectrum of a polystyrene film."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.chemistry.film_positions import FilmBand, FilmTable, film_positions
from quant.errors import AcquisitionMismatchError, AxisMismatchError, NotEnoughDataError, QuantityError
from quant.result import Result, documented
from quant.revalidation.film_axis import AxisError, axis_error
from quant.revalidation.film_resolution import ResolutionCheck, resolution_checks
from quant.revalidation.fourier import FourierSeries
from quant.revalidation.point_noise import noise_of
from quant.spectra.segments import equal_spacing
from quant.spectra.spectra_set import SpectraSet
from quant.text_table import format_columns
from quant.units import AXIS_UNITS, QUANTITIES, transmittance_from_absorbance

METHOD = (
    "Minimum of the transmittance between the points, from the Fourier series of the spectrum (its first derivative is "
    "zero there); a weak band is smoothed just enough to bring its standard error to 0.009 cm⁻¹"
)
SEARCH = 6.0  # cm⁻¹ on either side of where a band belongs
SMOOTHINGS = (
    0.0,
    2.0,
    3.0,
    4.0,
    5.0,
    6.0,
    8.0,
    10.0,
    12.0,
    14.0,
)  # cm⁻¹, width of the smoothing, see FourierSeries.response
SHARP_ENOUGH = 0.009  # cm⁻¹, standard error of a position
FEWEST_BANDS = 3
FOREIGN_SCATTER = 2.0  # cm⁻¹ about offset and stretch; bands of a film lie within a few tenths, whatever the axis does


@dataclass(frozen=True, kw_only=True, eq=False)
class BandPosition(Result):
    """Where one band of the film was found."""

    expected: float = documented("Position that it should have", "cm⁻¹")
    tolerance: float = documented("Largest permitted distance from it", "cm⁻¹")
    found: float = documented("Position found", "cm⁻¹")
    standard_error: float = documented("Standard error of the position, from the noise of the spectrum", "cm⁻¹")
    smoothing: float = documented("Width of the smoothing; 0 is none", "cm⁻¹")
    deviation: float = documented("Found minus expected", "cm⁻¹")
    passed: bool = documented("Whether the distance is within the tolerance")
    previous: float | None = documented("Position in the instrument's own last record", "cm⁻¹")
    change: float | None = documented("Found minus the last record", "cm⁻¹")


@dataclass(frozen=True, kw_only=True, eq=False)
class FilmEvidence(Result):
    """What the film says of the wavenumber scale and the resolution."""

    bands: tuple[BandPosition, ...] = documented("The bands, from high to low wavenumbers")
    not_covered: tuple[float, ...] = documented("Positions outside the measured axis", "cm⁻¹")
    edition: str = documented("Whose positions and tolerances")
    method: str = documented("How positions were found")
    passed: bool = documented("Whether every band is within its tolerance")
    axis_error: AxisError = documented("Offset and stretch of the axis against the positions expected")
    axis_change: AxisError | None = documented("Offset and stretch of the axis against the last record")
    resolution: tuple[ResolutionCheck, ...] = documented("Resolution checks on the film")
    words: tuple[str, ...] = documented("The findings in words")

    def __str__(self) -> str:
        """The findings, then a table of the bands."""
        header = ("band", "found", "s.e.", "deviation", "tolerance", "within", "change since last")
        rows = [
            (
                b.expected,
                f"{b.found:.3f}",
                b.standard_error,
                f"{b.deviation:+.3f}",
                b.tolerance,
                b.passed,
                _signed(b.change),
            )
            for b in self.bands
        ]
        return "\n".join([*self.words, format_columns(header, rows), f"Tolerances: {self.edition}."])


def film_evidence(
    film: SpectraSet, previous: SpectraSet | None = None, expected: FilmTable | None = None
) -> FilmEvidence:
    """Judge the wavenumber scale and the resolution by spectra of a polystyrene film.

    Parameters
    ----------
    film : SpectraSet
        Spectra of the film in transmission, in transmittance or absorbance, on an even axis in cm⁻¹; several are
        averaged.
    previous : SpectraSet, optional
        The same film in the instrument's own last record.
    expected : FilmTable, optional
        Positions and tolerances, as `film_positions` or `read_film_certificate` return them; by default those of the
        European Pharmacopoeia.

    Raises
    ------
    AcquisitionMismatchError
        The film was not measured in transmission.
    AxisMismatchError
        The axis is not one of wavenumbers in the mid-infrared, or uneven.
    QuantityError
        The ordinate is neither transmittance nor absorbance, or has missing points.
    NotEnoughDataError
        Fewer than three of the bands are on the axis.
    """
    table = expected or film_positions()
    bands = table.bands
    series, noise = _series(film)
    now = _positions(series, noise, bands)
    before = {} if previous is None else _positions(*_series(previous), bands)
    found = tuple(
        _judged(band, now[band.position], before.get(band.position)) for band in bands if band.position in now
    )
    against = axis_error(
        [b.expected for b in found],
        [b.deviation for b in found],
        [b.tolerance for b in found],
        "the positions expected",
    )
    both = [b for b in found if b.change is not None]
    change = None
    if len(both) >= FEWEST_BANDS:
        errors = [float(np.hypot(now[b.expected].error, before[b.expected].error)) for b in both]
        changes = [float(b.change) for b in both if b.change is not None]
        change = axis_error([b.expected for b in both], changes, errors, "the last record")
    resolution = resolution_checks(series)
    return FilmEvidence(
        bands=found,
        not_covered=tuple(band.position for band in bands if band.position not in now),
        edition=table.source,
        method=METHOD,
        passed=all(b.passed for b in found),
        axis_error=against,
        axis_change=change,
        resolution=resolution,
        words=(
            _verdict(found),
            *_foreign(found, against),
            *([change.words] if change else [against.words]),
            *(c.words for c in resolution),
        ),
    )


@dataclass(frozen=True)
class _Position:
    place: float
    error: float
    smoothing: float


def _series(film: SpectraSet) -> tuple[FourierSeries, float]:
    """Mean transmittance of the film as a series on a rising axis, and the noise of that mean."""
    _refuse_what_is_no_transmission(film)
    values = transmittance_from_absorbance(film.values) if film.quantity == "absorbance" else film.values
    if np.isnan(values).any():
        raise QuantityError("The film's spectrum has missing points; expected a number at every point. Measure again.")
    axis = film.axis.values
    try:
        equal_spacing(axis)
    except ValueError as reason:
        raise AxisMismatchError(f"The film's axis cannot be used: {reason}") from reason
    mean = values.mean(axis=0)
    if axis[0] > axis[-1]:
        axis, mean = axis[::-1], mean[::-1]
    return FourierSeries.of(axis, mean), float(noise_of(mean[None], axis)[0])


def _refuse_what_is_no_transmission(film: SpectraSet) -> None:
    """Refuse ATR, reflectance and near-infrared axes, with the reason."""
    techniques = {row.get("technique", "") for row in film.notes}
    other = sorted(t for t in techniques if t and "transmi" not in t.lower())
    if other:
        raise AcquisitionMismatchError(
            f"The film was measured by {', '.join(other)}; expected transmission. By ATR the refractive index distorts "
            "strong bands and moves them by several cm⁻¹, so that the pharmacopoeial positions do not hold. Measure "
            "the film in the sample beam."
        )
    if film.quantity not in ("transmittance", "absorbance"):
        raise QuantityError(
            f"The film's ordinate is {QUANTITIES[film.quantity]}; expected transmittance or absorbance. Export it so."
        )
    axis = film.axis
    if axis.unit != "cm-1" or axis.values.min() > film_positions().bands[0].position:
        raise AxisMismatchError(
            f"The film lies on {axis}; expected an axis in cm⁻¹ over the mid-infrared (3100 to 1000). The positions "
            f"are those of fundamental bands; a near-infrared axis (in {AXIS_UNITS['nm']}, or above 4000 cm⁻¹) shows "
            "overtones only, for which the pharmacopoeia gives no positions here. Use a near-infrared standard there."
        )


def _positions(series: FourierSeries, noise: float, bands: Sequence[FilmBand]) -> dict[float, _Position]:
    low, high = series.start, series.start + series.step * (series.cosines.size - 1)
    covered = [b for b in bands if low + 2 * SEARCH <= b.position <= high - 2 * SEARCH]
    if len(covered) < FEWEST_BANDS:
        raise NotEnoughDataError(
            f"{len(covered)} of the film's {len(bands)} bands lie on the axis ({low:g} to {high:g} cm⁻¹); expected "
            f"{FEWEST_BANDS} or more. Measure from 3100 to 1000 cm⁻¹."
        )
    found = {band.position: _position(series, noise, band.position) for band in covered}
    return {place: position for place, position in found.items() if position is not None}


def _position(series: FourierSeries, noise: float, expected: float) -> _Position | None:
    """Minimum next to where a band belongs, with the least smoothing that suffices; None if there is no minimum."""
    best = None
    for smoothing in SMOOTHINGS:
        place = _minimum(series, expected, smoothing)
        if place is None:
            continue
        bend = float(series.at(place, 2, smoothing)[0])
        best = _Position(place, series.derivative_noise(noise, smoothing) / max(bend, 1e-12), smoothing)
        if best.error <= SHARP_ENOUGH:
            break
    return best


def _minimum(series: FourierSeries, expected: float, smoothing: float) -> float | None:
    """Lowest minimum within the search window: zero of the first derivative, by bisection, then Newton's method."""
    grid: FloatArray = expected + np.arange(-SEARCH, SEARCH + 0.5)
    slope = series.at(grid, 1, smoothing)
    left = np.flatnonzero((slope[:-1] < 0) & (slope[1:] >= 0))
    if not left.size:
        return None
    start = int(left[np.argmin(series.at(grid[left] + 0.5, 0, smoothing))])
    low, high = float(grid[start]), float(grid[start + 1])
    for _ in range(3):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if float(series.at(middle, 1, smoothing)[0]) < 0 else (low, middle)
    place = 0.5 * (low + high)
    for _ in range(3):
        bend = float(series.at(place, 2, smoothing)[0])
        step = float(series.at(place, 1, smoothing)[0]) / bend if bend > 0 else 0.0
        place = min(max(place - step, low), high)
    return place


def _judged(band: FilmBand, now: _Position, before: _Position | None) -> BandPosition:
    deviation = now.place - band.position
    return BandPosition(
        expected=band.position,
        tolerance=band.tolerance,
        found=now.place,
        standard_error=now.error,
        smoothing=now.smoothing,
        deviation=deviation,
        passed=abs(deviation) <= band.tolerance,
        previous=None if before is None else before.place,
        change=None if before is None else now.place - before.place,
    )


def _verdict(found: Sequence[BandPosition]) -> str:
    outside = [b for b in found if not b.passed]
    if not outside:
        worst = max(found, key=lambda b: abs(b.deviation) / b.tolerance)
        return (
            f"All {len(found)} bands of the film are within tolerance; the largest deviation for its tolerance is "
            f"{worst.deviation:+.2f} cm⁻¹ at {worst.expected:g} (±{worst.tolerance:g})"
        )
    named = ", ".join(f"{b.expected:g} ({b.deviation:+.2f}, permitted ±{b.tolerance:g})" for b in outside)
    return f"{len(outside)} of {len(found)} bands of the film are out of tolerance: {named}"


def _foreign(found: Sequence[BandPosition], axis: AxisError) -> tuple[str, ...]:
    """Doubt that it is the film at all where no error of an axis puts the bands there."""
    if len(found) <= FEWEST_BANDS:
        return ()
    rest = [b.deviation - axis.at(b.expected) for b in found]
    scatter = float(np.sqrt(np.sum(np.square(rest)) / (len(found) - 2)))
    if scatter <= FOREIGN_SCATTER:
        return ()
    return (
        f"The minima next to these positions scatter by {scatter:.1f} cm⁻¹ about any offset and stretch: this spectrum "
        "is hardly that of a polystyrene film in transmission; check which file was given, before the instrument",
    )


def _signed(value: float | None) -> str:
    return "–" if value is None else f"{value:+.3f}"
