"""Cross-validation with the whole pipeline learnt again in every fold."""

from collections.abc import Sequence
from itertools import takewhile

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.calibration.folds import Folds, make_folds
from quant.calibration.leave_out import LeftOut, all_folds_at_once, refit_every_fold
from quant.checks import name_some
from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.estimator.base import Step, unfitted_copy
from quant.preprocessing.chain import chain_learns
from quant.recipe.pipeline import axis_behind, build_method, build_steps
from quant.recipe.schema import Recipe
from quant.regression.pls import PLS
from quant.spectra.reference_table import Analyte
from quant.spectra.sample_set import SampleSet
from quant.statistics.factor_rules import RULES

MOST_FACTORS = 15  # max_factors = "auto" never looks further
SMALLEST_RANGE = 1e-100  # of reference values


def cross_validate(samples: SampleSet, recipe: Recipe, analyte: str | None = None) -> CrossValidationResult:
    """Leave samples out in turn, fit the recipe's whole pipeline without them, and predict them.

    Parameters
    ----------
    samples : SampleSet
        Calibration samples, every one with a value of the analyte.
    recipe : Recipe
    analyte : str, optional
        Default: the first one of the set.

    Raises
    ------
    NotEnoughDataError
        Fewer than four samples, or reference values that do not differ.
    ParameterError
        More factors asked for than the training sets can carry.
    QuantityError
        Spectra with missing points where they are needed.
    """
    substance, values = samples.analyte(analyte or samples.analytes[0].name)
    check_calibration_values(substance.name, values)
    folds = make_folds(samples, recipe.cross_validation)
    steps = build_steps(recipe, samples.spectra.axis, samples.spectra.quantity)
    axis = axis_behind(steps, samples.spectra.axis)
    check_missing_points(samples, steps)
    most = factor_limit(recipe, folds, axis.size)
    method, counts = build_method(recipe, axis, most, substance.name), factor_counts(recipe, most)
    # Equal to 1e-8 where both apply; refitting takes every fold by itself and is needed where a step learns in it.
    leave_out = all_folds_at_once if isinstance(method, PLS) and not chain_learns(steps) else refit_every_fold
    found = leave_out(samples, values, folds, steps, method, len(counts))
    return _collect(substance, values, samples.sample_ids, folds, counts, found)


def check_calibration_values(name: str, values: FloatArray) -> None:
    """Refuse reference values that nothing can be learnt from.

    Raises
    ------
    NotEnoughDataError
        Fewer than four, all equal, or too small to be squared.
    """
    if values.size < 4:
        raise NotEnoughDataError(
            f"{values.size} samples with a value of {name}; at least 4 are needed, 24 or more are usual."
        )
    if 0 < np.ptp(values) < SMALLEST_RANGE:
        raise NotEnoughDataError(
            f"The reference values of {name} span {np.ptp(values):.3g}; expected {SMALLEST_RANGE:g} or more, since "
            "squares of smaller numbers vanish. State them in a smaller unit."
        )
    if np.ptp(values) == 0:
        raise NotEnoughDataError(
            f"All {values.size} reference values of {name} are {values[0]:g}; expected values that span the range to "
            "predict. Check the column, or add standards."
        )


def check_missing_points(samples: SampleSet, steps: Sequence[Step]) -> None:
    """Refuse spectra that lack points where a step or the regression needs them.

    Raises
    ------
    QuantityError
        Points are missing that no step leaves out first.
    """
    values = samples.spectra.values
    for step in takewhile(lambda step: step.allow_nan, steps):
        values = unfitted_copy(step).fit_transform(values)
    lacking = np.isnan(values).any(axis=1)
    if lacking.any():
        named = dict.fromkeys(samples.sample_ids[i] for i in samples.sample_index[lacking])
        raise QuantityError(
            f"{int(lacking.sum())} of {lacking.size} spectra have missing points: {name_some(named)}; expected a "
            "number at every point that is used. Leave those points out by keep_ranges or leave_out_ranges first, or "
            "measure again."
        )


def factor_limit(recipe: Recipe, folds: Folds, n_points: int) -> int:
    """Return the largest number of factors to look at.

    Raises
    ------
    NotEnoughDataError
        A training set of one sample.
    ParameterError
        The recipe asks for more than the smallest training set, or the points, can carry.
    """
    table = recipe.regression
    smallest = min(int(labels.size - np.bincount(labels).max()) for labels in folds.repeats)
    possible = min(smallest - 1, n_points)
    if not table.on_factors:
        return 1
    if possible < 1:
        raise NotEnoughDataError(
            f"The smallest training set of the cross-validation has {smallest} sample(s); at least 2 are needed. "
            "Choose another scheme or group under [cross_validation], or add samples."
        )
    asked = [number for number in (table.max_factors, table.factors) if isinstance(number, int)]
    for number in asked:
        if number > possible:
            raise ParameterError(
                f"{number} factors asked for under [regression], but the smallest training set has {smallest} samples "
                f"of {n_points} points; at most {possible} are possible. Lower factors or max_factors, or add "
                "samples."
            )
    most = (
        table.max_factors if isinstance(table.max_factors, int) else min(MOST_FACTORS, max(smallest // 2, 1), possible)
    )
    return max(most, *asked) if asked else most


def factor_counts(recipe: Recipe, most: int) -> tuple[int, ...]:
    """Return the numbers of factors that a cross-validation compares: 0 to `most`, or the one there is."""
    table = recipe.regression
    return tuple(range(most + 1)) if table.on_factors else (table.fixed_terms(len(recipe.analyte))[0],)


def _collect(
    analyte: Analyte,
    values: FloatArray,
    sample_ids: tuple[str, ...],
    folds: Folds,
    counts: tuple[int, ...],
    found: LeftOut,
) -> CrossValidationResult:
    squared = np.mean((found.predicted - values) ** 2, axis=0)
    rmsecv = np.sqrt(squared.mean(axis=1))
    # Standard error of a root: that of the mean square, divided by twice the root.
    se = squared.std(axis=1, ddof=1) / np.sqrt(values.size) / (2 * np.where(rmsecv > 0, rmsecv, 1.0))
    return CrossValidationResult(
        analyte=analyte.name,
        unit=analyte.printed_unit,
        scheme=folds.scheme,
        n_samples=values.size,
        n_units=folds.n_units,
        n_folds=len(found.notes),
        sample_ids=sample_ids,
        reference=values,
        factor_counts=counts,
        predicted=found.predicted,
        leverage=found.leverage,
        residual=found.residual,
        replicate_variance=found.replicate_variance,
        rmsecv=rmsecv,
        rmsecv_se=se,
        q2=1 - squared.sum(axis=1) / np.sum((values - values.mean()) ** 2),
        choices={name: rule(squared) for name, rule in RULES.items()} if len(counts) > 1 else {},
        guard_notes=_guard_notes(found),
    )


def _guard_notes(found: LeftOut) -> tuple[str, ...]:
    """Tell once for each number of factors how many folds ended with it; the notes differ in their numbers."""
    stops: dict[int, list[str]] = {}
    for count, note in zip(found.stopped, found.notes, strict=True):
        if note:
            stops.setdefault(count, []).append(note)
    return tuple(
        f"{len(notes)} of {len(found.notes)} folds ended with {count} factor(s); the first of them: {notes[0]}"
        for count, notes in sorted(stops.items())
    )
