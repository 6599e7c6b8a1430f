"""What the error of a calibration is made of, and what would make it smaller."""

import math
from dataclasses import dataclass, replace

import numpy as np

from quant.calibration.evidence import Evidence
from quant.calibration.validate import ValidationResult
from quant.errors import NotEnoughDataError, SampleMismatchError
from quant.result import Result, documented
from quant.statistics.error_budget import ErrorBudget, Situation, error_budget
from quant.statistics.error_parts import CorrectedRmsep, ErrorParts, corrected_rmsep, error_parts
from quant.statistics.replicate_parts import ReplicateComponents, replicate_components

ONE_SPECTRUM = "every calibration sample has one spectrum: presentation is part of what is unexplained"
NO_LABORATORY = "no laboratory error is known: it is part of what is unexplained"
OVERSTATED = (
    "the parts known add up to more than the left-out errors show: one of them is overstated, or the set is too small "
    "to tell; no budget"
)


@dataclass(frozen=True, kw_only=True, eq=False)
class UncertaintyResult(Result):
    """Parts of the error of one calibration."""

    unit: str = documented("Unit of the analyte")
    replicates: ReplicateComponents | None = documented("Scatter of replicates' predictions: re-scans, re-packs")
    packing: str = documented("Note that tells re-packs apart; empty where all replicates count as one kind")
    white_noise_sd: float | None = documented(
        "What the scatter of one spectrum's prediction would be, were the replicates' differences independent from "
        "point to point; the true one counts their covariance, b'Σb",
        "unit of the analyte",
    )
    parts: ErrorParts = documented("Variances of a result at the mean leverage, as many replicates as the standards")
    mean_leverage: float = documented("That leverage, 1/n included, of left-out samples")
    corrected_cross_validation: CorrectedRmsep | None = documented("RMSECV against reference and against true values")
    corrected_validation: CorrectedRmsep | None = documented("RMSEP against reference and against true values")
    budget: ErrorBudget | None = documented("Which part dominates, and what would help most")
    remarks: tuple[str, ...] = documented("What could not be told apart, and why")


def split_uncertainty(evidence: Evidence, validated: ValidationResult | None) -> UncertaintyResult:
    """Split the error of one calibration into its parts.

    Parameters
    ----------
    evidence : Evidence
    validated : ValidationResult or None
    """
    e, known = evidence, evidence.model.uncertainty
    found, packing = _replicates(e)
    scatter = 0.0 if known.replicate_sd is None else known.replicate_sd**2
    laboratory = 0.0 if known.laboratory_error is None else known.laboratory_error**2
    leverage = float(e.crossed.at(e.model.factors)[1].mean())
    parts = error_parts(
        known.s0**2,
        leverage,
        presentation=scatter / known.replicates,
        presentation_calibration=scatter / known.replicates,
        laboratory=laboratory,
    )
    remarks = [
        *([] if known.replicate_sd is not None else [ONE_SPECTRUM]),
        *([] if known.laboratory_error is not None else [NO_LABORATORY]),
        *([OVERSTATED] if parts.unexplained < 0 else []),
    ]
    return UncertaintyResult(
        unit=e.unit,
        replicates=found,
        packing=packing,
        white_noise_sd=None if found is None else _white_noise(e),
        parts=parts,
        mean_leverage=leverage,
        corrected_cross_validation=_corrected(
            float(e.crossed.rmsecv[e.crossed.factor_counts.index(e.model.factors)]), len(e.training), e
        ),
        corrected_validation=None
        if validated is None
        else _corrected(validated.figures.rmse, validated.figures.n_samples, e),
        budget=_budget(e, scatter, parts.unexplained, laboratory),
        remarks=tuple(remarks),
    )


def _replicates(e: Evidence) -> tuple[ReplicateComponents | None, str]:
    """Components of the scatter of replicates' predictions by the fitted model."""
    note = e.recipe.uncertainty.packing
    marks = None
    if note is not None:
        rows = e.training.spectra.notes
        missing = sum(1 for row in rows if not row.get(note))
        if missing:
            raise SampleMismatchError(
                f"packing = {note!r} under [uncertainty], but {missing} of {len(rows)} spectra have no such note; "
                "expected one each. Supply it, as a group of sample_pattern for one, or remove the key."
            )
        marks = [row[note] for row in rows]
    try:
        predicted = e.model.method.predict(e.processed)
        return replicate_components(predicted, e.training.sample_index, marks), note or ""
    except NotEnoughDataError:
        return None, note or ""


def _white_noise(e: Evidence) -> float | None:
    """SD of a prediction from the replicates' variances alone, their covariances left out."""
    if e.vector is None:
        return None
    deviation = e.processed - e.mean[e.training.sample_index]
    freedom = len(e.processed) - len(e.training)
    variances = np.sum(deviation**2, axis=0) / freedom
    return math.sqrt(float(variances @ e.vector**2))


def _corrected(rmse: float, n_samples: int, e: Evidence) -> CorrectedRmsep | None:
    laboratory = e.model.uncertainty.laboratory_error
    return None if laboratory is None else corrected_rmsep(rmse, laboratory, n_samples)


def _budget(e: Evidence, scatter: float, unexplained: float, laboratory: float) -> ErrorBudget | None:
    if unexplained < 0:
        return None
    known = e.model.uncertainty
    try:
        found = error_budget(
            Situation(
                presentation=scatter,
                unexplained=unexplained,
                laboratory=laboratory,
                n_standards=len(e.training),
                n_factors=max(e.n_terms - 1, 0),
                replicates=known.replicates,
            )
        )
    except NotEnoughDataError:
        return None
    # What is not known cannot be told to help or not.
    silent = [
        *([] if known.replicate_sd is not None else ["twice the replicates"]),
        *([] if known.laboratory_error is not None else ["twice the laboratory values a standard"]),
    ]
    return replace(found, steps=tuple(step for step in found.steps if step.name not in silent))
