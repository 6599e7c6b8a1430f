"""Do the check spectra lie inside the calibration's domain?"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.checks import name_some
from quant.errors import AcquisitionMismatchError
from quant.model.calibration import Calibration
from quant.prediction.applicability import APPLICABLE, NOT_APPLICABLE, WARNING, check_acquisition, judge
from quant.prediction.predict import Evaluation, evaluate
from quant.regression.factor_regression import FactorRegression
from quant.result import Result, documented
from quant.spectra.sample_set import mean_by_sample
from quant.spectra.spectra_set import SpectraSet
from quant.statistics.hotelling import t_squared_from_leverage
from quant.statistics.nearest_neighbour import gap_limit, nearest_neighbour_distance
from quant.text_table import format_columns


@dataclass(frozen=True, kw_only=True, eq=False)
class DomainRow(Result):
    """One sample."""

    sample: str = documented("Sample ID")
    verdict: str = documented('"applicable", "warning" or "not applicable", as at prediction')
    t_squared: float = documented("Hotelling's T² = (n − 1)(h − 1/n)")
    leverage_ratio: float = documented("Leverage by its warning limit")
    residual_ratio: float = documented("Residual spectrum (Q) by its warning limit")
    nearest_ratio: float | None = documented(
        "Distance to the nearest calibration standard by the largest gap among them; null without their spectra"
    )
    reasons: tuple[str, ...] = documented("What exceeds its limit")


@dataclass(frozen=True, kw_only=True, eq=False)
class DomainEvidence(Result):
    """Whether spectra lie inside the calibration's domain."""

    rows: tuple[DomainRow, ...] = documented("One a sample, in the order they were read")
    acquisition: str = documented("How the recording differs from the calibration's; empty if it does not")
    n_outside: int = documented("Samples to which the model does not apply")
    n_warnings: int = documented("Samples with a warning")
    median_residual_ratio: float = documented("Median over samples of the residual by its warning limit")
    inside: bool = documented("Whether the recording is the calibration's and the model applies to every sample")
    words: tuple[str, ...] = documented("The findings in words")

    def __str__(self) -> str:
        """The findings, then the samples."""
        header = ("sample", "verdict", "T²", "leverage / limit", "residual / limit", "nearest / gap")
        rows = [
            (r.sample, r.verdict, r.t_squared, r.leverage_ratio, r.residual_ratio, r.nearest_ratio) for r in self.rows
        ]
        return "\n".join([*self.words, format_columns(header, rows)])


def domain_evidence(model: Calibration, spectra: SpectraSet, standards: SpectraSet | None = None) -> DomainEvidence:
    """Compare spectra with the model's domain: T² and leverage, residual, nearest neighbour, way of recording.

    Another resolution, technique or accessory is reported here, not refused as at prediction.

    Parameters
    ----------
    model : Calibration
    spectra : SpectraSet
        Spectra that share a sample ID are averaged after preprocessing.
    standards : SpectraSet, optional
        Spectra of the calibration standards, which the model does not keep: with them the distance to the nearest one
        is judged as well (models with factors only).

    Raises
    ------
    AxisMismatchError, QuantityError
        The spectra are not on the model's axis or not of its quantity.
    """
    acquisition = _acquisition(model, spectra)
    samples, index, processed = _processed(model, spectra)
    found = evaluate(model, processed, index, len(samples))
    t_squared = t_squared_from_leverage(found.leverage, model.n_samples)
    nearest = _nearest(model, mean_by_sample(processed, index, len(samples)), standards)
    rows = [
        _row(model, sample, found, i, float(t_squared[i]), None if nearest is None else float(nearest[i]))
        for i, sample in enumerate(samples)
    ]
    outside = [r for r in rows if r.verdict == NOT_APPLICABLE]
    warned = [r for r in rows if r.verdict not in (APPLICABLE, NOT_APPLICABLE)]
    return DomainEvidence(
        rows=tuple(rows),
        acquisition=acquisition,
        n_outside=len(outside),
        n_warnings=len(warned),
        median_residual_ratio=float(np.median([r.residual_ratio for r in rows])),
        inside=not outside and not acquisition,
        words=_words(rows, outside, warned, acquisition),
    )


def _processed(model: Calibration, spectra: SpectraSet) -> tuple[list[str], IntArray, FloatArray]:
    """Sample IDs, the sample each spectrum belongs to, and the spectra behind the preprocessing."""
    aligned = spectra.on_axis(model.axis, resample=bool(model.reading.get("resample", False)))
    samples = list(dict.fromkeys(aligned.sample_ids))
    place = {sample: i for i, sample in enumerate(samples)}
    index = np.array([place[sample] for sample in aligned.sample_ids], dtype=np.intp)
    return samples, index, model.process(aligned.values)


def _row(
    model: Calibration, sample: str, found: Evaluation, i: int, t_squared: float, nearest: float | None
) -> DomainRow:
    residual, leverage, value, error = (
        float(a[i]) for a in (found.residual, found.leverage, found.value, found.standard_error)
    )
    judged = judge(model.limits, residual=residual, leverage=leverage, value=value, standard_error=error)
    gap = nearest is not None and nearest > 1.0
    return DomainRow(
        sample=sample,
        verdict=WARNING if gap and judged.verdict == APPLICABLE else judged.verdict,
        t_squared=t_squared,
        leverage_ratio=leverage / model.limits.leverage_warn,
        residual_ratio=residual / model.limits.residual_warn,
        nearest_ratio=nearest,
        reasons=(*judged.reasons, *(("in a gap between the calibration standards",) if gap else ())),
    )


def _nearest(model: Calibration, mean: FloatArray, standards: SpectraSet | None) -> FloatArray | None:
    """Distance to the nearest calibration standard by the largest gap among them (both as squares)."""
    method = model.method
    if standards is None or not isinstance(method, FactorRegression) or method.n_factors_ < 1:
        return None
    samples, index, processed = _processed(model, standards)
    known = mean_by_sample(processed, index, len(samples))
    scores, own = ((x - method.x_mean_) @ method.rotations_ for x in (mean, known))
    return nearest_neighbour_distance(scores, own) / gap_limit(own)


def _words(
    rows: Sequence[DomainRow], outside: Sequence[DomainRow], warned: Sequence[DomainRow], acquisition: str
) -> tuple[str, ...]:
    words = [acquisition] if acquisition else []
    if outside:
        named = "; ".join(f"{r.sample} ({', '.join(r.reasons)})" for r in outside[:5])
        words.append(f"The model does not apply to {len(outside)} of {len(rows)} check samples: {named}")
    if warned:
        words.append(f"Warnings for {len(warned)} of {len(rows)} check samples: {name_some(r.sample for r in warned)}")
    if not outside and not warned:
        words.append(f"All {len(rows)} check samples lie inside the model's domain")
    return tuple(words)


def _acquisition(model: Calibration, spectra: SpectraSet) -> str:
    """Say how the recording differs from the calibration's."""
    try:
        check_acquisition(model, spectra)
    except AcquisitionMismatchError as clash:
        return str(clash)
    return ""
