"""Spectra shifted along the axis, by less than a point even."""

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.inspection.finding import DOUBT, Finding, percent, plural
from quant.inspection.material import Material
from quant.inspection.robust import FALSE_ALARM, FEWEST, largest_z, robust_sd
from quant.units import AXIS_UNITS

WINDOWS = 9  # stretches of the axis, each with the same share of slope; composition moves one, the axis all
STEADY = 0.1  # of a point's spacing: where the others scatter by more, composition moves bands, and nothing can be told
LEAST_SHIFT = 0.1  # of a point's spacing: less hardly matters


def check_shift(material: Material) -> list[Finding]:
    """Name spectra whose bands all stand on one side of where the others have them."""
    a, axis = material.absorbance, material.spectra.axis
    if len(a) < FEWEST or a.shape[1] < 10 * WINDOWS:
        return []
    shifts, alike = axis_shifts(a, axis.values)
    if robust_sd(shifts) > STEADY * axis.spacing:
        return []
    centre = float(np.median(shifts))
    spread = max(robust_sd(shifts), LEAST_SHIFT * axis.spacing / largest_z(len(a), both_sides=True))
    out = alike & (np.abs(shifts - centre) > largest_z(len(a), both_sides=True) * spread)
    if not out.any():
        return []
    rows = np.flatnonzero(out)[np.argsort(-np.abs(shifts[out] - centre), kind="stable")]
    unit, largest = AXIS_UNITS[axis.unit], float(shifts[rows[0]]) - centre
    return [
        Finding(
            gravity=DOUBT,
            code="shifted_axis",
            title=f"{plural(rows.size, 'spectrum', 'spectra')} shifted along the axis",
            samples=material.named(rows),
            evidence=f"The largest: {largest:+.3g} {unit} ({largest / axis.spacing:+.2f} points) against the middle of "
            f"all; the others scatter by {robust_sd(shifts):.2g} {unit} "
            f"({percent(FALSE_ALARM)} of clean sets would raise this).",
            advice="Check the wavelength scale (polystyrene film), temperature, and whether these spectra come from "
            "another instrument or another export.",
        )
    ]


def axis_shifts(rows: FloatArray, axis: FloatArray) -> tuple[FloatArray, BoolArray]:
    """Return how far each spectrum is shifted against the middle of all, to first order.

    A spectrum f(ν − δ) is about f − δ·f'. In each of nine stretches of the axis the spectrum is fitted by the middle
    spectrum, its slope and a straight line; the shift is the median over the stretches.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Spectra.
    axis : array of shape (n_points,)
        [axis unit]

    Returns
    -------
    shifts : array of shape (n,)
        Towards higher axis values. [axis unit]
    alike : array of bool, shape (n,)
        Whether two thirds of the stretches agree with the median to within half of it, as only the axis can do.
    """
    # All of one size first: else the one of middle size would be compared with itself.
    centred = rows - rows.mean(axis=1, keepdims=True)
    length = np.linalg.norm(centred, axis=1, keepdims=True)
    middle = np.median(centred / np.where(length > 0, length, 1.0), axis=0)
    slope = np.gradient(middle, axis)
    share = np.cumsum(slope**2)
    bounds = np.searchsorted(share, share[-1] * np.arange(1, WINDOWS) / WINDOWS)
    shifts = []
    for run in np.split(np.arange(axis.size), bounds):
        if run.size < 6:
            continue
        u = np.linspace(-1.0, 1.0, run.size)
        design = np.column_stack([middle[run], slope[run], np.ones(run.size), u])
        scale = np.linalg.norm(design, axis=0)
        scale[scale == 0] = 1.0
        found = np.linalg.lstsq(design / scale, rows[:, run].T, rcond=1e-10)[0] / scale[:, None]
        with np.errstate(divide="ignore", invalid="ignore"):
            shifts.append(np.where(found[0] != 0, -found[1] / found[0], 0.0))
    each = np.array(shifts) if shifts else np.zeros((1, len(rows)))
    total = np.median(each, axis=0)
    each = each - np.median(each, axis=1, keepdims=True)
    agree = np.abs(each - np.median(each, axis=0)) <= np.abs(np.median(each, axis=0)) / 2
    return total, np.asarray(agree.mean(axis=0) >= 2 / 3)
