"""The two ways to leave samples out: fit the whole pipeline again in every fold, or all folds at once."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.calibration.companions import with_companions
from quant.calibration.folds import Folds
from quant.estimator.base import Step, unfitted_copy
from quant.parallel import progress
from quant.preprocessing.chain import apply_chain, fit_chain
from quant.regression.fast_cross_validation import fast_left_out
from quant.regression.method import Method
from quant.spectra.sample_set import SampleSet


@dataclass(frozen=True, kw_only=True)
class LeftOut:
    """What models that did not see a sample say of it, with every number of factors."""

    predicted: FloatArray  # (n_repeats, n_counts, n_samples) [unit of the analyte]
    leverage: FloatArray  # the same shape, 1/n included
    residual: FloatArray  # the same shape [(unit of the processed spectra)²]
    replicate_variance: FloatArray  # (n_counts,), pooled; NaN without replicates [(unit of the analyte)²]
    stopped: tuple[int, ...]  # factors found in each fold
    notes: tuple[str, ...]  # why a fold ended early, or empty


@dataclass(frozen=True)
class _Fold:
    """What one fold says of the samples it left out, each of shape (n_counts, n_left_out)."""

    repeat: int
    samples: IntArray
    predicted: FloatArray
    leverage: FloatArray
    residual: FloatArray
    within: FloatArray  # sum of squares of replicates' predictions about their mean, shape (n_counts,)
    note: str


def all_folds_at_once(
    samples: SampleSet,
    values: FloatArray,
    folds: Folds,
    steps: Sequence[Step],
    method: Method,  # noqa: ARG001 (the signature of refit_every_fold; PLS has no other setting)
    n_counts: int,
) -> LeftOut:
    """Cross-validate PLS behind steps that learn nothing from other spectra, all folds together.

    Parameters
    ----------
    samples : SampleSet
    values : array of shape (n_samples,)
        Reference values. [unit of the analyte]
    folds : Folds
    steps : sequence of Step
        Not fitted; none may learn from other spectra.
    method : Method
        PLS, not fitted.
    n_counts : int
        Numbers of factors to answer for: 0 to n_counts − 1.
    """
    processed = fit_chain(steps, samples.spectra.values)[1]
    index = samples.sample_index
    labels = [repeat[index] for repeat in folds.repeats]
    found = fast_left_out(processed, values[index], labels, n_counts - 1, samples.weights, index)
    freedom = (index.size - len(samples)) * len(folds.repeats)
    return LeftOut(
        predicted=found.predicted,
        leverage=found.leverage,
        residual=found.residual,
        replicate_variance=_pooled(found.within.sum(axis=0), freedom),
        stopped=tuple(found.stopped.tolist()),
        notes=found.notes,
    )


def refit_every_fold(
    samples: SampleSet, values: FloatArray, folds: Folds, steps: Sequence[Step], method: Method, n_counts: int
) -> LeftOut:
    """Fit steps and regression again in every fold; parameters as of `all_folds_at_once`, any steps, any method."""
    tasks = [(repeat, labels == fold) for repeat, labels in enumerate(folds.repeats) for fold in np.unique(labels)]
    parts = [
        _one_fold(samples, values, repeat, out, steps, method) for repeat, out in progress(tasks, "cross-validating")
    ]
    shape = (len(folds.repeats), n_counts, len(samples))
    predicted, leverage, residual = np.empty(shape), np.empty(shape), np.empty(shape)
    for part in parts:
        for target, source in ((predicted, part.predicted), (leverage, part.leverage), (residual, part.residual)):
            target[part.repeat][:, part.samples] = _padded(source, n_counts)
    within = np.sum([_padded(part.within[:, None], n_counts)[:, 0] for part in parts], axis=0)
    return LeftOut(
        predicted=predicted,
        leverage=leverage,
        residual=residual,
        replicate_variance=_pooled(within, (len(samples.spectra) - len(samples)) * len(folds.repeats)),
        stopped=tuple(part.predicted.shape[0] - 1 for part in parts),
        notes=tuple(part.note for part in parts),
    )


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


def _one_fold(
    samples: SampleSet, values: FloatArray, repeat: int, out: BoolArray, steps: Sequence[Step], method: Method
) -> _Fold:
    training, left = samples.subset(~out), samples.subset(out)
    fitted_steps, regression, _ = fit_pipeline(training, values[~out], steps, method)
    processed = apply_chain(fitted_steps, left.spectra.values)
    mean = left.mean_by_sample(processed)
    predicted = regression.predict_each(mean)
    single = regression.predict_each(processed)
    return _Fold(
        repeat,
        np.flatnonzero(out),
        predicted,
        regression.leverage_each(mean),
        left.mean_by_sample(regression.residual_each(processed).T).T,
        np.sum((single - predicted[:, left.sample_index]) ** 2, axis=1),
        getattr(regression, "guard_note_", ""),
    )


def _pooled(within: FloatArray, freedom: int) -> FloatArray:
    return within / freedom if freedom else np.full(within.size, np.nan)


def _padded(rows: FloatArray, n_counts: int) -> FloatArray:
    """Repeat the last row where a fold found fewer factors: beyond them its model does not change."""
    missing = n_counts - rows.shape[0]
    return np.concatenate([rows, np.repeat(rows[-1:], missing, axis=0)]) if missing else rows
