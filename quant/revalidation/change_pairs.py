"""The same standards before and after, on the model's axis, as absorbance."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.checks import name_some
from quant.errors import NotEnoughDataError
from quant.model.calibration import Calibration
from quant.revalidation.change_terms import Ground, ground_for
from quant.revalidation.point_noise import noise_of
from quant.spectra.sample_set import mean_by_sample
from quant.spectra.spectra_set import SpectraSet
from quant.units import absorbance_from_transmittance, transmittance_from_absorbance

FEWEST_STANDARDS = 4
FRACTIONS = ("transmittance", "reflectance")
LEAST_LIGHT = 1e-6  # of what reaches the detector, at points that the model does not use


@dataclass(frozen=True, eq=False)
class Pairs:
    """Mean absorbances of standards measured twice."""

    ground: Ground
    unit: str  # of the axis
    resolution: float  # width of the line shape before [axis unit]
    quantity: str
    before: FloatArray
    after: FloatArray
    noise_ratios: FloatArray  # ln of noise after / before

    def ordinates(self, absorbance: FloatArray) -> FloatArray:
        """Turn absorbance back into what the model reads."""
        return transmittance_from_absorbance(absorbance) if self.quantity in FRACTIONS else absorbance


def pair_spectra(before: SpectraSet, after: SpectraSet, model: Calibration) -> Pairs:
    """Pair the mean spectra of standards measured before and after.

    Parameters
    ----------
    before, after : SpectraSet
        Paired by sample ID; replicates are averaged.
    model : Calibration
        Its axis, and the range it uses.

    Raises
    ------
    NotEnoughDataError
        Fewer than four standards in both, or too few points in the range.
    """
    shared = [sample for sample in dict.fromkeys(before.sample_ids) if sample in set(after.sample_ids)]
    if len(shared) < FEWEST_STANDARDS:
        raise NotEnoughDataError(
            f"{len(shared)} standard(s) measured both before and after ({name_some(shared) or 'none'}); at least "
            f"{FEWEST_STANDARDS} are needed to tell a change from scatter. Measure the same ones, under the same IDs."
        )
    resample = bool(model.reading.get("resample", False))
    sets = [s.select(shared).on_axis(model.axis, resample=resample) for s in (before, after)]
    place = {sample: i for i, sample in enumerate(shared)}
    index = [np.array([place[sample] for sample in s.sample_ids], dtype=np.intp) for s in sets]
    fractions = model.quantity in FRACTIONS
    used = used_points(model) & np.isfinite(np.vstack([s.values for s in sets])).all(axis=0)
    rows = [_absorbance(s.values, used, fractions=fractions) for s in sets]
    resolution = _resolution(sets[0], model)
    ground = ground_for(
        model.axis.values, model.axis.unit, used, light=model.quantity != "arbitrary", resolution=resolution
    )
    if ground.used.sum() < 3 * len(ground.kinds):
        raise NotEnoughDataError(
            f"{int(ground.used.sum())} usable points in the range of the model; expected {3 * len(ground.kinds)} or "
            "more to estimate what changed. Measure a wider range."
        )
    levels = [
        mean_by_sample(noise_of(r, ground.axis, ground.used)[:, None], i, len(shared))[:, 0]
        for r, i in zip(rows, index, strict=True)
    ]
    tiny = np.finfo(float).tiny
    return Pairs(
        ground=ground,
        unit=model.axis.unit,
        resolution=resolution or 2.0 * model.axis.spacing,
        quantity=model.quantity,
        before=mean_by_sample(rows[0], index[0], len(shared)),
        after=mean_by_sample(rows[1], index[1], len(shared)),
        noise_ratios=np.log(np.maximum(levels[1], tiny) / np.maximum(levels[0], tiny)),
    )


def used_points(model: Calibration) -> BoolArray:
    """Mark the points of the model's axis that lie in the range its regression sees, shape (n_points,)."""
    axis = model.axis.values
    seen = axis
    for step in model.steps:
        seen = step.axis_after(seen)
    half = 0.75 * model.axis.spacing
    order = np.sort(seen)
    place = np.searchsorted(order, axis)
    below = np.abs(axis - order[np.clip(place - 1, 0, order.size - 1)])
    above = np.abs(order[np.clip(place, 0, order.size - 1)] - axis)
    return np.asarray(np.minimum(below, above) <= half)


def _resolution(spectra: SpectraSet, model: Calibration) -> float | None:
    """Width of the line shape as the notes state it [axis unit], None if they do not."""
    stated = [row.get("resolution", "") for row in spectra.notes] + list(model.domain.get("resolution", ()))
    for text in stated:
        try:
            return float(text.lower().replace("cm-1", "").replace("1/cm", "").replace("cm⁻¹", "").strip())
        except ValueError:
            continue
    return None


def _absorbance(values: FloatArray, used: BoolArray, *, fractions: bool) -> FloatArray:
    """Absorbance of every point; points that are not used may have none and get some."""
    if not fractions:
        return np.where(used, values, np.nan_to_num(values))
    light = np.where(used, values, np.maximum(np.nan_to_num(values), LEAST_LIGHT))
    return absorbance_from_transmittance(light)
