"""Water vapour and carbon dioxide that changed between background and sample; wavenumber axes only."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.inspection.finding import DOUBT, NOTE, Finding, plural
from quant.inspection.material import Material
from quant.inspection.noise import noise_levels
from quant.spectra.simulate_effects import VAPOUR_RESOLUTION, carbon_dioxide_spectrum, water_vapour_spectrum

# Regions from Herzberg, from memory: bands at 2349.1 and 667.4, 1594.8, 3657.1 and 3755.9 cm⁻¹.
CARBON_DIOXIDE = ((2260.0, 2420.0),)
WATER_VAPOUR = ((1350.0, 1900.0), (3550.0, 3950.0))
ALIKE = 0.5  # correlation with the pattern of the gas from which it is seen
HEIGHT = 3.0  # times the noise, of the strongest line
HARMFUL = 3.0  # the same inside the ranges used
FEWEST_POINTS = 20


@dataclass(frozen=True)
class _Gas:
    name: str
    code: str
    windows: tuple[tuple[float, float], ...]
    remedy: str


GASES = (
    _Gas("Water vapour", "water_vapour", WATER_VAPOUR, "purge longer and measure the background more often"),
    _Gas("Carbon dioxide", "carbon_dioxide", CARBON_DIOXIDE, "purge, do not breathe into the open sample chamber"),
)


def check_atmosphere(material: Material) -> list[Finding]:
    """Look for the patterns of both gases in what each spectrum has beyond the middle of all."""
    axis = material.spectra.axis
    if axis.unit != "cm-1" or not material.is_absorbance:
        return []
    return [finding for gas in GASES for finding in _seen(material, gas, axis.values)]


def _seen(material: Material, gas: _Gas, axis: FloatArray) -> list[Finding]:
    window: BoolArray = np.zeros(axis.size, dtype=bool)
    for low, high in gas.windows:
        window |= (axis >= low) & (axis <= high)
    pattern = _pattern(material, gas, axis)
    if window.sum() < FEWEST_POINTS or np.ptp(pattern[window]) < 0.1:
        return []
    height, alike = match(material.absorbance, pattern, window, sharp=gas.code == "water_vapour")
    noise = noise_levels(material.absorbance, window)
    seen = (np.abs(alike) > ALIKE) & (np.abs(height) > HEIGHT * noise)
    if not seen.any():
        return []
    touched = material.used & window & (pattern > 0.1 * pattern[window].max())
    strongest = float(pattern[material.used & window].max()) if (material.used & window).any() else 0.0
    harmful = bool(touched.any()) and bool((np.abs(height[seen]) * strongest > HARMFUL * noise[seen]).any())
    rows = np.flatnonzero(seen)[np.argsort(-np.abs(height[seen]), kind="stable")]
    first = rows[0]
    where = " or ".join(f"{low:g} and {high:g}" for low, high in gas.windows)
    return [
        Finding(
            gravity=DOUBT if harmful else NOTE,
            code=gas.code,
            title=f"{gas.name} in {plural(rows.size, 'spectrum', 'spectra')}"
            + ("" if touched.any() else ", outside the ranges used"),
            samples=material.named(rows),
            evidence=f"Strongest line {height[first]:+.2g} A ({np.abs(height[first]) / noise[first]:.0f} times the "
            f"noise) between {where} cm⁻¹; correlation with the pattern of the gas {alike[first]:+.2f}.",
            advice=f"To be rid of it, {gas.remedy}"
            + ("; or leave the range out." if touched.any() else ". The ranges used do not see it."),
        )
    ]


def _pattern(material: Material, gas: _Gas, axis: FloatArray) -> FloatArray:
    if gas.code == "carbon_dioxide":
        return carbon_dioxide_spectrum(axis)
    try:
        stated = float(material.spectra.notes[0].get("resolution", ""))
    except ValueError:
        stated = max(2 * material.spectra.axis.spacing, VAPOUR_RESOLUTION)
    pattern = water_vapour_spectrum(axis, stated)
    return pattern / max(float(pattern.max()), 1e-12)


def match(rows: FloatArray, pattern: FloatArray, window: BoolArray, *, sharp: bool) -> tuple[FloatArray, FloatArray]:
    """Return how much of a pattern each spectrum holds beyond the middle of all, and how alike it is to the pattern.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Absorbances.
    pattern : array of shape (n_points,)
        Spectrum of the gas, its highest point about 1.
    window : array of bool, shape (n_points,)
        Where to look.
    sharp : bool
        The pattern is made of lines: compare second differences, in which wide bands hardly show. Else a parabola is
        taken out along the window.

    Returns
    -------
    height : array of shape (n,)
        Factor on the pattern. [absorbance]
    alike : array of shape (n,)
        Correlation.
    """
    numbers = np.flatnonzero(window)
    runs = [run for run in np.split(numbers, np.flatnonzero(np.diff(numbers) > 1) + 1) if run.size > 4]
    unlike = rows - np.median(rows, axis=0) if len(rows) > 2 else rows
    change = np.diff if sharp else _without_parabola
    seen = np.hstack([change(unlike[:, run], 2) for run in runs])
    shape = np.concatenate([change(pattern[None, run], 2)[0] for run in runs])
    norm = float(shape @ shape)
    along = seen @ shape
    lengths = np.linalg.norm(seen, axis=1)
    return along / norm, along / np.where(lengths > 0, lengths, np.inf) / np.sqrt(norm)


def _without_parabola(rows: FloatArray, degree: int) -> FloatArray:
    u = np.linspace(-1.0, 1.0, rows.shape[1])
    base, _ = np.linalg.qr(np.vander(u, degree + 1))
    return np.asarray(rows - rows @ base @ base.T)
