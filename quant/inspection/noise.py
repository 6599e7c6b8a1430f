"""Noise level, signal-to-noise ratio, and spikes."""

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.inspection.finding import DOUBT, NOTE, Finding, plural
from quant.inspection.material import Material
from quant.inspection.robust import TO_SD, standing_out
from quant.spectra.segments import segments
from quant.units import AXIS_UNITS

LITTLE_SIGNAL = 30.0  # signal-to-noise ratio below which noise decides
NOISIER = 2.0  # times the median noise is worth naming
SPIKE = 12.0  # times the usual roughness at that point
MOST_SPIKES = 3  # more in one spectrum are lines of a gas or noise, not spikes
FEWEST = 5  # spectra that tell how rough a point usually is
Q_BRANCH = (655.0, 680.0)  # cm⁻¹, sharp line of carbon dioxide: told by the check of the atmosphere


def noise_levels(rows: FloatArray, points: BoolArray | None = None) -> FloatArray:
    """Return the noise of each spectrum from its third differences, shape (n,).

    Third differences of white noise of standard deviation s have s·√20; bands wider than some points hardly show in
    them, and their median leaves the others out.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Spectra.
    points : array of bool, shape (n_points,), optional
        Only these, run by run.
    """
    numbers = np.flatnonzero(points) if points is not None else np.arange(rows.shape[1])
    runs = np.split(numbers, np.flatnonzero(np.diff(numbers) > 1) + 1)
    parts = [np.abs(np.diff(rows[:, run], n=3, axis=1)) for run in runs if run.size > 3]
    if not parts:
        return np.zeros(len(rows))
    return np.asarray(TO_SD * np.median(np.hstack(parts), axis=1) / np.sqrt(20.0))


def signal_levels(rows: FloatArray, points: BoolArray) -> FloatArray:
    """Return the range of each spectrum from its 1st to its 99th percentile, shape (n,)."""
    low, high = np.percentile(rows[:, points], (1, 99), axis=1)
    return np.asarray(high - low)


def check_noise(material: Material) -> list[Finding]:
    """State noise and signal-to-noise ratio in the ranges used; name spectra much noisier than the others."""
    if material.used.sum() < 8:
        return []
    noise = noise_levels(material.absorbance, material.used)
    signal = signal_levels(material.absorbance, material.used)
    middle = float(np.median(noise))
    ratio = float(np.median(signal / np.where(noise > 0, noise, np.inf))) if (noise > 0).any() else np.inf
    unit = " A" if material.is_absorbance else ""
    if middle <= 0:
        return []
    findings = [
        Finding(
            gravity=DOUBT if ratio < LITTLE_SIGNAL else NOTE,
            code="noise",
            title=f"Noise {middle:.2g}{unit} a point, signal-to-noise ratio {ratio:.0f} (medians, ranges used)",
            samples=(),
            evidence="Noise from third differences along the axis; signal is the range of a spectrum without its "
            "extreme hundredths.",
            advice="More scans, a longer path or a better contact would help." if ratio < LITTLE_SIGNAL else "",
        )
    ]
    noisy = standing_out(noise, least_ratio=NOISIER)
    if noisy.size:
        findings.append(
            Finding(
                gravity=DOUBT,
                code="noisy_spectra",
                title=f"{plural(noisy.size, 'spectrum', 'spectra')} much noisier than the others",
                samples=material.named(noisy),
                evidence=f"Up to {noise[noisy[0]] / middle:.1f} times the median noise of {middle:.2g}{unit}.",
                advice="Measure again; look for fewer scans, little light, or a loose contact.",
            )
        )
    return findings


def check_spikes(material: Material) -> list[Finding]:
    """Name single points that jump out of their spectrum as no other spectrum does there."""
    a, axis = material.absorbance, material.spectra.axis
    if len(a) < FEWEST or a.shape[1] < 12:
        return []
    unlike = a - np.median(a, axis=0)
    jump = np.zeros_like(unlike)
    for run in segments(axis.values):
        part = unlike[:, run]
        if part.shape[1] > 4:  # against the mean of the points two places away: one or two points may stick out
            jump[:, run][:, 2:-2] = part[:, 2:-2] - (part[:, :-4] + part[:, 4:]) / 2
    middle = np.median(jump, axis=0)
    usual = TO_SD * np.median(np.abs(jump - middle), axis=0)
    floor = np.maximum(usual, np.median(usual))
    if np.median(usual) <= 0:
        return []
    high = np.abs(jump - middle) > SPIKE * floor
    if axis.unit == "cm-1":
        high &= ~((axis.values > Q_BRANCH[0]) & (axis.values < Q_BRANCH[1]))
    # A spike is narrow: where three neighbours on each side differ as much, it is a band.
    high &= _narrow(unlike, np.abs(jump - middle))
    rows = np.flatnonzero(high.any(axis=1))
    count = [int(np.sum(np.diff(np.flatnonzero(high[row])) > 4)) + 1 for row in rows]
    spiked = [(row, n) for row, n in zip(rows.tolist(), count, strict=True) if n <= MOST_SPIKES]
    if not spiked:
        return []
    findings = []
    for inside in (True, False):
        mask = material.used if inside else ~material.used
        chosen = [row for row, _ in spiked if (high[row] & mask).any()]
        if chosen:
            worst = max(chosen, key=lambda row: float(np.abs(jump[row] * (high[row] & mask)).max()))
            place = int(np.argmax(np.abs(jump[worst]) * (high[worst] & mask)))
            position = f"{axis.values[place]:g} {AXIS_UNITS[axis.unit]}"
            findings.append(
                Finding(
                    gravity=DOUBT if inside else NOTE,
                    code="spikes",
                    title=f"Spikes in {plural(len(chosen), 'spectrum', 'spectra')}"
                    + ("" if inside else ", outside the ranges used"),
                    samples=material.named(chosen),
                    evidence=f"The highest: {jump[worst, place]:+.3g} at {position} "
                    f"in {material.named([worst])[0]}, {abs(jump[worst, place]) / floor[place]:.0f} times the usual "
                    "roughness there.",
                    advice="Measure again, or leave the spectrum out; a spike counts like a band.",
                )
            )
    return findings


def _narrow(rows: FloatArray, jump: FloatArray) -> BoolArray:
    """Mark points whose jump is gone three places to either side, against the points five places away."""
    narrow = np.zeros(rows.shape, dtype=bool)
    if rows.shape[1] > 12:
        centre = slice(5, -5)
        base = (rows[:, :-10] + rows[:, 10:]) / 2
        left, right = rows[:, 2:-8] - base, rows[:, 8:-2] - base
        narrow[:, centre] = np.maximum(np.abs(left), np.abs(right)) < 0.3 * jump[:, centre]
    return narrow
