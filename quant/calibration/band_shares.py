"""What part of the predictions comes from where along the axis: the analyte's bands, the matrix's, the air's.

The share of a region R is cov(Σ_R b_j x_j, ŷ)/var(ŷ) over the calibration samples: b the regression vector, x the
preprocessed spectrum, ŷ the fitted value. Shares of regions that part the axis sum to 1; one may be negative, where a
region takes back what another has added.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.calibration.evidence import Evidence
from quant.chemistry.bands import CARBON_DIOXIDE, WATER_VAPOUR, Band
from quant.estimator.base import Step
from quant.recipe.chemistry_schema import ChemistryTable
from quant.result import Result, documented
from quant.spectra.segments import median_step, segments
from quant.units import convert_axis

ANALYTE, MATRIX, NOWHERE = "bands of the analyte", "bands of the matrix", "nowhere known"
AIR = (("where carbon dioxide absorbs", CARBON_DIOXIDE), ("where water vapour absorbs", WATER_VAPOUR))
GASES = tuple(name for name, _ in AIR)

# Steps after which an ordinate is still that of its own surroundings.
LOCAL = {
    "absorbance", "keep_ranges", "leave_out_ranges", "resample", "mean_centre", "scale_columns", "savitzky_golay",
    "gap_derivative",
}  # fmt: skip


@dataclass(frozen=True, kw_only=True, eq=False)
class RegionShare(Result):
    """One region of the axis, and what part of the predictions comes from it."""

    region: str = documented("Name of the region")
    bands: tuple[str, ...] = documented("Its bands that lie on the axis, one entry a name, in words", "cm-1")
    ranges: tuple[tuple[float, float], ...] = documented(
        "The stretches of the axis it has got, low to high", "axis unit"
    )
    n_points: int = documented("Points in them")
    n_contested: int = documented("Of these, points that also lie in bands of the matrix, for the analyte")
    share: float = documented("cov(sum of b·x over its points, prediction)/var(prediction); may be negative")


def band_shares(evidence: Evidence, table: ChemistryTable | None) -> tuple[RegionShare, ...]:
    """Part the axis among what is known to absorb, and state each region's share of the predictions.

    A point goes to the first of: the analyte's bands, the matrix's, carbon dioxide, water vapour, nowhere known. Steps
    that work in a moving window let a band reach half a window further; so do the regions.

    Parameters
    ----------
    evidence : Evidence
        A calibration with a regression vector, its axis in units of wavenumber or wavelength (see `why_no_shares`).
    table : ChemistryTable or None
        The recipe's bands.

    Returns
    -------
    tuple of RegionShare
        In the order of the rule; regions without a point are left out.
    """
    vector = evidence.vector
    if vector is None or why_no_shares(evidence):
        return ()
    axis = evidence.axis_after
    wavenumbers = convert_axis(axis, evidence.model.axis.unit, "cm-1")
    known: list[tuple[str, Sequence[Band]]] = [*AIR, (NOWHERE, ())]
    if table is not None:
        known = [(ANALYTE, table.analyte_bands()), (MATRIX, table.matrix_bands()), *known]
    reach, runs = blurring(evidence.model.steps), segments(axis)
    claimed = [_reached(wavenumbers, bands, reach, runs) for _, bands in known]
    parts = (evidence.mean - evidence.mean.mean(axis=0)) * vector
    predicted = parts.sum(axis=1)
    shares = parts.T @ predicted / float(predicted @ predicted)
    free, found = np.ones(axis.size, dtype=bool), []
    for place, (name, bands) in enumerate(known):
        own = free if name == NOWHERE else claimed[place] & free
        rival = claimed[place + 1] & own if name == ANALYTE else np.zeros_like(own)
        free = free & ~own
        if own.any():
            found.append(
                RegionShare(
                    region=name,
                    bands=_told([band for band in bands if _in(wavenumbers, band).any()]),
                    ranges=_ranges(axis, own, runs),
                    n_points=int(own.sum()),
                    n_contested=int(rival.sum()),
                    share=float(shares[own].sum()),
                )
            )
    return tuple(found)


def why_no_shares(evidence: Evidence) -> str:
    """Say why no shares can be stated, or return an empty text."""
    if evidence.vector is None or evidence.vector.size != evidence.axis_after.size:
        return "the method has no regression vector"
    if evidence.model.axis.unit == "point":
        return "the axis counts points; bands need wavenumbers or wavelengths"
    centred = evidence.mean - evidence.mean.mean(axis=0)
    if not (centred @ evidence.vector).any():
        return "the predictions are all the same"
    return ""


def blurring(steps: Sequence[Step]) -> int:
    """Return by how many points each way the steps let a band reach further: half of every moving window."""
    reach = 0
    for step in steps:
        given = step.get_params()
        window, gap, segment = (int(given.get(key) or 0) for key in ("window", "gap", "segment"))
        reach += window // 2 + gap + segment // 2
    return reach


def blurring_remarks(steps: Sequence[Step]) -> list[str]:
    """Say which steps move the places where bands show, or mix the whole spectrum into every ordinate."""
    remarks = []
    if reach := blurring(steps):
        remarks.append(
            f"The preprocessing works in moving windows: bands were widened by half a window, {reach} "
            f"point{'s' if reach > 1 else ''} each way."
        )
    wide = [_printed(step.name) for step in steps if step.name not in LOCAL]
    if wide:
        remarks.append(
            f"After {' and '.join(wide)} every ordinate also holds something of the "
            "rest of the spectrum: the shares are those of the preprocessed ordinates, and part of a share may come "
            "from bands elsewhere."
        )
    return remarks


def _printed(step: str) -> str:
    return step.upper() if step in ("snv", "msc", "emsc") else step.replace("_", " ")


def _reached(wavenumbers: FloatArray, bands: Sequence[Band], reach: int, runs: Sequence[slice]) -> BoolArray:
    """Return which points lie in any of the bands, or within `reach` points of one in the same run."""
    inside: BoolArray = np.zeros(wavenumbers.size, dtype=bool)
    for band in bands:
        inside |= _in(wavenumbers, band)
    if reach:
        kernel = np.ones(2 * reach + 1, dtype=int)
        for run in runs:
            widened = np.convolve(inside[run], kernel)[reach:-reach]
            inside[run] = widened > 0
    return inside


def _in(wavenumbers: FloatArray, band: Band) -> BoolArray:
    return (wavenumbers >= band.low) & (wavenumbers <= band.high)


def _ranges(axis: FloatArray, mask: BoolArray, runs: Sequence[slice]) -> tuple[tuple[float, float], ...]:
    """Return the stretches of the axis that a mask covers, half a step beyond their outer points. [axis unit]"""
    half = median_step(axis) / 2
    found = []
    for run in runs:
        edges = np.flatnonzero(np.diff(np.concatenate([[0], mask[run].astype(int), [0]])))
        for first, stop in zip(edges[::2], edges[1::2], strict=True):
            ends = axis[run][[first, stop - 1]]
            found.append((float(ends.min() - half), float(ends.max() + half)))
    return tuple(found)


def _told(bands: Sequence[Band]) -> tuple[str, ...]:
    """Return "aromatic ring 1575 to 1625, 1450 to 1525", one a name."""
    by_name: dict[str, list[str]] = {}
    for band in bands:
        by_name.setdefault(band.name, []).append(f"{band.low:g} to {band.high:g}")
    return tuple(f"{name} {', '.join(dict.fromkeys(ranges))}" for name, ranges in by_name.items())
