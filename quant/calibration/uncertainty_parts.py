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

TOO_SMALL = "what is unexplained is too small to be seen beside the other parts"
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
    presentation = _of_means(e, found)
    laboratory = 0.0 if known.laboratory_error is None else known.laboratory_error**2
    leverage = float(e.crossed.at(e.model.factors)[1].mean())
    parts = error_parts(
        known.s0**2,
        leverage,
        presentation=presentation,
        presentation_calibration=presentation,
        laboratory=laboratory,
    )
    # Two standard errors of the difference: a variance with ν degrees of freedom has the relative one √(2/ν).
    freedom = max(0 if found is None else found.pack_degrees_of_freedom or found.scan_degrees_of_freedom, 1)
    chance = math.hypot(
        known.s0**2 * math.sqrt(2 / known.degrees_of_freedom), parts.presentation * math.sqrt(2 / freedom)
    )
    overstated = parts.unexplained < -2 * chance
    remarks = [
        *([] if known.replicate_sd is not None else [ONE_SPECTRUM]),
        *([] if known.laboratory_error is not None else [NO_LABORATORY]),
        *([OVERSTATED] if overstated else [TOO_SMALL] if parts.unexplained < 0 else []),
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
        budget=None
        if overstated
        else _budget(e, presentation * known.replicates, max(parts.unexplained, 0.0), laboratory),
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


def _of_means(e: Evidence, found: ReplicateComponents | None) -> float:
    """Variance that presentation gives the mean of a sample's spectra, mean over samples. [(unit of the analyte)²]"""
    known = e.model.uncertainty
    if known.replicate_sd is None:
        return 0.0
    if found is None or found.pack_variance is None:
        return known.replicate_sd**2 / known.replicates
    note = e.recipe.uncertainty.packing
    packs = [
        len({e.training.spectra.notes[row][note or ""] for row in np.flatnonzero(e.training.sample_index == i)})
        for i in range(len(e.training))
    ]
    return max(found.pack_variance, 0.0) * float(np.mean(1 / np.array(packs))) + found.scan_variance / known.replicates


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
