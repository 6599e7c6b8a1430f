"""Reading all that a recipe names, without giving up at the first thing that does not fit."""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.calibration.split import split_samples
from quant.errors import AxisMismatchError, DataError, QuantError
from quant.inspection.material import Material, Reading
from quant.preprocessing.chain import apply_chain, fit_chain
from quant.readers.read import find_files, read_spectra
from quant.recipe.load import read_recipe_reference
from quant.recipe.pipeline import axis_behind, build_steps
from quant.recipe.regression_schema import BandTable
from quant.recipe.schema import Recipe
from quant.spectra.axis import SpectralAxis
from quant.spectra.sample_ids import expand_ids
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.segments import segments
from quant.spectra.spectra_set import SpectraSet, join_spectra

OPAQUE = 1e-6  # transmittance below which absorbance is not computed: A > 6


def gather(recipe: Recipe, samples: SampleSet | None = None, validation: SampleSet | None = None) -> Material:
    """Read the recipe's files (or take samples at hand) and lay everything out for the checks.

    Raises
    ------
    QuantError
        Nothing can be read, nothing pairs, or the recipe names samples or steps that do not exist.
    """
    readings = [_at_hand("calibration", samples) if samples is not None else _read(recipe, "calibration", None, None)]
    table = recipe.validation
    if validation is not None:
        readings.append(_at_hand("validation", validation))
    elif samples is None and table is not None and table.files is not None:
        readings.append(_read(recipe, "validation", table.files, table.reference_file))
    calibration, apart, in_both = _divide(recipe, readings)
    return _lay_out(recipe, tuple(readings), calibration, apart, in_both)


def leave_out(material: Material, names: set[str]) -> Material:
    """Return the material without some samples."""
    validation = material.validation
    return _lay_out(
        material.recipe,
        material.readings,
        _without(material.calibration, names),
        None if validation is None else _without(validation, names),
        material.in_both,
    )


def _at_hand(name: str, samples: SampleSet) -> Reading:
    return Reading(name, (("", samples.spectra),), (), samples.spectra, (), samples)


def _read(recipe: Recipe, name: str, files: list[str] | None, reference: str | None) -> Reading:
    paths = [str(Path(recipe.folder) / file) for file in files or recipe.spectra.files]
    options = recipe.spectra.options()
    parts: list[tuple[str, SpectraSet]] = []
    unread: list[tuple[str, str]] = []
    problem: DataError | None = None
    for file in find_files(paths, options.format):
        try:
            parts.append((Path(file).name, read_spectra([file], options)))
        except DataError as error:
            problem = problem or error
            unread.append((Path(file).name, str(error)))
    if not parts and problem is not None:
        raise problem
    spectra, other = _agreeing(parts, resample=recipe.spectra.resample)
    paired = pair_samples(spectra, read_recipe_reference(recipe, reference), unmatched="drop", missing="drop")
    return Reading(name, tuple(parts), tuple(unread), spectra, tuple(other), paired)


def _agreeing(
    parts: Sequence[tuple[str, SpectraSet]], *, resample: bool
) -> tuple[SpectraSet, list[tuple[str, SpectraSet, str]]]:
    """Join the files that agree with most spectra in axis and quantity; return the others with what differs."""
    counts = [sum(len(other) for _, other in parts if not _difference(part, other)) for _, part in parts]
    first = parts[int(np.argmax(counts))][1]
    kept, other = [], []
    for file, part in parts:
        difference = _difference(first, part, resample=resample)
        if difference:
            other.append((file, part, difference))
        else:
            kept.append(part.on_axis(first.axis, resample=resample))
    return join_spectra(kept), other


def _difference(first: SpectraSet, other: SpectraSet, *, resample: bool = False) -> str:
    if first.axis is not other.axis:
        try:
            other.on_axis(first.axis, resample=resample)
        except AxisMismatchError:
            return "axis"
    return "quantity" if first.quantity != other.quantity else ""


def _divide(recipe: Recipe, readings: Sequence[Reading]) -> tuple[SampleSet, SampleSet | None, tuple[str, ...]]:
    """Leave excluded samples out and tell calibration from validation samples."""
    samples = readings[0].samples
    separate = readings[1].samples if len(readings) > 1 else None
    excluded = {sample for table in recipe.exclude for sample in expand_ids(table.samples)}
    if separate is not None:
        both = tuple(sample for sample in separate.sample_ids if sample in set(samples.sample_ids) - excluded)
        return _without(samples, excluded), _without(separate, {*excluded, *both}), both
    apart: set[str] = set()
    if recipe.validation is not None and recipe.validation.files is None:
        for analyte, values in zip(samples.analytes, samples.values.T, strict=True):
            if np.isfinite(values).any():
                found = split_samples(recipe, samples, None, analyte.name).validation
                apart.update(found.sample_ids if found is not None else ())
    known = set(samples.sample_ids) - excluded
    calibration = _without(samples, {*excluded, *apart})
    return calibration, _without(samples, {*excluded, *(known - apart)}) if apart else None, ()


def _without(samples: SampleSet, names: set[str]) -> SampleSet:
    return samples.subset(np.array([sample not in names for sample in samples.sample_ids], dtype=bool))


def _lay_out(
    recipe: Recipe,
    readings: tuple[Reading, ...],
    calibration: SampleSet,
    validation: SampleSet | None,
    in_both: tuple[str, ...],
) -> Material:
    if validation is not None and _difference(
        calibration.spectra, validation.spectra, resample=recipe.spectra.resample
    ):
        validation = None  # `readings` still hold it, so that the difference is reported
    sets = [calibration] if validation is None else [calibration, validation]
    spectra = join_spectra([part.spectra for part in sets], resample=recipe.spectra.resample)
    index = np.concatenate([part.sample_index + len(calibration) * number for number, part in enumerate(sets)])
    transmittance = spectra.quantity == "transmittance"
    values = spectra.values
    with np.errstate(divide="ignore", invalid="ignore"):
        absorbance = np.where(values > OPAQUE, -np.log10(values), np.nan) if transmittance else values
    absorbance = bridged(absorbance)
    steps = build_steps(recipe, spectra.axis, spectra.quantity)
    processed, trouble = None, ""
    try:
        whole = 10.0**-absorbance if transmittance else absorbance
        weights = calibration.weights
        fitted, _ = fit_chain(steps, whole[: len(calibration.spectra)], None, weights)
        processed = apply_chain(fitted, whole)
    except QuantError as problem:
        trouble = str(problem)
    return Material(
        recipe=recipe,
        readings=readings,
        calibration=calibration,
        validation=validation,
        in_both=in_both,
        spectra=spectra,
        sample_ids=tuple(sample for part in sets for sample in part.sample_ids),
        sample_index=index,
        absorbance=absorbance,
        missing=np.isnan(values),
        used=used_points(recipe, spectra.axis, axis_behind(steps, spectra.axis)),
        processed=processed,
        trouble=trouble,
    )


def bridged(rows: FloatArray) -> FloatArray:
    """Return spectra with straight lines in place of missing points (NaN); a spectrum of nothing else becomes zero."""
    gaps = np.isnan(rows)
    if not gaps.any():
        return rows
    filled, points = rows.copy(), np.arange(rows.shape[1])
    for row in np.flatnonzero(gaps.any(axis=1)):
        known = ~gaps[row]
        filled[row] = np.interp(points, points[known], rows[row, known]) if known.any() else 0.0
    return filled


def used_points(recipe: Recipe, axis: SpectralAxis, behind: FloatArray) -> BoolArray:
    """Mark the points of the axis that reach the regression: ranges kept, and of these the bands, shape (n_points,)."""
    spans = [(behind[run.start], behind[run.stop - 1]) for run in segments(behind)]
    used = _inside(axis, spans)
    table = recipe.regression
    if table.method == "band_area":
        listed = [*(table.bands or ()), *([table.reference_band] if table.reference_band else ())]
        used &= _inside(axis, [_span(band, axis) for band in listed])
    return used


def _span(band: BandTable, axis: SpectralAxis) -> tuple[float, float]:
    ends = [*(band.range or ()), *(band.baseline or ()), *((band.position,) if band.position is not None else ())]
    return (min(ends), max(ends)) if ends else (float(axis.values.min()), float(axis.values.max()))


def _inside(axis: SpectralAxis, spans: Sequence[tuple[float, float]]) -> BoolArray:
    inside = np.zeros(len(axis), dtype=bool)
    for first, last in spans:
        low, high = min(first, last), max(first, last)
        inside |= (axis.values >= low - axis.spacing / 2) & (axis.values <= high + axis.spacing / 2)
    return inside
