"""Noise, level and energy of the instrument, from 100 % lines and single-beam spectra."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from scipy import special

from quant.arrays import BoolArray, FloatArray
from quant.errors import AxisMismatchError, QuantityError
from quant.result import Result, documented
from quant.revalidation.multiple_tests import holm_adjusted
from quant.spectra.spectra_set import SpectraSet
from quant.text_table import format_columns
from quant.units import QUANTITIES, transmittance_from_absorbance

WINDOWS = ((3950.0, 4050.0), (2950.0, 3050.0), (1950.0, 2050.0), (950.0, 1050.0), (450.0, 550.0))
"""Windows in which noise is judged, 100 cm⁻¹ about 4000, 3000, 2000, 1000 and 500 (after ASTM E1421, from memory: to be
confirmed); of one that the axis reaches only in part, that part."""

LEAST_SHARE = 0.45  # of a window that has to be on the axis
FEWEST_POINTS = 10
SIGNIFICANCE = 0.05  # of all windows together, held by Holm
POINTS_A_RESOLUTION = 2.0  # usual zero filling: neighbours share their noise
ENERGY_CHANGE = 0.2  # relative change of the energy that is worth a word
A_PER_T = float(np.log10(np.e))  # s_A = 0.4343·s_T/T


@dataclass(frozen=True, kw_only=True, eq=False)
class NoiseWindow(Result):
    """The 100 % line in one window."""

    low: float = documented("Lower end", "cm⁻¹")
    high: float = documented("Upper end", "cm⁻¹")
    n_points: int = documented("Points in it")
    level: float = documented("Mean of the line", "%T")
    rms: float = documented("Root mean square about a straight line", "%T")
    peak_to_peak: float = documented("Highest minus lowest about a straight line", "%T")
    rms_absorbance: float = documented("The same noise in absorbance, 0.4343·s_T/T", "A")
    expected_peak_to_peak: float = documented("What white noise of this RMS gives on average in as many points", "%T")
    previous_rms: float | None = documented("RMS in the last record", "%T")
    previous_level: float | None = documented("Level in the last record", "%T")
    p_value: float | None = documented("Probability of such a ratio of RMS by chance (F), adjusted by Holm")


@dataclass(frozen=True, kw_only=True, eq=False)
class EnergyWindow(Result):
    """The single-beam energy in one window."""

    low: float = documented("Lower end", "cm⁻¹")
    high: float = documented("Upper end", "cm⁻¹")
    share: float = documented("Energy relative to the highest of the spectrum")
    ratio: float | None = documented("Energy now by energy in the last record")


@dataclass(frozen=True, kw_only=True, eq=False)
class InstrumentEvidence(Result):
    """What 100 % lines and single-beam spectra say of the instrument."""

    noise: tuple[NoiseWindow, ...] = documented("Noise and level by window, from high to low wavenumbers")
    energy: tuple[EnergyWindow, ...] = documented("Energy by window; empty without single-beam spectra")
    noisier: bool | None = documented("Whether noise rose in any window beyond chance; null without a last record")
    words: tuple[str, ...] = documented("The findings in words")

    def __str__(self) -> str:
        """The findings, then tables of the windows."""
        parts = list(self.words)
        if self.noise:
            header = ("window, cm⁻¹", "RMS, %T", "peak to peak, %T", "level, %T", "RMS before", "p")
            rows = [
                (f"{w.low:g}-{w.high:g}", w.rms, w.peak_to_peak, w.level, w.previous_rms, w.p_value) for w in self.noise
            ]
            parts.append(format_columns(header, rows))
        if self.energy:
            rows_of = [(f"{w.low:g}-{w.high:g}", w.share, w.ratio) for w in self.energy]
            parts.append(format_columns(("window, cm⁻¹", "share of highest energy", "now / before"), rows_of))
        return "\n".join(parts)


def instrument_evidence(
    blank: SpectraSet | None,
    previous: SpectraSet | None = None,
    *,
    energy: SpectraSet | None = None,
    previous_energy: SpectraSet | None = None,
) -> InstrumentEvidence:
    """Judge noise, photometric level and energy.

    Parameters
    ----------
    blank : SpectraSet or None
        100 % lines: the empty beam against itself, in transmittance or absorbance.
    previous : SpectraSet, optional
        100 % lines of the instrument's own last record.
    energy, previous_energy : SpectraSet, optional
        Single-beam spectra (quantity "arbitrary") now and in the last record, on one axis.

    Raises
    ------
    QuantityError
        100 % lines that are neither transmittance nor absorbance, or missing points.
    AxisMismatchError
        An axis that is not in cm⁻¹ or meets none of the windows.
    """
    now = [] if blank is None else _noise(blank)
    before = {} if previous is None else {(w.low, w.high): w for w in _noise(previous)}
    noise = _compared(now, before, 1 if blank is None else len(blank), 1 if previous is None else len(previous))
    energies = () if energy is None else _energies(energy, previous_energy)
    noisier = None
    if any(w.p_value is not None for w in noise):
        noisier = any(_noisier(w) for w in noise)
    return InstrumentEvidence(
        noise=tuple(noise),
        energy=energies,
        noisier=noisier,
        words=(*_noise_words(noise), *_energy_words(energies)),
    )


def expected_range(n_points: int) -> float:
    """Return the mean of highest minus lowest of `n_points` normal values of standard deviation 1.

    The integral of 1 − Φⁿ − (1 − Φ)ⁿ; 5.015 for 100 points.
    """
    x = np.linspace(-9.0, 9.0, 4001)
    below = special.ndtr(x)
    return float(np.trapezoid(1.0 - below**n_points - (1.0 - below) ** n_points, x))


def line_noise(axis: FloatArray, values: FloatArray) -> tuple[float, float, float]:
    """Return RMS and peak to peak about a straight line, and the mean, of one window of a 100 % line.

    Parameters
    ----------
    axis, values : arrays of shape (n_points,)
        The RMS is divided by n − 2.
    """
    u = axis - axis.mean()
    slope = float(u @ values) / float(u @ u)
    rest = values - values.mean() - slope * u
    return float(np.sqrt(rest @ rest / (rest.size - 2))), float(np.ptp(rest)), float(values.mean())


def _windows(spectra: SpectraSet) -> list[tuple[float, float, BoolArray]]:
    """Windows that the axis covers well enough, with the points in them."""
    axis = spectra.axis
    if axis.unit != "cm-1":
        raise AxisMismatchError(
            f"The spectra lie on {axis}; expected an axis in cm⁻¹, for which the windows are stated."
        )
    masks = [(low, high, (axis.values >= low) & (axis.values <= high)) for low, high in WINDOWS]
    least = [max(FEWEST_POINTS, LEAST_SHARE * (high - low) / axis.spacing) for low, high in WINDOWS]
    covered = [window for window, n in zip(masks, least, strict=True) if window[2].sum() >= n]
    if not covered:
        raise AxisMismatchError(
            f"The spectra lie on {axis}; expected them to reach one of {', '.join(f'{a:g}-{b:g}' for a, b in WINDOWS)}."
        )
    return covered


def _percent(spectra: SpectraSet) -> FloatArray:
    if spectra.quantity not in ("transmittance", "absorbance"):
        raise QuantityError(
            f"The 100 % lines are {QUANTITIES[spectra.quantity]}; expected transmittance or absorbance. Single-beam "
            "spectra are handed over as energy."
        )
    if np.isnan(spectra.values).any():
        raise QuantityError("The 100 % lines have missing points; expected a number at every point. Measure again.")
    if spectra.quantity == "absorbance":
        return 100.0 * transmittance_from_absorbance(spectra.values)
    return 100.0 * spectra.values


def _noise(spectra: SpectraSet) -> list[NoiseWindow]:
    percent, axis = _percent(spectra), spectra.axis.values
    rows = []
    for low, high, inside in _windows(spectra):
        each = np.array([line_noise(axis[inside], line[inside]) for line in percent])
        rms, level = float(np.sqrt(np.mean(each[:, 0] ** 2))), float(each[:, 2].mean())
        n = int(inside.sum())
        rows.append(
            NoiseWindow(
                low=low,
                high=high,
                n_points=n,
                level=level,
                rms=rms,
                peak_to_peak=float(each[:, 1].mean()),
                rms_absorbance=A_PER_T * rms / level,
                expected_peak_to_peak=expected_range(n) * rms,
                previous_rms=None,
                previous_level=None,
                p_value=None,
            )
        )
    return rows


def _compared(
    now: Sequence[NoiseWindow], before: dict[tuple[float, float], NoiseWindow], n_now: int, n_before: int
) -> list[NoiseWindow]:
    """Windows with the last record beside them, where it has them."""
    shared = [w for w in now if (w.low, w.high) in before]
    p = []
    for w in shared:
        old = before[w.low, w.high]
        freedom = [max(k * (x.n_points - 2) / POINTS_A_RESOLUTION, 1.0) for k, x in ((n_now, w), (n_before, old))]
        ratio = (w.rms / old.rms) ** 2 if old.rms > 0 else float("inf") if w.rms > 0 else 1.0
        above = float(special.fdtrc(freedom[0], freedom[1], ratio)) if np.isfinite(ratio) else 0.0
        p.append(min(1.0, 2.0 * min(above, 1.0 - above)))
    adjusted = {(w.low, w.high): value for w, value in zip(shared, holm_adjusted(p).tolist(), strict=True)}
    return [_with(w, before[w.low, w.high], adjusted[w.low, w.high]) if (w.low, w.high) in adjusted else w for w in now]


def _with(window: NoiseWindow, old: NoiseWindow, p_value: float) -> NoiseWindow:
    return replace(window, previous_rms=old.rms, previous_level=old.level, p_value=p_value)


def _noisier(window: NoiseWindow) -> bool:
    return window.p_value is not None and window.p_value <= SIGNIFICANCE and window.rms > (window.previous_rms or 0.0)


def _noise_words(noise: Sequence[NoiseWindow]) -> tuple[str, ...]:
    if not noise:
        return ()
    best = min(noise, key=lambda w: w.rms)
    words = [
        f"Noise of the 100 % line is least at {best.low:g} to {best.high:g} cm⁻¹: {best.rms:.2g} %T RMS, "
        f"{best.peak_to_peak:.2g} %T peak to peak"
    ]
    told = [w for w in noise if w.p_value is not None and w.p_value <= SIGNIFICANCE and w.previous_rms]
    if told:
        named = ", ".join(f"{w.rms / (w.previous_rms or 1.0):.2g} times at {w.low:g}-{w.high:g} cm⁻¹" for w in told)
        words.append(f"Noise against the last record: {named}")
    elif any(w.previous_rms is not None for w in noise):
        words.append("Noise does not differ from the last record beyond chance")
    off = max(noise, key=lambda w: abs(w.level - 100.0))
    words.append(
        f"The 100 % line lies at {off.level:.2f} %T where it is farthest off, {off.low:g} to {off.high:g} cm⁻¹"
    )
    return tuple(words)


def _energies(energy: SpectraSet, previous: SpectraSet | None) -> tuple[EnergyWindow, ...]:
    mean = energy.values.mean(axis=0)
    old = None if previous is None else previous.on_axis(energy.axis).values.mean(axis=0)
    top = float(np.nanmax(mean))
    return tuple(
        EnergyWindow(
            low=low,
            high=high,
            share=float(mean[inside].mean()) / top,
            ratio=None if old is None else float(mean[inside].mean() / old[inside].mean()),
        )
        for low, high, inside in _windows(energy)
    )


def _energy_words(energies: Sequence[EnergyWindow]) -> tuple[str, ...]:
    ratios = [w.ratio for w in energies if w.ratio is not None]
    if not ratios:
        return ()
    text = f"Energy is {min(ratios):.2f} to {max(ratios):.2f} times that of the last record"
    if max(ratios) / min(ratios) > 1.0 + ENERGY_CHANGE:
        text += "; it changed differently along the axis: source, beam splitter, detector or a contaminated optic"
    elif max(abs(r - 1.0) for r in ratios) > ENERGY_CHANGE:
        text += "; it changed alike along the axis: alignment, aperture or gain setting"
    return (text,)
