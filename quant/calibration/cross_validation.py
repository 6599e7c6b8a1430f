"""Cross-validation with the whole pipeline fitted anew in every fold."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import takewhile

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.calibration.companions import with_companions
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.calibration.folds import Folds, make_folds
from quant.checks import name_some
from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.estimator import Step, unfitted_copy
from quant.parallel import progress
from quant.preprocessing.chain import apply_chain, fit_chain
from quant.recipe.pipeline import axis_behind, build_method, build_steps
from quant.recipe.schema import Recipe
from quant.regression.method import Method
from quant.spectra.reference_table import Analyte
from quant.spectra.sample_set import SampleSet
from quant.statistics.factor_rules import RULES

MOST_FACTORS = 15  # max_factors = "auto" never looks further


@dataclass(frozen=True)
class _LeftOut:
    """What one fold says of the samples it left out, each of shape (n_counts, n_left_out)."""

    samples: IntArray
    predicted: FloatArray
    leverage: FloatArray
    residual: FloatArray
    within: FloatArray  # sum of squares of replicates' predictions about their mean, shape (n_counts,)
    note: str


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
    tasks = [(repeat, labels == fold) for repeat, labels in enumerate(folds.repeats) for fold in np.unique(labels)]
    parts = [
        (repeat, _left_out(samples, values, out, steps, build_method(recipe, axis, most, substance.name)))
        for repeat, out in progress(tasks, f"cross-validating {substance.name}")
    ]
    return _collect(samples, substance, values, folds, factor_counts(recipe, most), parts)


def check_calibration_values(name: str, values: FloatArray) -> None:
    """Refuse reference values that nothing can be learnt from.

    Raises
    ------
    NotEnoughDataError
        Fewer than four, or all equal.
    """
    if values.size < 4:
        raise NotEnoughDataError(
            f"{values.size} samples with a value of {name}; at least 4 are needed, 24 or more are usual."
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
                f"of {n_points} points; at most {possible} are possible. Lower max_factors, or add samples."
            )
    most = (
        table.max_factors if isinstance(table.max_factors, int) else min(MOST_FACTORS, max(smallest // 2, 1), possible)
    )
    return max(most, *asked) if asked else most


def factor_counts(recipe: Recipe, most: int) -> tuple[int, ...]:
    """Return the numbers of factors that a cross-validation compares: 0 to `most`, or the one there is."""
    table = recipe.regression
    return tuple(range(most + 1)) if table.on_factors else (table.fixed_terms(len(recipe.analyte))[0],)


def fit_pipeline(
    samples: SampleSet, values: FloatArray, steps: Sequence[Step], method: Method
) -> tuple[list[Step], Method, FloatArray]:
    """Fit steps and regression to samples; replicates count 1/m each, or are averaged if the method wants it.

    Returns
    -------
    steps, method, processed
        Fitted, and the processed spectra of shape (n_spectra, n_points_after).
    """
    weights = samples.weights
    fitted, processed = fit_chain(steps, samples.spectra.values, values[samples.sample_index], weights)
    regression = unfitted_copy(method)
    targets = with_companions(samples, values, method.companions)
    if method.averages_replicates:
        regression.fit(samples.mean_by_sample(processed), targets)
    else:
        regression.fit(processed, targets[samples.sample_index], sample_weight=weights)
    return fitted, regression, processed


def _left_out(
    samples: SampleSet, values: FloatArray, out: BoolArray, steps: Sequence[Step], method: Method
) -> _LeftOut:
    training, left = samples.subset(~out), samples.subset(out)
    fitted_steps, regression, _ = fit_pipeline(training, values[~out], steps, method)
    processed = apply_chain(fitted_steps, left.spectra.values)
    mean = left.mean_by_sample(processed)
    predicted = regression.predict_each(mean)
    single = regression.predict_each(processed)
    return _LeftOut(
        np.flatnonzero(out),
        predicted,
        regression.leverage_each(mean),
        left.mean_by_sample(regression.residual_each(processed).T).T,
        np.sum((single - predicted[:, left.sample_index]) ** 2, axis=1),
        getattr(regression, "guard_note_", ""),
    )


def _collect(
    samples: SampleSet,
    analyte: Analyte,
    values: FloatArray,
    folds: Folds,
    counts: tuple[int, ...],
    parts: Sequence[tuple[int, _LeftOut]],
) -> CrossValidationResult:
    shape = (len(folds.repeats), len(counts), len(samples))
    predicted, leverage, residual = np.empty(shape), np.empty(shape), np.empty(shape)
    for repeat, part in parts:
        for target, source in ((predicted, part.predicted), (leverage, part.leverage), (residual, part.residual)):
            target[repeat][:, part.samples] = _padded(source, len(counts))
    squared = np.mean((predicted - values) ** 2, axis=0)
    mean_squared = squared.mean(axis=1)
    rmsecv = np.sqrt(mean_squared)
    # Standard error of a root: that of the mean square, divided by twice the root.
    se = squared.std(axis=1, ddof=1) / np.sqrt(len(samples)) / (2 * np.where(rmsecv > 0, rmsecv, 1.0))
    freedom = (len(samples.spectra) - len(samples)) * len(folds.repeats)
    within = np.sum([_padded(part.within[:, None], len(counts))[:, 0] for _, part in parts], axis=0)
    return CrossValidationResult(
        analyte=analyte.name,
        unit=analyte.printed_unit,
        scheme=folds.scheme,
        n_samples=len(samples),
        n_units=folds.n_units,
        n_folds=len(parts),
        sample_ids=samples.sample_ids,
        reference=values,
        factor_counts=counts,
        predicted=predicted,
        leverage=leverage,
        residual=residual,
        replicate_variance=within / freedom if freedom else np.full(len(counts), np.nan),
        rmsecv=rmsecv,
        rmsecv_se=se,
        q2=1 - squared.sum(axis=1) / np.sum((values - values.mean()) ** 2),
        choices={name: rule(squared) for name, rule in RULES.items()} if len(counts) > 1 else {},
        guard_notes=_guard_notes([part for _, part in parts]),
    )


def _guard_notes(parts: Sequence[_LeftOut]) -> tuple[str, ...]:
    """Tell once for each number of factors how many folds ended with it; the notes differ in their numbers."""
    stops: dict[int, list[str]] = {}
    for part in parts:
        if part.note:
            stops.setdefault(part.predicted.shape[0] - 1, []).append(part.note)
    return tuple(
        f"{len(notes)} of {len(parts)} folds ended with {count} factor(s); the first of them: {notes[0]}"
        for count, notes in sorted(stops.items())
    )


def _padded(rows: FloatArray, n_counts: int) -> FloatArray:
    """Repeat the last row where a fold found fewer factors: beyond them its model does not change."""
    missing = n_counts - rows.shape[0]
    return np.concatenate([rows, np.repeat(rows[-1:], missing, axis=0)]) if missing else rows
