"""What a change of the instrument does to a spectrum, small changes as terms of a straight sum, larger ones exactly."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.spectra.segments import segments
from quant.spectra.simulate_effects import VAPOUR_RESOLUTION, water_vapour_spectrum

WIDTH_TO_VARIANCE = 1.0 / (8.0 * np.log(2.0))  # σ² of a Gaussian = FWHM² · this
EDGE = 4  # points at either end of a run that derivatives and shifted spectra do not reach well
MARGIN = 20  # points around those used
LARGEST_SHIFT = 5.0  # points; beyond, a search about the measured axis is lost
LARGEST_BASELINE = 10.0  # absorbance
CARBON_DIOXIDE = ((2280.0, 2390.0), (655.0, 680.0))  # cm⁻¹, Herzberg, from memory: says nothing of the instrument
LEAST_VAPOUR = 0.05  # height of the strongest vapour line in the range, of the strongest of all, to be looked for

SHIFT, STRETCH, GAIN, OFFSET = "shift", "stretch", "gain", "offset"
SLOPE, CURVATURE, RESOLUTION, VAPOUR = "baseline_slope", "baseline_curvature", "resolution", "vapour"
SPECTRAL_KINDS = (SHIFT, STRETCH, GAIN, OFFSET, SLOPE, CURVATURE, RESOLUTION, VAPOUR)
"""Changes of the spectrum that are estimated together, in this order."""


@dataclass(frozen=True, eq=False)
class Ground:
    """The axis that changes are looked for on.

    Attributes
    ----------
    axis : array of shape (n_points,)
        [axis unit]
    used : array of bool, shape (n_points,)
        Points that the estimate rests on.
    light : bool
        Whether 10^(−ordinate) is light, on which line shapes act; else they act on the ordinate itself.
    vapour : array of shape (n_points,)
        Water vapour, strongest line 1; zero where there can be none.
    runs : tuple of slice
        Where spectra are moved and blurred: unbroken stretches that hold points used, and `MARGIN` points around them.
    """

    axis: FloatArray
    used: BoolArray
    light: bool
    vapour: FloatArray
    runs: tuple[slice, ...]

    @property
    def u(self) -> FloatArray:
        """The axis from −1 to 1 over the points used, shape (n_points,)."""
        inside = self.axis[self.used]
        low, high = inside.min(), inside.max()
        return np.asarray(2.0 * (self.axis - low) / (high - low) - 1.0)

    @property
    def kinds(self) -> tuple[str, ...]:
        """The kinds of change that can be looked for on this axis."""
        visible = np.abs(self.vapour[self.used]).max(initial=0.0) > LEAST_VAPOUR
        return SPECTRAL_KINDS if visible else SPECTRAL_KINDS[:-1]


def core_of(ground: Ground) -> tuple[Ground, IntArray]:
    """Return the ground without all points outside its runs, and the positions of those it keeps."""
    kept = np.concatenate([np.arange(run.start, run.stop) for run in ground.runs])
    ends = np.cumsum([0, *(run.stop - run.start for run in ground.runs)]).tolist()
    runs = tuple(slice(start, stop) for start, stop in pairwise(ends))
    core = Ground(ground.axis[kept], ground.used[kept], ground.light, ground.vapour[kept], runs)
    return core, kept


def ground_for(axis: FloatArray, unit: str, used: BoolArray, *, light: bool, resolution: float | None) -> Ground:
    """Return the ground: points used without the ends of each run and without carbon dioxide.

    Parameters
    ----------
    axis : array of shape (n_points,)
        [unit]
    unit : str
        Of the axis.
    used : array of bool, shape (n_points,)
        Points that may be used.
    light : bool
        Whether 10^(−ordinate) is light.
    resolution : float or None
        Width of the line shape [cm⁻¹]; that at which vapour lines are known if None.
    """
    kept = used.copy()
    for run in segments(axis):
        kept[run.start : run.start + EDGE] = False
        kept[max(run.stop - EDGE, run.start) : run.stop] = False
    vapour, runs = np.zeros_like(axis), []
    for run in segments(axis):
        inside = run.start + np.flatnonzero(kept[run])
        if inside.size and run.stop - run.start > 2 * EDGE:
            runs.append(slice(max(run.start, int(inside[0]) - MARGIN), min(run.stop, int(inside[-1]) + MARGIN + 1)))
    if unit == "cm-1":
        for low, high in CARBON_DIOXIDE:
            kept &= ~((axis > low) & (axis < high))
        vapour = np.asarray(water_vapour_spectrum(axis, resolution or VAPOUR_RESOLUTION))
    return Ground(axis=axis, used=kept, light=light, vapour=vapour, runs=tuple(runs))


def terms(ground: Ground, rows: FloatArray, kinds: Sequence[str]) -> FloatArray:
    """Return what a unit of each change adds to spectra, to first order, shape (n, n_kinds, n_points).

    Parameters
    ----------
    ground : Ground
    rows : array of shape (n, n_points)
        Spectra, absorbance.
    kinds : sequence of str
        Which changes: a band at ν goes to ν·(1 + stretch) + shift [axis unit; relative]; ordinates become
        (1 + gain) times; offset, slope and curvature are coefficients of 1, u and (3u² − 1)/2 over the range used;
        resolution is what is added to the square of the line width [(axis unit)²]; vapour the height of its strongest
        line.
    """
    slope, bend = derivatives(ground, rows)
    u, ones = ground.u, np.ones_like(ground.axis)
    made = {
        SHIFT: -slope,
        STRETCH: -slope * ground.axis,
        GAIN: rows,
        OFFSET: ones,
        SLOPE: u,
        CURVATURE: 0.5 * (3.0 * u * u - 1.0),
        RESOLUTION: 0.5 * WIDTH_TO_VARIANCE * bend,
        VAPOUR: ground.vapour,
    }
    return np.stack([np.broadcast_to(made[kind], rows.shape) for kind in kinds], axis=1)


def largest_sizes(ground: Ground, kinds: Sequence[str]) -> FloatArray:
    """Return how far each size is sought in either direction, shape (n_kinds,): beyond lies another kind of spectrum.

    Shift and stretch by `LARGEST_SHIFT` points, line width by twice as much; gain by nine tenths.
    """
    reach = LARGEST_SHIFT * float(np.median(np.abs(np.diff(ground.axis))))
    known = {
        SHIFT: reach,
        STRETCH: min(reach / float(np.abs(ground.axis).max()), 0.01),
        GAIN: 0.9,
        RESOLUTION: (2.0 * reach) ** 2,
    }
    return np.array([known.get(kind, LARGEST_BASELINE) for kind in kinds])


def derivatives(ground: Ground, rows: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the slope of spectra and what line broadening adds per unit of variance, each of shape (n, n_points).

    Where the ordinate is absorbance, a line shape acts on T = 10^(−A): T''/T = −ln 10·A'' + (ln 10·A')², so that
    the absorbance gains A'' − ln 10·A'² per half a unit of variance.
    """
    slope, bend = np.zeros_like(rows), np.zeros_like(rows)
    for run in ground.runs:
        slope[:, run] = np.gradient(rows[:, run], ground.axis[run], axis=1)
        bend[:, run] = np.gradient(slope[:, run], ground.axis[run], axis=1)
    return slope, bend - np.log(10.0) * slope**2 if ground.light else bend


def changed(ground: Ground, rows: FloatArray, sizes: Mapping[str, FloatArray]) -> FloatArray:
    """Return spectra as they look after changes of the sizes given, shape (n, n_points).

    Parameters
    ----------
    ground : Ground
    rows : array of shape (n, n_points)
        Spectra, absorbance.
    sizes : mapping of str to array of shape (n,)
        Sizes by kind, one a spectrum, in the units of `terms`; kinds not named do not change. A resolution below 0 is
        left to the caller, who blurs the other spectrum.
    """
    none = np.zeros(len(rows))

    def column(kind: str) -> FloatArray:
        return np.asarray(sizes.get(kind, none))[:, None]

    result = blurred(ground, rows * (1.0 + column(GAIN)), sizes.get(RESOLUTION, none))
    result = moved(ground, result, sizes.get(SHIFT, none), sizes.get(STRETCH, none))
    u = ground.u
    result = result + column(OFFSET) + column(SLOPE) * u + column(CURVATURE) * 0.5 * (3.0 * u * u - 1.0)
    return np.asarray(result + column(VAPOUR) * ground.vapour)


def moved(ground: Ground, rows: FloatArray, shift: FloatArray, stretch: FloatArray) -> FloatArray:
    """Return spectra with a band at ν moved to ν·(1 + stretch) + shift, by cubic splines through each run.

    Parameters
    ----------
    ground : Ground
    rows : array of shape (n, n_points)
        Spectra.
    shift, stretch : arrays of shape (n,)
        [axis unit; relative]
    """
    from scipy.interpolate import CubicSpline  # deferred: start-up

    if not (shift.any() or stretch.any()):
        return rows
    result = rows.copy()
    number = np.arange(len(rows))[:, None]
    for run in ground.runs:
        x = ground.axis[run]
        step = LARGEST_SHIFT * float(np.median(np.abs(np.diff(x))))
        wanted = np.clip((x - shift[:, None]) / (1.0 + stretch[:, None]), x - step, x + step)
        wanted = np.clip(wanted, x.min(), x.max())
        order = slice(None, None, -1) if x[0] > x[-1] else slice(None)
        knots = x[order]
        pieces = CubicSpline(knots, rows[:, run][:, order], axis=1).c  # powers, pieces, spectra
        left = np.clip(np.searchsorted(knots, wanted, side="right") - 1, 0, knots.size - 2)
        t = wanted - knots[left]
        cubic, square, straight, level = (power[left, number] for power in pieces)
        result[:, run] = ((cubic * t + square) * t + straight) * t + level
    return result


def blurred(ground: Ground, rows: FloatArray, squared_width: FloatArray) -> FloatArray:
    """Return spectra seen through a further Gaussian line shape.

    By Fourier transform of each run, mirrored at its ends, so that widths below a point's spacing are right as well.

    Parameters
    ----------
    ground : Ground
    rows : array of shape (n, n_points)
        Spectra.
    squared_width : array of shape (n,)
        FWHM² of the line shape; nothing happens where it is not above 0. [(axis unit)²]
    """
    wider = np.maximum(squared_width, 0.0)[:, None]
    if not wider.any():
        return rows
    result = rows.copy()
    for run in ground.runs:
        step = float(np.abs(np.median(np.diff(ground.axis[run]))))
        light = 10.0 ** -rows[:, run] if ground.light else rows[:, run]
        mirrored = np.concatenate([light, light[:, ::-1]], axis=1)
        frequency = np.fft.rfftfreq(mirrored.shape[1], step)
        damping = np.exp(-2.0 * np.pi**2 * frequency**2 * WIDTH_TO_VARIANCE * wider)
        seen = np.fft.irfft(np.fft.rfft(mirrored, axis=1) * damping, mirrored.shape[1], axis=1)[:, : light.shape[1]]
        result[:, run] = -np.log10(np.maximum(seen, 1e-6)) if ground.light else seen
    return result
