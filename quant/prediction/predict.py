"""From spectra to values, each with its uncertainty and a statement whether the model applies."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.checks import name_some
from quant.errors import QuantityError
from quant.model.calibration import Calibration
from quant.model.decision_rule import DecisionRule
from quant.model.identity import trace
from quant.prediction.applicability import NOT_APPLICABLE, check_acquisition, judge
from quant.prediction.result import Prediction, PredictionResult
from quant.prediction.uncertainty import (
    error_parts,
    fewer_replicates,
    free_intervals,
    standard_uncertainty,
    true_value_interval,
)
from quant.regression.method import LineMethod
from quant.spectra.sample_set import mean_by_sample
from quant.spectra.spectra_set import SpectraSet
from quant.statistics.intervals import standard_error


@dataclass(frozen=True, eq=False)
class Evaluation:
    """What a model says of samples, as arrays of shape (n_samples,)."""

    value: FloatArray
    standard_error: FloatArray
    low: FloatArray
    high: FloatArray
    leverage: FloatArray
    residual: FloatArray
    spread: FloatArray  # NaN for single spectra
    count: IntArray


def predict(model: Calibration, spectra: SpectraSet, *, rule: DecisionRule | None = None) -> PredictionResult:
    """Predict every sample of a set of spectra.

    Spectra that share a sample ID are averaged after preprocessing; one that was given twice, equal to the last digit,
    counts once.

    Parameters
    ----------
    model : Calibration
    spectra : SpectraSet
        On the model's axis (in either direction), or on another if the model's recipe allows resampling.
    rule : DecisionRule, optional
        A limit to decide against in place of the model's own, see `quant.prediction.decisions.decision_rule`.

    Raises
    ------
    AxisMismatchError, QuantityError, AcquisitionMismatchError
        The spectra were not recorded as the calibration's were.
    """
    check_acquisition(model, spectra)
    spectra, copies = _distinct(spectra)
    aligned = spectra.on_axis(model.axis, resample=bool(model.reading.get("resample", False)))
    samples = list(dict.fromkeys(aligned.sample_ids))
    number = {sample: i for i, sample in enumerate(samples)}
    index = np.array([number[sample] for sample in aligned.sample_ids], dtype=np.intp)
    processed, rule = _processed(model, aligned), rule or model.decision
    found = evaluate(model, processed, index, len(samples))
    mean = mean_by_sample(processed, index, len(samples))
    free, own = free_intervals(model, mean, found.value), model.method.remarks_each(mean)
    rows = tuple(
        _row(
            model,
            sample,
            found,
            i,
            _remarks(model, aligned, np.flatnonzero(index == i), own[i], copies.get(sample, 0)),
            free[i],
            rule,
        )
        for i, sample in enumerate(samples)
    )
    told = rule.told(model.analyte.printed_unit) if rule else ""
    return PredictionResult(model=str(model), rule=told, predictions=rows, lineage=trace(model))


def _processed(model: Calibration, spectra: SpectraSet) -> FloatArray:
    try:
        return model.process(spectra.values)
    except QuantityError as problem:
        lacking = dict.fromkeys(spectra.sample_ids[i] for i in np.flatnonzero(np.isnan(spectra.values).any(axis=1)))
        if not lacking:
            raise
        raise QuantityError(f"{name_some(lacking)}: {problem}") from problem


def _distinct(spectra: SpectraSet) -> tuple[SpectraSet, dict[str, int]]:
    """Leave copies out, which would pass for replicates; return how many of each sample they were, too."""
    seen: set[tuple[str, bytes]] = set()
    keep, copies = np.ones(len(spectra), dtype=bool), dict[str, int]()
    for i, (sample, row) in enumerate(zip(spectra.sample_ids, spectra.values, strict=True)):
        if (sample, row.tobytes()) in seen:
            keep[i], copies[sample] = False, copies.get(sample, 0) + 1
        seen.add((sample, row.tobytes()))
    return (spectra[keep] if copies else spectra), copies


def evaluate(model: Calibration, processed: FloatArray, index: IntArray, n_samples: int) -> Evaluation:
    """Evaluate a model on processed spectra.

    Parameters
    ----------
    model : Calibration
    processed : array of shape (n_spectra, n_points_after)
        Spectra after `Calibration.process`.
    index : array of int, shape (n_spectra,)
        The sample each spectrum belongs to.
    n_samples : int
    """
    method, known = model.method, model.uncertainty
    mean = mean_by_sample(processed, index, n_samples)
    count = np.bincount(index, minlength=n_samples)
    value, leverage = method.predict(mean), method.leverage_each(mean)[-1]
    residual = mean_by_sample(method.residual_each(processed)[-1], index, n_samples)
    extra = fewer_replicates(model, count)
    if isinstance(method, LineMethod):
        inverted = method.inverse_interval(method.signals(mean), known.t)
        error, low, high = inverted.standard_error, inverted.low, inverted.high
        total = np.sqrt(error**2 + extra)
        widen = np.divide(total, error, out=np.ones_like(error), where=error > 0)
        low, high, error = value - (value - low) * widen, value + (high - value) * widen, total
    else:
        error = standard_error(known.s0, leverage, extra)
        low, high = value - known.t * error, value + known.t * error
    deviation = (method.predict(processed) - value[index]) ** 2
    with np.errstate(invalid="ignore", divide="ignore"):
        spread = np.sqrt(mean_by_sample(deviation, index, n_samples) * count / (count - 1))
    return Evaluation(value, error, low, high, leverage, residual, np.where(count > 1, spread, np.nan), count)


def _row(
    model: Calibration,
    sample: str,
    found: Evaluation,
    i: int,
    remarks: tuple[str, ...],
    free: dict[str, Any],
    rule: DecisionRule | None,
) -> Prediction:
    value, error, low, high = (float(a[i]) for a in (found.value, found.standard_error, found.low, found.high))
    residual, leverage, count = float(found.residual[i]), float(found.leverage[i]), int(found.count[i])
    judged = judge(model.limits, residual=residual, leverage=leverage, value=value, standard_error=error)
    true = true_value_interval(model, value, error, low, high)
    spread = float(found.spread[i])
    decided: dict[str, Any] = {"decision": ""}
    if rule is not None:
        from quant.prediction.decisions import decide_sample  # deferred: start-up, most models have no limit

        decided = decide_sample(
            model,
            rule,
            value=value,
            uncertainty=standard_uncertainty(model, error),
            n_spectra=count,
            applicable=judged.verdict != NOT_APPLICABLE,
        )
    return Prediction(
        sample=sample,
        analyte=model.analyte.name,
        value=value,
        unit=model.analyte.printed_unit,
        standard_error=error,
        low=low,
        high=high,
        true_low=None if isinstance(true, str) else true[0],
        true_high=None if isinstance(true, str) else true[1],
        true_note=true if isinstance(true, str) else "",
        **free,
        **error_parts(model, error, leverage, count),
        **decided,
        applicability=judged.verdict,
        reasons=judged.reasons,
        residual=residual / model.limits.residual_warn,
        leverage=leverage / model.limits.leverage_warn,
        n_spectra=count,
        spread=None if np.isnan(spread) else spread,
        remarks=remarks,
        model_state=model.state.name,
    )


def _remarks(
    model: Calibration, spectra: SpectraSet, rows: Sequence[int] | IntArray, own: str, copies: int
) -> tuple[str, ...]:
    notes = [spectra.notes[i] for i in rows]
    found = [f"{note} not stated" for note in model.domain if not all(row.get(note) for row in notes)]
    if any("resampled" in row for row in notes):
        found.append("resampled onto the model's axis")
    if copies:
        found.append(f"{copies} copied spectr{'um' if copies == 1 else 'a'} left out")
    if own:
        found.append(own)
    return tuple(found)
