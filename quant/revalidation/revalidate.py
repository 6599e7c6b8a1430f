"""The whole way from a model and check standards to a verdict and the least remedy."""

from dataclasses import replace

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.sensitivity import ALLOWED_BIAS, ALLOWED_SEP
from quant.errors import NotEnoughDataError, ParameterError, QuantError
from quant.model.calibration import Calibration
from quant.model.identity import fingerprint_of, trace
from quant.model.revalidation_basis import RevalidationBasis
from quant.recipe.schema import Recipe
from quant.revalidation.change_words import CONTENT, NOISE
from quant.revalidation.changes import Change, estimate_changes
from quant.revalidation.equivalence import (
    FAMILY_RISK,
    LEAST_STANDARDS,
    advisory_tests,
    bias_equivalence,
    scatter_equivalence,
)
from quant.revalidation.gathered import InstrumentRecord, gather_evidence
from quant.revalidation.judgements import Power, RemedyRow
from quant.revalidation.power import power_of
from quant.revalidation.remedies.judge import judge_remedies
from quant.revalidation.result import RevalidationResult
from quant.revalidation.standards import (
    Standards,
    calibration_samples,
    gather,
    not_applicable,
    training_of,
)
from quant.revalidation.standards_state import StandardsEvidence, standards_evidence
from quant.revalidation.verdict import CANNOT_DECIDE, HOLDS, REBUILD, Facts, Rule, decide
from quant.spectra.concentration import refuse_other_scale
from quant.spectra.reference_table import ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet
from quant.statistics.quantiles import t_quantile

NO_RECORD = InstrumentRecord()
SHARE_OUTSIDE = 0.5  # of the standards outside the model's domain: an unchanged instrument never puts so many there


def revalidate(
    model: Calibration,
    after: SpectraSet,
    reference: ReferenceTable,
    *,
    before: SpectraSet | None = None,
    instrument: InstrumentRecord | None = None,
    training: Recipe | SampleSet | None = None,
    allowed_bias: float | None = None,
    allowed_sep: float | None = None,
) -> RevalidationResult:
    """Judge a calibration after a service visit.

    Parameters
    ----------
    model : Calibration
    after : SpectraSet
        Spectra of the check standards, measured now.
    reference : ReferenceTable
        Their reference values.
    before : SpectraSet, optional
        Spectra of the same standards from before the visit: errors of laboratory and samples then cancel.
    instrument : InstrumentRecord, optional
        Spectra of the film and of the empty beam.
    training : Recipe or SampleSet, optional
        The calibration's own samples, or the recipe that names them, for remedies that fit anew.
    allowed_bias, allowed_sep : float, optional
        Instead of what the model's recipe allows. [unit of the analyte]

    Raises
    ------
    AxisMismatchError, QuantityError, AcquisitionMismatchError
        The spectra were not recorded as the calibration's were.
    SampleMismatchError
        Standards without values, or without spectra from before; values on another scale than the calibration's.
    NotEnoughDataError
        Fewer than two standards.
    """
    samples = _samples(model, after, reference)
    own = calibration_samples(training, model.analyte.name) if isinstance(training, Recipe) else training
    standards = gather(model, samples, before, training_of(model, own) if own is not None else None)
    basis = basis_of(model, allowed_bias, allowed_sep)
    judged = judge_remedies(standards) if len(standards) >= LEAST_STANDARDS else ()
    rows = tuple(entry.row for entry in judged)
    labels = standards_evidence(model, samples)
    changes, note = _changes(standards)
    outside = not_applicable(model, standards.after)
    facts = _facts(standards, basis, labels, changes, outside, next((row for row in rows if row.proposed), None))
    rule = decide(facts)
    power = _power(standards, basis)
    wanted = rule.verdict not in (HOLDS, CANNOT_DECIDE, REBUILD)
    return RevalidationResult(
        analyte=model.analyte.name,
        unit=model.analyte.printed_unit,
        model=str(model),
        fingerprint=fingerprint_of(model),
        lineage=trace(model),
        state=str(model.state),
        verdict=rule.verdict,
        rule=rule.name,
        reasons=_reasons(rule, facts, power, outside, model, note),
        sample_ids=standards.sample_ids,
        reference=standards.reference,
        before=standards.before if standards.paired else None,
        after=standards.after.value,
        not_applicable=outside,
        basis=basis,
        bias=facts.bias,
        scatter=facts.scatter,
        tests=facts.tests,
        power=power,
        changes=changes,
        evidence=gather_evidence(model, samples, labels, own, instrument or NO_RECORD),
        remedies=rows if wanted else tuple(replace(row, proposed=False) for row in rows),
        proposed=facts.proposed.name if wanted and facts.proposed else "",
        files=tuple(dict.fromkeys((*(before.sources if before else ()), *after.sources, *reference.sources))),
        standards=standards,
        judged=judged,
    )


def basis_of(
    model: Calibration, allowed_bias: float | None = None, allowed_sep: float | None = None
) -> RevalidationBasis:
    """Return what a model is judged by, with bounds given by hand in place of its own.

    Parameters
    ----------
    model : Calibration
    allowed_bias, allowed_sep : float, optional
        [unit of the analyte]

    Raises
    ------
    ParameterError
        A bound that is not above zero.
    """
    for name, bound in (("allowed_bias", allowed_bias), ("allowed_sep", allowed_sep)):
        if bound is not None and not bound > 0:
            raise ParameterError(f"{name} = {bound}; expected a number above zero in the unit of the analyte.")
    own, s0 = model.revalidation, model.uncertainty.s0
    if own is None:
        own = RevalidationBasis(
            allowed_bias=ALLOWED_BIAS * s0,
            allowed_sep=ALLOWED_SEP * s0,
            source="the model states nothing: once and twice s0 of its left-out samples",
            sep=s0,
            n_samples=model.uncertainty.degrees_of_freedom + 1,
            sep_source="left-out samples of the cross-validation",
        )
    if allowed_bias is None and allowed_sep is None:
        return own
    return replace(
        own,
        allowed_bias=allowed_bias or own.allowed_bias,
        allowed_sep=allowed_sep or own.allowed_sep,
        source="given with the standards",
    )


def _samples(model: Calibration, after: SpectraSet, reference: ReferenceTable) -> SampleSet:
    samples = pair_samples(after, reference)
    analyte, values = samples.analyte(model.analyte.name)
    refuse_other_scale(model.analyte, analyte)
    known = np.isfinite(values)
    if np.count_nonzero(known) < 2:
        raise NotEnoughDataError(
            f"{np.count_nonzero(known)} standard(s) with a value of {analyte.name}; expected two or more."
        )
    return samples.subset(known)


def _facts(
    standards: Standards,
    basis: RevalidationBasis,
    labels: StandardsEvidence,
    changes: tuple[Change, ...],
    outside: int,
    proposed: RemedyRow | None,
) -> Facts:
    """What the rules look at."""
    n, reference = len(standards), standards.reference
    errors = standards.after.value - reference
    differences = standards.after.value - standards.before if standards.paired else errors
    tests = (
        advisory_tests(differences, errors, reference, sep=basis.sep, n_validation=basis.n_samples)
        if n >= LEAST_STANDARDS
        else ()
    )
    return Facts(
        n_standards=n,
        standards_in_doubt=in_doubt(labels, changes, differences),
        applies=outside <= SHARE_OUTSIDE * n,
        bias=bias_equivalence(differences, basis.allowed_bias),
        scatter=scatter_equivalence(errors, basis.allowed_sep),
        tests=tests,
        proposed=proposed,
        allowed_sep=basis.allowed_sep,
    )


def in_doubt(labels: StandardsEvidence, changes: tuple[Change, ...], differences: FloatArray) -> bool:
    """Say whether the standards, rather than the instrument, may have changed.

    They are in doubt if one is past its date, or if they are predicted low and the spectra show no change of the
    instrument that would do so: neither one that explains half of what is seen, nor, where results fell since before
    the visit, any at all.

    Parameters
    ----------
    labels : StandardsEvidence
    changes : tuple of Change
        Empty without spectra from before.
    differences : array of shape (n,)
        After minus before, or predicted minus reference. [unit of the analyte]
    """
    instrument = [change for change in changes if change.significant and change.kind not in (CONTENT, NOISE)]
    mean = float(differences.mean())
    explained = any(abs(change.effect or 0.0) >= abs(mean) / 2 for change in instrument)
    expired = not labels.trustworthy and not labels.loss_suspected
    fell = bool(changes) and not instrument and mean < 0 and _beyond_chance(differences)
    return expired or (labels.loss_suspected and not explained) or fell


def _beyond_chance(differences: FloatArray) -> bool:
    """Say whether a mean difference is beyond chance at the risk of the whole family."""
    n, sd = differences.size, float(differences.std(ddof=1))
    return (
        n >= LEAST_STANDARDS and abs(float(differences.mean())) > t_quantile(1 - FAMILY_RISK / 2, n - 1) * sd / n**0.5
    )


def _power(standards: Standards, basis: RevalidationBasis) -> Power:
    """Power, by the validated scatter: never by that of the data judged."""
    sd, source = basis.sep, f"SEP, {basis.sep_source}"
    replicate_sd = standards.model.uncertainty.replicate_sd
    if standards.paired and standards.before_index is not None:
        if replicate_sd is not None:
            counts = [
                np.bincount(index, minlength=len(standards))
                for index in (standards.before_index, standards.after_index)
            ]
            sd = replicate_sd * float(np.sqrt(np.mean(1 / counts[0] + 1 / counts[1])))
            source = "replicate spectra of the calibration, before and after"
        else:
            sd, source = basis.sep * float(np.sqrt(2)), f"{source}, before and after as if independent"
    return power_of(
        len(standards),
        sd=sd,
        sd_source=source,
        sep=basis.sep,
        allowed_bias=basis.allowed_bias,
        allowed_sep=basis.allowed_sep,
        paired=standards.paired,
    )


def _changes(standards: Standards) -> tuple[tuple[Change, ...], str]:
    """What changed in the spectra, or why that cannot be told."""
    if standards.before_spectra is None:
        return (), "What changed in the spectra cannot be told without spectra from before the visit."
    try:
        return estimate_changes(standards.before_spectra, standards.after_spectra, standards.model), ""
    except QuantError as problem:
        return (), f"What changed in the spectra cannot be told: {problem}"


def _reasons(rule: Rule, facts: Facts, power: Power, outside: int, model: Calibration, note: str) -> tuple[str, ...]:
    """The reasons in order: what decided, what was shown, what was found, what could have been shown, what helps."""
    unit = model.analyte.printed_unit
    bias, scatter, n = facts.bias, facts.scatter, facts.n_standards
    told = [rule.words]
    if facts.standards_in_doubt and rule.verdict == CANNOT_DECIDE:
        told.append("have the standards assayed again, or prepare new ones")
    if bias is not None and scatter is not None:
        told.append(
            f"bias {bias.bias:+.3g} {unit}, 90 % interval {bias.low:.3g} to {bias.high:.3g}, allowed "
            f"±{bias.allowed:.3g}: {'shown' if bias.shown else 'not shown'} to be small enough"
        )
        told.append(
            f"SEP {scatter.sep:.3g} {unit}, at most {scatter.high:.3g}, allowed {scatter.allowed:.3g}: "
            f"{'shown' if scatter.shown else 'not shown'} to be small enough"
        )
    if outside:
        told.append(f"the model does not apply to {outside} of {n} standards as they are measured now")
    found = [test.name for test in facts.tests if test.significant]
    if facts.tests:
        told.append(f"chance does not explain: {', '.join(found)}" if found else "no test of the family finds a change")
    if rule.verdict == CANNOT_DECIDE:
        needed = f"{power.needed} standards" if power.needed else "no number of standards up to 200"
        told.append(
            f'{n} standards let "holds" be said of an unchanged instrument in {100 * power.chance_of_holds:.0f} % of '
            f"visits; {needed} would in 90 %"
        )
    if facts.proposed is not None and rule.verdict not in (HOLDS, CANNOT_DECIDE):
        told.append(
            f"best of the simple: {facts.proposed.name} leaves {facts.proposed.rmse_reference:.3g} {unit} on left-out "
            "standards"
        )
    return tuple([*told, note] if note else told)
