"""The signal of a band: area, height, or height at one position, above a straight baseline."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector, name_some, one_of
from quant.errors import AxisMismatchError, ParameterError, QuantityError
from quant.spectra.segments import describe_segment, segments

BandSpec: TypeAlias = Mapping[str, Any]

SIGNALS = ("area", "height", "height_at")
SAME_PLACE = 1e-6  # of the smallest step: axis values computed as first + i·step miss the round number by rounding
TINY = 1e-9  # of the spectrum: an internal standard's signal below this is rounding error


@dataclass(frozen=True)
class Band:
    """One band placed on a rising axis."""

    signal: str
    where: str  # how messages call it
    x: FloatArray  # (points,), axis values at which the profile is taken
    points: slice | None  # these points of the axis; None: interpolate
    baseline: tuple[float, float] | None


@dataclass(frozen=True)
class BandSet:
    """Bands whose signals are summed, perhaps divided by the signal of a reference band, on one axis.

    Attributes
    ----------
    axis : array of shape (k,)
        Axis values, rising.
    falling : bool
        Whether the spectra come with falling axis values.
    """

    axis: FloatArray
    falling: bool
    bands: tuple[Band, ...]
    reference: Band | None

    def signals(self, X: FloatArray) -> FloatArray:
        """Signal of each spectrum, X of shape (n, k), result of shape (n,). [unit of X (× axis unit for areas)]

        Raises
        ------
        QuantityError
            The reference band shows no signal above zero in some rows.
        """
        rising = self._rising(X)
        total: FloatArray = np.sum([_signal(band, self._profile(band, rising)) for band in self.bands], axis=0)
        return total if self.reference is None else total / self._reference_signals(self.reference, rising)

    def profiles(self, X: FloatArray) -> FloatArray:
        """Baseline-corrected values of all bands side by side, the reference band last, shape (n, points)."""
        rising = self._rising(X)
        bands = self.bands if self.reference is None else (*self.bands, self.reference)
        return np.hstack([self._profile(band, rising) for band in bands])

    def _rising(self, X: FloatArray) -> FloatArray:
        return X[:, ::-1] if self.falling else X

    def _profile(self, band: Band, X: FloatArray) -> FloatArray:
        values = _interpolate(self.axis, X, band.x) if band.points is None else X[:, band.points]
        if band.baseline is None:
            return values
        first, last = band.baseline
        ends = _interpolate(self.axis, X, np.array([first, last]))
        # Tangent baseline: A1 + (A2 − A1)·(x − x1)/(x2 − x1).
        base: FloatArray = ends[:, :1] + (ends[:, 1:] - ends[:, :1]) * ((band.x - first) / (last - first))
        return values - base

    def _reference_signals(self, band: Band, X: FloatArray) -> FloatArray:
        signal = _signal(band, self._profile(band, X))
        width = float(band.x[-1] - band.x[0]) if band.signal == "area" else 1.0
        bad = np.flatnonzero(signal <= TINY * width * np.abs(X).max(axis=1))
        if bad.size:
            raise QuantityError(
                f"The reference band ({band.where}) has no signal above zero in row(s) {name_some(bad)}, counted "
                "from 0; nothing can be divided by it. Leave these spectra out, or choose another reference band."
            )
        return signal


def place_bands(
    bands: Sequence[BandSpec] | None, reference_band: BandSpec | None, axis: ArrayLike | None, n_points: int
) -> BandSet:
    """Check bands and place them on the axis.

    Parameters
    ----------
    bands : sequence of dict, optional
        Each with "signal": "area" or "height" and "range": [lo, hi], or "height_at" and "position": p; perhaps with
        "baseline": [p1, p2]. None: the area of the whole axis. [axis unit]
    reference_band : dict, optional
        The band to divide by.
    axis : array of shape (n_points,), optional
        Axis values, rising or falling; None: points are numbered 0, 1, 2 ... [axis unit]
    n_points : int
        Points of a spectrum.

    Returns
    -------
    BandSet
        Ready to take signals.

    Raises
    ------
    AxisMismatchError
        The axis has another length than the spectra.
    ParameterError
        The axis does not rise or fall throughout, or a band is not as described or does not lie on it.
    """
    x = np.arange(float(n_points)) if axis is None else as_vector("axis", axis)
    if x.size != n_points:
        raise AxisMismatchError(
            f"axis has {x.size} values, the spectra have {n_points} points; give the axis of these spectra."
        )
    falling = bool(x[0] > x[-1])
    rising = x[::-1] if falling else x
    if (np.diff(rising) <= 0).any():
        raise ParameterError("axis must rise or fall throughout, without repeated values; sort the spectra by it.")
    if bands is None:
        bands = [{"signal": "area", "range": [rising[0], rising[-1]]}]
    if isinstance(bands, Mapping) or not len(bands):
        raise ParameterError(f"bands = {bands!r}; expected a list of one band or more, each a dict.")
    return BandSet(
        axis=rising,
        falling=falling,
        bands=tuple(_place(f"band {number}", band, rising) for number, band in enumerate(bands, start=1)),
        reference=None if reference_band is None else _place("reference_band", reference_band, rising),
    )


def refuse_gaps(who: str, placed: BandSet) -> None:
    """Refuse bands that meet a gap of the axis, where nothing was measured or it was cut out.

    Parameters
    ----------
    who : str
        The step or method, for the message.
    placed : BandSet

    Raises
    ------
    ParameterError
        A band that does not lie in one contiguous range, or an end of a baseline in a gap.
    """
    slack = _slack(placed.axis)
    axis = placed.axis[::-1] if placed.falling else placed.axis
    runs = segments(axis)

    def held(first: float, last: float) -> bool:
        return any(axis[run].min() - slack <= first and last <= axis[run].max() + slack for run in runs)

    for band in placed.bands if placed.reference is None else (*placed.bands, placed.reference):
        places = [("band", float(band.x[0]), float(band.x[-1]))]
        places += [("baseline of the band", end, end) for end in band.baseline or ()]
        for what, first, last in places:
            if not held(first, last):
                raise ParameterError(
                    f"{who}: the {what} ({band.where}) meets a gap of the axis, whose contiguous ranges are "
                    f"{name_some(describe_segment(axis, run) for run in runs)}; expected a band inside one of them. "
                    "Move the band, or keep more of the spectrum."
                )


def _place(name: str, band: BandSpec, axis: FloatArray) -> Band:
    if not isinstance(band, Mapping) or "signal" not in band:
        raise ParameterError(f'{name} = {band!r}; expected a dict such as {{"signal": "area", "range": [1680, 1800]}}.')
    signal = one_of(f"signal of {name}", band["signal"], SIGNALS)
    place = "position" if signal == "height_at" else "range"
    _check_keys(name, band, signal, place)
    baseline = _read_baseline(name, band["baseline"], axis) if band.get("baseline") is not None else None
    if signal == "height_at":
        position = _on_axis(f"position of {name}", band["position"], axis, count=1)
        return Band(signal, f"height at {position[0]:g}", position, None, baseline)
    low, high = np.sort(_on_axis(f"range of {name}", band["range"], axis, count=2))
    slack = _slack(axis)
    start, stop = np.searchsorted(axis, low - slack), np.searchsorted(axis, high + slack, side="right")
    if stop - start < 2:
        raise ParameterError(
            f"range of {name} = [{low:g}, {high:g}] holds {stop - start} point(s) of the axis "
            f"(n_features={axis.size}); at least 2 are needed. Widen it, or use the signal 'height_at'."
        )
    return Band(signal, f"{signal} from {low:g} to {high:g}", axis[start:stop], slice(int(start), int(stop)), baseline)


def _check_keys(name: str, band: BandSpec, signal: str, place: str) -> None:
    allowed = ("signal", place, "baseline")
    for key in band:
        if key not in allowed:
            guess = get_close_matches(str(key), allowed, n=1)
            hint = f" Did you mean {guess[0]!r}?" if guess else ""
            raise ParameterError(
                f"{name} has an unknown key {key!r}; a band of signal {signal!r} has "
                f"{', '.join(map(repr, allowed))}.{hint}"
            )
    if place not in band:
        raise ParameterError(f"{name} of signal {signal!r} lacks {place!r}; say where the band is.")


def _read_baseline(name: str, value: ArrayLike, axis: FloatArray) -> tuple[float, float]:
    first, last = _on_axis(f"baseline of {name}", value, axis, count=2)
    if abs(last - first) <= _slack(axis):
        raise ParameterError(f"baseline of {name} = [{first:g}, {last:g}]; expected two different points.")
    return float(first), float(last)


def _on_axis(name: str, value: ArrayLike, axis: FloatArray, count: int) -> FloatArray:
    try:
        places = np.atleast_1d(np.asarray(value, dtype=np.float64))
    except (TypeError, ValueError):
        places = np.empty(0)
    if places.shape != (count,) or not np.isfinite(places).all():
        wanted = "one axis value" if count == 1 else "two axis values"
        raise ParameterError(f"{name} = {value!r}; expected {wanted}.")
    slack = _slack(axis)
    if places.min() < axis[0] - slack or places.max() > axis[-1] + slack:
        raise ParameterError(
            f"{name} = {places.tolist()} reaches outside the axis, which goes from {axis[0]:g} to {axis[-1]:g}. "
            "Move it inside, or keep more of the spectrum."
        )
    return places


def _slack(axis: FloatArray) -> float:
    return SAME_PLACE * float(np.diff(axis).min()) if axis.size > 1 else 0.0


def _interpolate(axis: FloatArray, X: FloatArray, places: FloatArray) -> FloatArray:
    """Linear interpolation of every row at a few places, shape (n, places)."""
    if axis.size == 1:
        return np.repeat(X, places.size, axis=1)
    left = np.clip(np.searchsorted(axis, places, side="right") - 1, 0, axis.size - 2)
    share = np.clip((places - axis[left]) / (axis[left + 1] - axis[left]), 0.0, 1.0)
    values: FloatArray = X[:, left] * (1.0 - share) + X[:, left + 1] * share
    return values


def _signal(band: Band, profile: FloatArray) -> FloatArray:
    if band.signal == "area":
        return np.asarray(np.trapezoid(profile, band.x, axis=1), dtype=np.float64)
    return profile[:, 0] if band.signal == "height_at" else _top(band.x, profile)


def _top(x: FloatArray, profile: FloatArray) -> FloatArray:
    """Vertex of the parabola through the highest point and its neighbours; at the range's end the point itself."""
    highest = profile.argmax(axis=1)
    top: FloatArray = profile.max(axis=1)
    inner = np.flatnonzero((highest > 0) & (highest < x.size - 1))
    i = highest[inner]
    step_left, step_right = x[i] - x[i - 1], x[i + 1] - x[i]
    rise_left = (profile[inner, i] - profile[inner, i - 1]) / step_left
    rise_right = (profile[inner, i + 1] - profile[inner, i]) / step_right
    curvature = (rise_right - rise_left) / (step_left + step_right)  # half the second derivative, 0 or below
    slope = (rise_left * step_right + rise_right * step_left) / (step_left + step_right)  # at the highest point
    curved = curvature < 0
    top[inner[curved]] -= slope[curved] ** 2 / (4 * curvature[curved])
    return top
