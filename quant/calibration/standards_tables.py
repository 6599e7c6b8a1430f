"""Validation against standards: ICH Q2(R2), ASTM E1655, ISO 12099, each row with criterion, found, verdict and source.

The requirements are from memory of the standards named: confirm them against the edition in force.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from quant.calibration.detection_limits import DetectionResult
from quant.calibration.evidence import Evidence
from quant.calibration.requirement import FROM_MEMORY, NOT_TOLD, Requirement, fulfilled, judged
from quant.calibration.split import INDEPENDENT
from quant.calibration.validate import ValidationResult
from quant.errors import NotEnoughDataError, SampleMismatchError
from quant.result import Result, documented
from quant.statistics.figures import Figures
from quant.statistics.influence import reference_agreement
from quant.statistics.normality import normality
from quant.statistics.quantiles import f_quantile, t_quantile
from quant.statistics.replicate_parts import replicate_components

E1655, ISO12099, ICH = "ASTM E1655-05(2012)", "ISO 12099:2017, clause 6", "ICH Q2(R2), November 2023"
FEWEST_CALIBRATION, FEWEST_VALIDATION = 24, 20
SPAN = 0.95  # share of the calibrated range that validation samples have to span
FEWEST_DETERMINATIONS, LEVELS = 9, 3
NO_VALIDATION = "there are no validation samples"


@dataclass(frozen=True, kw_only=True)
class StandardTable(Result):
    """The requirements of one standard."""

    standard: str = documented("Standard and edition")
    note: str = documented("How far the requirements are to be trusted")
    rows: tuple[Requirement, ...] = documented("One entry a requirement")


def standards_tables(
    evidence: Evidence, validated: ValidationResult | None, detection: DetectionResult | None
) -> tuple[StandardTable, ...]:
    """Hold one calibration against each standard.

    Parameters
    ----------
    evidence : Evidence
    validated : ValidationResult or None
    detection : DetectionResult or None
    """
    tables = (
        (ICH, _ich(evidence, validated, detection)),
        (E1655, _e1655(evidence, validated)),
        (ISO12099, _iso12099(evidence, validated)),
    )
    return tuple(StandardTable(standard=name, note=FROM_MEMORY, rows=tuple(rows)) for name, rows in tables)


def _e1655(e: Evidence, validated: ValidationResult | None) -> list[Requirement]:
    k, row = max(e.n_terms - 1, 1), _rows_of(E1655)
    centred = int(e.n_terms > 1)
    needed = max(6 * (k + centred), FEWEST_CALIBRATION)
    rows = [row("calibration samples", len(e.training), f"at least {needed}", judged(len(e.training), least=needed))]
    if validated is None:
        return [*rows, row("validation", None, "independent samples", NOT_TOLD, remark=NO_VALIDATION)]
    figures, needed = validated.figures, max(4 * k, FEWEST_VALIDATION)
    share = float(np.ptp(validated.reference)) / (e.model.limits.highest - e.model.limits.lowest)
    separate = fulfilled(met=validated.kind == INDEPENDENT)
    rows += [
        row("validation samples are separate material", validated.kind, INDEPENDENT, separate),
        row("validation samples", figures.n_samples, f"at least {needed}", judged(figures.n_samples, least=needed)),
        row("span over the calibrated range", share, f"at least {SPAN:g}", judged(share, least=SPAN)),
        _bias_row(row, figures),
    ]
    try:
        sec = _sec(e)
        agreement = reference_agreement(
            validated.predicted, validated.reference, validated.leverage, sec, e.model.uncertainty.degrees_of_freedom
        )
    except NotEnoughDataError as problem:
        return [*rows, row("agreement within t·SEC·√(1 + h)", None, "95 % of samples", NOT_TOLD, remark=str(problem))]
    share = agreement.n_within / agreement.n_samples
    rows.append(
        row(
            "share of samples within t·SEC·√(1 + h)",
            share,
            f"at least {agreement.share_required:g}",
            fulfilled(met=agreement.passed),
        )
    )
    return rows


def _iso12099(e: Evidence, validated: ValidationResult | None) -> list[Requirement]:
    row = _rows_of(ISO12099)
    if validated is None:
        return [row("independent test set", None, "given", NOT_TOLD, remark=NO_VALIDATION)]
    figures, rows = validated.figures, []
    rows.append(_bias_row(row, figures))
    limit = None
    if figures.sep is not None:
        ratio = f_quantile(0.95, figures.n_samples, e.model.uncertainty.degrees_of_freedom)
        limit = _sec(e) * math.sqrt(ratio)
    rows.append(
        row(
            "SEP against the unexplained-error limit SEC·√F",
            figures.sep,
            "–" if limit is None else f"below {limit:.4g}",
            fulfilled(met=None if limit is None or figures.sep is None else figures.sep < limit),
            unit=e.unit,
        )
    )
    line = figures.line_test
    rows.append(
        row(
            f"slope ({figures.direction})",
            figures.slope,
            "not significantly different from 1",
            fulfilled(met=None if line is None else not line.slope_significant),
            remark="" if line is None else f"t = {line.slope_t:.3g}, limit {line.critical:.3g}",
        )
    )
    try:
        shape = normality(validated.predicted - validated.reference)
        told = f"skewness {shape.skewness:.2f}, excess kurtosis {shape.excess_kurtosis:.2f}"
        required = f"within ±{shape.skewness_limit:.2f} and ±{shape.kurtosis_limit:.2f}"
        rows.append(row("errors normal, rule of thumb", told, required, fulfilled(met=shape.within_rule)))
    except NotEnoughDataError as problem:
        rows.append(row("errors normal, rule of thumb", None, "within limits", NOT_TOLD, remark=str(problem)))
    return rows


def _ich(e: Evidence, validated: ValidationResult | None, detection: DetectionResult | None) -> list[Requirement]:
    row, known, limits = _rows_of(ICH), e.model.uncertainty, e.model.limits
    strange = None if validated is None else sum(v == "not applicable" for v in validated.applicability)
    rows = [
        row(
            "specificity: validation spectra the calibration does not apply to",
            strange,
            "0",
            judged(strange, most=0),
            remark="what drives the model has to be explained, too: see what the model looks at",
        ),
        row("range, from", limits.lowest, *_range_from(detection), unit=e.unit),
        row("range, to", limits.highest, *_range_to(e), unit=e.unit),
    ]
    rows += _accuracy(row, validated, e.unit)
    freedom = len(e.training.spectra) - len(e.training)
    rows.append(
        row(
            "repeatability, one spectrum",
            known.replicate_sd,
            f"from at least {FEWEST_DETERMINATIONS - LEVELS} degrees of freedom",
            NOT_TOLD if known.replicate_sd is None else judged(freedom, least=FEWEST_DETERMINATIONS - LEVELS),
            unit=e.unit,
            remark="no replicate spectra" if known.replicate_sd is None else f"{freedom} degrees of freedom",
        )
    )
    rows.append(_intermediate(row, e))
    return rows


def _range_from(detection: DetectionResult | None) -> tuple[str, str]:
    """An impurity's range has to begin at the limit of quantification or below."""
    if detection is None or detection.smallest_decidable is None:
        return "as the use asks for", ""
    least = detection.smallest_decidable
    return f"quantification is possible from {least:.4g}", ""


def _range_to(e: Evidence) -> tuple[str, str]:
    rule = e.model.decision
    if rule is None or rule.kind != "upper":
        return "as the use asks for", ""
    most = 1.2 * rule.limit
    return f"at least 120 % of the limit, {most:.4g}", judged(e.model.limits.highest, least=most)


def _accuracy(row: Callable[..., Requirement], validated: ValidationResult | None, unit: str) -> list[Requirement]:
    """Accuracy by level: thirds of the validation samples by reference value, bias with its interval, recovery."""
    needed = f"at least {FEWEST_DETERMINATIONS} over {LEVELS} levels"
    if validated is None:
        return [row("accuracy: determinations", None, needed, NOT_TOLD, remark=NO_VALIDATION)]
    n = len(validated.sample_ids)
    rows = [row("accuracy: determinations", n, needed, judged(n, least=FEWEST_DETERMINATIONS))]
    order = np.argsort(validated.reference, kind="stable")
    for name, part in zip(("low", "middle", "high"), np.array_split(order, LEVELS), strict=True):
        if part.size < 2:
            continue
        reference, errors = validated.reference[part], (validated.predicted - validated.reference)[part]
        half = t_quantile(0.975, part.size - 1) * float(errors.std(ddof=1)) / math.sqrt(part.size)
        bias, level = float(errors.mean()), float(reference.mean())
        recovery = f", recovery {100 * (1 + bias / level):.1f} %" if (reference > 0).all() else ""
        rows.append(
            row(
                f"accuracy, {name} level: bias",
                bias,
                "interval holds zero",
                fulfilled(met=abs(bias) <= half),
                unit=unit,
                remark=f"95 %: {bias - half:.3g} to {bias + half:.3g}; {part.size} samples about {level:.4g}{recovery}",
            )
        )
    return rows


def _intermediate(row: Callable[..., Requirement], e: Evidence) -> Requirement:
    name, note = "intermediate precision", e.recipe.uncertainty.condition
    if note is None:
        remark = "name the note that holds day, operator or instrument: condition under [uncertainty]"
        return row(name, None, "conditions varied", NOT_TOLD, remark=remark)
    try:
        groups = e.training.groups(note)
        everything = np.zeros(len(groups), dtype=int)
        found = replicate_components(e.left_out - e.values, everything, np.unique(groups, return_inverse=True)[1])
    except (NotEnoughDataError, SampleMismatchError) as problem:
        return row(name, None, f"{note} varied", NOT_TOLD, remark=str(problem))
    between = found.pack_variance
    if between is None:
        return row(name, None, f"{note} varied", NOT_TOLD, remark=f"{note} is the same for all samples")
    sd = math.sqrt(found.scan_variance + max(between, 0.0))
    told = f"of it between values of {note}: " + (
        f"{math.sqrt(between):.3g}" if between > 0 else "too small to be seen"
    )
    remark = f"{told}; errors of left-out samples, laboratory error included"
    return row(f"{name} over {note}", sd, "stated", "", unit=e.unit, remark=remark)


def _bias_row(row: Callable[..., Requirement], figures: Figures) -> Requirement:
    test = figures.bias_test
    return row(
        "bias",
        figures.bias,
        "–" if test is None else f"within ±{test.limit:.4g} (t test)",
        fulfilled(met=None if test is None else not test.significant),
        unit=figures.unit,
    )


def _sec(e: Evidence) -> float:
    """Standard error of calibration, divided by the degrees of freedom. [unit of the analyte]"""
    return math.sqrt(float(e.errors @ e.errors) / e.model.uncertainty.degrees_of_freedom)


def _rows_of(source: str) -> Callable[..., Requirement]:
    def row(
        criterion: str, found: float | str | None, required: str, verdict: str, *, unit: str = "", remark: str = ""
    ) -> Requirement:
        return Requirement(
            criterion=criterion,
            found=found,
            required=required,
            verdict=verdict,
            unit=unit,
            remark=remark,
            source=f"{source}, {FROM_MEMORY}",
        )

    return row
