"""The whole way from a recipe to calibrations, cross-validated and, where samples were set apart, validated."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.calibration.audit import audit, equip
from quant.calibration.below_limit import check_below_limit
from quant.calibration.chemistry import chemistry_behind
from quant.calibration.cross_validation import cross_validate, factor_limit
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.calibration.evidence import Evidence
from quant.calibration.folds import make_folds
from quant.calibration.laboratory import laboratory_of
from quant.calibration.leave_out import fit_pipeline
from quant.calibration.limits import applicability_limits, degrees_of_freedom, interval_parts
from quant.calibration.picture import picture_of
from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.calibration.sealed import Ledger, SealResult, seal_of
from quant.calibration.sensitivity import with_revalidation
from quant.calibration.split import Split, split_samples
from quant.calibration.validate import ValidationResult, regression_direction, validate
from quant.errors import NotEnoughDataError
from quant.estimator.base import Step
from quant.model.calibration import Calibration
from quant.model.lineage import Lineage
from quant.model.versions import program_versions
from quant.prediction.applicability import acquisition_domain
from quant.recipe.audit_schema import table_of
from quant.recipe.load import load_samples, load_validation_samples
from quant.recipe.pipeline import axis_behind, build_method, build_steps
from quant.recipe.schema import Recipe
from quant.recipe.step_files import step_sources
from quant.regression.method import Method
from quant.spectra.sample_set import NOT_STATED, SampleSet
from quant.statistics.figures import figures_of_merit

TEST_SPECTRA = 3  # kept in the model: the samples with the lowest, middle and highest value


def calibrate(
    recipe: Recipe,
    samples: SampleSet | None = None,
    validation: SampleSet | None = None,
    *,
    ledger: Ledger | None = None,
) -> CalibrationResult:
    """Make one calibration for every analyte of a recipe.

    Parameters
    ----------
    recipe : Recipe
    samples, validation : SampleSet, optional
        Samples at hand, instead of the files that the recipe names.
    ledger : Ledger, optional
        Where looks at validation sets are counted; recipe and criteria are sealed in it before any value is read.

    Returns
    -------
    CalibrationResult
        One entry an analyte: the model, its cross-validation, its validation, and what pictures need.

    Raises
    ------
    QuantError
        Of many kinds; each message says what was found, what was expected and what to do.
    """
    if ledger is not None:
        ledger.seal(recipe)
    everything = load_samples(recipe) if samples is None else samples
    separate = load_validation_samples(recipe) if samples is None and validation is None else validation
    results = tuple(_calibrate_one(recipe, everything, separate, table.name, ledger) for table in recipe.analyte)
    return CalibrationResult(
        title=recipe.title,
        recipe=recipe.text,
        analytes=results,
        spectra_without_values=everything.spectra_without_values,
        values_without_spectra=_unused_values(everything, separate),
    )


def _unused_values(samples: SampleSet, separate: SampleSet | None) -> tuple[str, ...]:
    """Values that found a spectrum neither among the standards nor among the validation samples."""
    other = set(separate.sample_ids) if separate else set()
    return tuple(sample for sample in samples.values_without_spectra if sample not in other)


def _calibrate_one(
    recipe: Recipe, samples: SampleSet, separate: SampleSet | None, name: str, ledger: Ledger | None
) -> AnalyteResult:
    split = split_samples(recipe, samples, separate, name)
    training = split.calibration
    crossed = cross_validate(training, recipe, name)
    factors, rule = _chosen(recipe, crossed)
    axis, quantity = training.spectra.axis, training.spectra.quantity
    unfitted = build_steps(recipe, axis, quantity)
    axis_after = axis_behind(unfitted, axis)
    most = factor_limit(recipe, make_folds(training, recipe.cross_validation), axis_after.size)
    analyte, values = training.analyte(name)
    steps, full, processed = fit_pipeline(training, values, unfitted, build_method(recipe, axis_after, most, name))
    factors, rule = _found(full, factors, rule)
    model = _model(recipe, training, crossed, steps, full.with_factors(factors), factors, processed, name)
    evidence, detection = equip(Evidence(recipe, model, training, values, crossed, processed, axis_after))
    model = evidence.model
    _, _, laboratory = laboratory_of(training, name)
    below = check_below_limit(model, split.below_limit)
    mean = training.mean_by_sample(processed)
    fitted = model.method.predict(mean)
    seal, validated = _validated(recipe, split, model, name, ledger)
    return AnalyteResult(
        analyte=analyte.name,
        unit=analyte.printed_unit,
        model=with_revalidation(model, training, recipe, validated),
        factors=factors,
        rule=rule,
        n_samples=len(training),
        n_spectra=len(training.spectra),
        limits=model.limits,
        uncertainty=model.uncertainty,
        sample_ids=training.sample_ids,
        origins=training.origins,
        reference=values,
        fitted=fitted,
        calibration=figures_of_merit(
            fitted,
            values,
            direction=regression_direction(model),
            unit=analyte.printed_unit,
            kind="RMSEC",
            n_factors=factors,
        ),
        cross_validation=crossed,
        rmsecv_by_origin=_rmsecv_by_origin(training.origins, crossed, factors),
        validation=validated,
        criteria=table_of(recipe.acceptance, name) is not None,
        left_out=split.left_out,
        laboratory=laboratory,
        below_limit=below,
        remarks=tuple(
            remark for found in (laboratory, below, split) if found is not None for remark in found.remarks()
        ),
        audit=audit(evidence, detection, validated, seal),
        chemistry=chemistry_behind(evidence),
        picture=picture_of(model, training, full, axis_after, processed, values),
    )


def _validated(
    recipe: Recipe, split: Split, model: Calibration, name: str, ledger: Ledger | None
) -> tuple[SealResult | None, ValidationResult | None]:
    """Predict the validation samples, if there are any; the look at them is counted before it is taken."""
    if split.validation is None:
        return None, None
    seal = seal_of(recipe, split.calibration, split.validation, name, ledger)
    criteria = table_of(recipe.acceptance, name)
    return seal, validate(model, split.validation, kind=split.kind, how=split.how, acceptance=criteria)


def _rmsecv_by_origin(origins: Sequence[str], crossed: CrossValidationResult, factors: int) -> dict[str, float]:
    """Return the RMSECV of each stated origin, if there is more than one."""
    squared = np.mean((crossed.at(factors)[0] - crossed.reference) ** 2, axis=0)
    stated = [origin for origin in dict.fromkeys(origins) if origin != NOT_STATED]
    if len(stated) < 2:
        return {}
    return {origin: float(np.sqrt(squared[np.array(origins) == origin].mean())) for origin in stated}


def _chosen(recipe: Recipe, crossed: CrossValidationResult) -> tuple[int, str]:
    """Return the number of factors and the rule behind it."""
    asked = recipe.regression.factors
    if not crossed.choices:
        return recipe.regression.fixed_terms(len(recipe.analyte))
    if isinstance(asked, int):
        return asked, "fixed in the recipe"
    return crossed.choices[asked], asked.replace("_", " ")


def _found(full: Method, factors: int, rule: str) -> tuple[int, str]:
    """Return the number of factors that the fit could find of those chosen, and why."""
    most, note = full.factor_counts_[-1], getattr(full, "guard_note_", "")
    if factors <= most:
        return factors, rule
    if most == 0:
        raise NotEnoughDataError(
            f"No factor can be found: {note}. Expected spectra that vary with the reference values; check the files "
            "and the ranges kept."
        )
    return most, f"{rule}, but {note}"


def _model(
    recipe: Recipe,
    training: SampleSet,
    crossed: CrossValidationResult,
    steps: list[Step],
    method: Method,
    factors: int,
    processed: FloatArray,
    name: str,
) -> Calibration:
    analyte, source, _ = laboratory_of(training, name)
    _, values = training.analyte(name)
    freedom = degrees_of_freedom(method, len(training), factors)
    spectra = training.spectra
    rows = _test_rows(training, values)
    position = crossed.factor_counts.index(factors)
    return Calibration(
        analyte=analyte,
        lineage=Lineage(samples=training.sample_ids),
        axis=spectra.axis,
        quantity=spectra.quantity,
        # Notes of the calibration's spectra are no statement about new ones.
        reading={key: value for key, value in recipe.spectra.options().to_dict().items() if key != "notes"},
        domain=acquisition_domain(spectra.notes),
        steps=tuple(steps),
        method=method,
        factors=factors,
        n_samples=len(training),
        limits=applicability_limits(crossed, factors, processed, freedom),
        uncertainty=replace(
            interval_parts(crossed, factors, training, analyte, freedom), laboratory_error_source=source
        ),
        test_spectra=spectra.values[rows],
        test_predictions=method.predict(processed[rows]),
        figures={"RMSECV": float(crossed.rmsecv[position])},
        recipe=recipe.text,
        training=tuple(dict.fromkeys((*spectra.sources, *training.reference_sources, *step_sources(recipe)))),
        versions=program_versions(),
    )


def _test_rows(training: SampleSet, values: FloatArray) -> IntArray:
    """Rows of the first spectra of the samples with the lowest, middle and highest value."""
    order = np.argsort(values, kind="stable")
    samples = order[np.linspace(0, order.size - 1, TEST_SPECTRA).round().astype(int)]
    return np.array([int(np.flatnonzero(training.sample_index == sample)[0]) for sample in samples])
