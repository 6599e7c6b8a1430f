"""The whole way from a model and check standards to a verdict and the least remedy."""

from dataclasses import replace

import numpy as np

from quant.calibration.sensitivity import ALLOWED_BIAS, ALLOWED_SEP
from quant.checks import name_some
from quant.errors import NotEnoughDataError, ParameterError, QuantError, SampleMismatchError
from quant.model.calibration import Calibration
from quant.model.identity import fingerprint_of, trace
from quant.model.lineage import took_part
from quant.model.revalidation_basis import RevalidationBasis
from quant.recipe.schema import Recipe
from quant.revalidation.changes import Change, estimate_changes
from quant.revalidation.equivalence import LEAST_STANDARDS
from quant.revalidation.facts import gather_facts
from quant.revalidation.gathered import Gathered, InstrumentRecord, gather_evidence
from quant.revalidation.judgements import Power
from quant.revalidation.power import power_of
from quant.revalidation.reasons import reasons
from quant.revalidation.remedies.apply import PROVISIONAL
from quant.revalidation.remedies.judge import judge_remedies
from quant.revalidation.result import BY_HAND, RevalidationResult
from quant.revalidation.standards import (
    Standards,
    calibration_samples,
    files_among,
    gather,
    not_applicable,
    training_of,
)
from quant.revalidation.standards_state import standards_evidence
from quant.revalidation.verdict import CANNOT_DECIDE, HOLDS, REBUILD, Facts, Rule, decide
from quant.spectra.concentration import refuse_other_scale
from quant.spectra.reference_table import ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet

NO_RECORD = InstrumentRecord()


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
    ParameterError
        A bound that is not above zero; spectra from before for a provisional model.
    """
    samples = _samples(model, after, before, reference)
    own = calibration_samples(training, model.analyte.name) if isinstance(training, Recipe) else training
    standards = gather(model, samples, before, training_of(model, own) if own is not None else None)
    basis = basis_of(model, allowed_bias, allowed_sep)
    judged = judge_remedies(standards) if len(standards) >= LEAST_STANDARDS else ()
    rows = tuple(entry.row for entry in judged)
    labels = standards_evidence(model, samples)
    changes, note = _changes(standards)
    outside = not_applicable(model, standards.after)
    facts = gather_facts(standards, basis, labels, changes, outside, next((row for row in rows if row.proposed), None))
    rule = decide(facts)
    evidence = gather_evidence(model, samples, labels, own, instrument or NO_RECORD)
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
        reasons=_reasons(standards, rule, facts, power, changes, evidence, outside, note),
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
        evidence=evidence,
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
        if bound is not None and not 0 < bound < np.inf:
            raise ParameterError(f"{name} = {bound}; expected a finite number above zero in the unit of the analyte.")
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
        source=BY_HAND,
    )


def _samples(model: Calibration, after: SpectraSet, before: SpectraSet | None, reference: ReferenceTable) -> SampleSet:
    if model.state.name == PROVISIONAL and before is not None:
        raise ParameterError(
            "The model is provisional: it was made for the instrument as it is since the visit, and spectra from "
            "before are none of its kind. Leave them out; reference values of other standards confirm it."
        )
    samples = pair_samples(after, reference)
    analyte, values = samples.analyte(model.analyte.name)
    refuse_other_scale(model.analyte, analyte)
    known = np.isfinite(values)
    again = files_among(after, model.training)
    if again:
        raise SampleMismatchError(
            f"The calibration was made from {name_some(again)}; expected spectra measured after the visit. Check which "
            "files were named."
        )
    if np.count_nonzero(known) < 2:
        raise NotEnoughDataError(
            f"{np.count_nonzero(known)} standard(s) with a value of {analyte.name}; expected two or more."
        )
    return samples.subset(known)


def _reasons(
    standards: Standards,
    rule: Rule,
    facts: Facts,
    power: Power,
    changes: tuple[Change, ...],
    evidence: Gathered,
    outside: int,
    note: str,
) -> tuple[str, ...]:
    model, made_it = standards.model, took_part(standards.model.lineage)
    return reasons(
        rule,
        facts,
        power,
        changes,
        outside=outside,
        known=[sample for sample in standards.sample_ids if sample in made_it],
        film_failed=evidence.film is not None and not evidence.film.passed,
        unit=model.analyte.printed_unit,
        note=note,
    )


def _power(standards: Standards, basis: RevalidationBasis) -> Power:
    """Power, by earlier scatter: never by that of the data judged."""
    sd, source = standards.difference_sd if standards.paired else (basis.sep, f"SEP, {basis.sep_source}")
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
