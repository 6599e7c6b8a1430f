"""The audit of one calibration: what it needs to decide, and every figure that standards and auditors ask for."""

from dataclasses import dataclass, replace

from quant.calibration.detection_limits import DetectionResult, detect
from quant.calibration.diagnostics import DiagnosticsResult, diagnose
from quant.calibration.evidence import Evidence
from quant.calibration.left_out_models import left_out_models
from quant.calibration.sealed import SealResult
from quant.calibration.standards_tables import StandardTable, standards_tables
from quant.calibration.stated_limit import stated_limit
from quant.calibration.uncertainty_parts import UncertaintyResult, split_uncertainty
from quant.calibration.validate import ValidationResult
from quant.model.decision_rule import DecisionRule
from quant.recipe.audit_schema import DecisionTable, table_of
from quant.recipe.reference_schema import AnalyteTable
from quant.result import Result, documented
from quant.statistics.quantiles import t_quantile


@dataclass(frozen=True, kw_only=True)
class DecisionLimit(Result):
    """The limit that results of this calibration are decided against."""

    told: str = documented("The limit in one line")
    limit: float = documented("The limit", "unit of the analyte")
    kind: str = documented("upper or lower")
    risk: float = documented("Accepted probability that a result just accepted does not conform")
    factor: float = documented("Student's t at 1 - risk: the guard band is this times the standard uncertainty")
    decidable: bool = documented("Whether the method can see so little at all")
    remark: str = documented("Why it cannot, or that the limit lies outside the calibrated range; or empty")


@dataclass(frozen=True, kw_only=True, eq=False)
class AuditResult(Result):
    """Diagnostics, uncertainty, detection, standards, seal and decision limit of one calibration."""

    diagnostics: DiagnosticsResult = documented("Which samples stand out, what the model looks at, how errors behave")
    uncertainty: UncertaintyResult = documented("What the error is made of, and what would make it smaller")
    free_intervals: str = documented("Distribution-free intervals of the model: which, or why none")
    detection: DetectionResult | None = documented("What can be told from a blank, or none")
    standards: tuple[StandardTable, ...] = documented("Validation against standards, one entry a standard")
    seal: SealResult | None = documented("Whether criteria were fixed beforehand and how often was looked; or none")
    decision: DecisionLimit | None = documented("The limit results are decided against, or none")


def equip(evidence: Evidence) -> tuple[Evidence, DetectionResult | None]:
    """Give the model what it needs to decide and to state distribution-free intervals; return its detection figures.

    Parameters
    ----------
    evidence : Evidence
    """
    e, model = evidence, evidence.model
    found, note = left_out_models(e.recipe, e.training, e.values, e.crossed, model.steps, model.method, e.processed)
    detection = detect(model, e.values, e.mean, e.crossed)
    analyte = next(each for each in e.recipe.analyte if each.name == model.analyte.name)
    table: DecisionTable | None = table_of(e.recipe.decision, model.analyte.name)
    equipped = replace(
        model,
        left_out=found,
        left_out_note=note,
        smallest_decidable=None if detection is None else detection.smallest_decidable,
        smallest_from="" if detection is None else detection.smallest_from,
        decision=None if table is None else rule_of(table, analyte, model.uncertainty.degrees_of_freedom),
    )
    return replace(e, model=equipped), detection


def rule_of(table: DecisionTable, analyte: AnalyteTable, degrees_of_freedom: int) -> DecisionRule:
    """Return the rule that a recipe's table states, with the factor of its guard band.

    Parameters
    ----------
    table : DecisionTable
    analyte : AnalyteTable
    degrees_of_freedom : int
        Of the standard uncertainty.
    """
    limit, source = stated_limit(table, analyte)
    return DecisionRule(
        limit=limit,
        kind=table.kind,
        risk=table.risk,
        factor=t_quantile(1 - table.risk, degrees_of_freedom),
        name=table.name or "",
        source=table.source or source,
    )


def audit(
    evidence: Evidence,
    detection: DetectionResult | None,
    validated: ValidationResult | None,
    seal: SealResult | None,
) -> AuditResult:
    """Audit one calibration.

    Parameters
    ----------
    evidence : Evidence
        With the model as `equip` returned it.
    detection : DetectionResult or None
    validated : ValidationResult or None
    seal : SealResult or None
    """
    left_out = evidence.model.left_out
    return AuditResult(
        diagnostics=diagnose(evidence, validated),
        uncertainty=split_uncertainty(evidence, validated),
        free_intervals=evidence.model.left_out_note if left_out is None else left_out.note,
        detection=detection,
        standards=standards_tables(evidence, validated, detection),
        seal=seal,
        decision=_limit(evidence),
    )


def _limit(e: Evidence) -> DecisionLimit | None:
    rule, least = e.model.decision, e.model.smallest_decidable
    if rule is None:
        return None
    decidable = least is None or rule.limit >= least
    lowest, highest = e.model.limits.lowest, e.model.limits.highest
    remark = ""
    if not decidable:
        remark = f"it lies below the {e.model.smallest_from} of {least:.3g} {e.unit}".rstrip()
    elif not lowest <= rule.limit <= highest:
        remark = f"the limit lies outside the calibrated range {lowest:g} to {highest:g} {e.unit}".rstrip()
        remark += ": values near it are not applicable"
    return DecisionLimit(
        told=rule.told(e.unit),
        limit=rule.limit,
        kind=rule.kind,
        risk=rule.risk,
        factor=rule.factor,
        decidable=decidable,
        remark=remark,
    )
