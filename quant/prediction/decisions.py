"""Decisions on predictions: accept, reject, undecided, and what would settle it."""

import math
from typing import Any

from quant.checks import one_of
from quant.errors import ParameterError
from quant.model.calibration import Calibration
from quant.model.decision_rule import DecisionRule
from quant.statistics.conformity import (
    CANNOT_DECIDE,
    SIDES,
    UNDECIDED,
    decide,
    probability_of_conformity,
    replicates_to_decide,
)

HIGHEST_RISK = 0.5  # beyond it a result is accepted that rather does not conform than does


def decide_sample(
    model: Calibration, rule: DecisionRule, *, value: float, uncertainty: float, n_spectra: int, applicable: bool
) -> dict[str, Any]:
    """Decide one sample; what was decided comes by the names of the fields of `Prediction`.

    Parameters
    ----------
    model : Calibration
    rule : DecisionRule
    value, uncertainty : float
        Prediction and its standard uncertainty: against the true value where that can be told, else against a new
        reference result, which is larger. [unit of the analyte]
    n_spectra : int
        Spectra averaged.
    applicable : bool
        Whether the model applies to the spectrum at all.
    """
    if not (math.isfinite(uncertainty) and math.isfinite(value)):
        remark = "the uncertainty of this value has no bound"
        return {"decision": CANNOT_DECIDE, "limit": rule.limit, "decision_remark": remark}
    found = decide(
        value,
        uncertainty,
        rule.limit,
        rule.factor,
        side=rule.kind,
        degrees_of_freedom=model.uncertainty.degrees_of_freedom,
        smallest_decidable=model.smallest_decidable,
        applicable=applicable,
    )
    remark = ""
    if found.outcome == CANNOT_DECIDE:
        least = f"{model.smallest_decidable:.3g} {model.analyte.printed_unit}".rstrip()
        remark = f"the limit lies below the {model.smallest_from} of {least}"
    elif found.outcome == UNDECIDED:
        remark = _settle(model, rule, value, uncertainty, n_spectra)
    return {
        "decision": found.outcome,
        "limit": rule.limit,
        "uncertainty": uncertainty,
        "guard_band": found.guard_band,
        "conformity": found.conformity,
        "decision_remark": remark,
    }


def _settle(model: Calibration, rule: DecisionRule, value: float, uncertainty: float, n_spectra: int) -> str:
    """Say what would settle an undecided case. Only repeatability shrinks with replicates."""
    known = model.uncertainty
    if known.replicate_sd is None:
        return (
            "whether more spectra would decide cannot be told: the calibration's samples have one each, so that the "
            "repeatability is not known"
        )
    # The stated uncertainty counts no more replicates than the calibration's samples had.
    counted = min(float(n_spectra), known.replicates)
    fixed = math.sqrt(max(uncertainty**2 - known.replicate_sd**2 / counted, 0.0))
    number = replicates_to_decide(value, rule.limit, rule.factor, fixed, known.replicate_sd)
    if number is None:
        return (
            "no number of replicates will decide: the calibration's uncertainty alone spans the limit; a better "
            "calibration would"
        )
    told = f"the mean of {number} spectra would decide, if it stayed at {value:.4g}"
    if number > known.replicates:
        told += (
            f"; the calibration's samples have {known.replicates:.3g} each, and no uncertainty is stated for more: "
            "calibrate with as many"
        )
    return told


def decision_rule(model: Calibration, limit: float, *, kind: str = "upper", risk: float = 0.05) -> DecisionRule:
    """Return a rule given with the samples, in place of the model's own.

    Parameters
    ----------
    model : Calibration
    limit : float
        [unit of the analyte]
    kind : {"upper", "lower"}
    risk : float
        Above 0, at most 0.5.

    Raises
    ------
    ParameterError
        A limit that is not finite, another kind, or a risk out of bounds.
    """
    if not math.isfinite(limit):
        raise ParameterError(f"limit = {limit}; expected a finite number in the unit of the analyte.")
    return DecisionRule(
        limit=limit,
        kind=one_of("kind", kind, SIDES),
        risk=risk,
        factor=guard_factor(risk, model.uncertainty.degrees_of_freedom),
        source="given with the samples",
    )


def guard_factor(risk: float, degrees_of_freedom: int) -> float:
    """Quantile of Student's t at 1 - risk, by bisection of its distribution, so that no library is loaded for it.

    Raises
    ------
    ParameterError
        A risk that is not above 0 and at most 0.5.
    """
    if not 0 < risk <= HIGHEST_RISK:
        raise ParameterError(f"risk = {risk}; expected a probability above 0 and at most {HIGHEST_RISK}.")

    def too_low(t: float) -> bool:
        return probability_of_conformity(0.0, 1.0, t, degrees_of_freedom=degrees_of_freedom) < 1 - risk

    low, high = 0.0, 1.0
    while too_low(high):
        high *= 2
    while (middle := (low + high) / 2) not in (low, high):
        low, high = (middle, high) if too_low(middle) else (low, middle)
    return high
