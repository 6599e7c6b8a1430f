"""From standards to a verdict, a corrected model, its confirmation, and the way back."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.model.identity import fingerprint_of, trace
from quant.model.storage import load_model, save_model
from quant.prediction.predict import predict
from quant.revalidation.confirm import confirm_model, correct_model
from quant.revalidation.gathered import InstrumentRecord
from quant.revalidation.revalidate import basis_of, revalidate
from quant.revalidation.verdict import CANNOT_DECIDE, CORRECT, HOLDS
from quant.spectra.provenance import Source
from quant.spectra.reference_table import ReferenceTable

SHIFTED = {"shift": 0.6}


@pytest.fixture(scope="module")
def shifted(world):
    """A visit that moved the axis."""
    return drawn(world, 1, **SHIFTED)


@pytest.fixture(scope="module")
def judged(world, shifted):
    """Its revalidation."""
    return revalidate(world.model, shifted.after, shifted.reference, before=shifted.before, training=world.training)


def drawn(world, seed, first=101, n=12, **change):
    maker = world.maker
    visit = maker.draw_visit(np.random.default_rng(seed), n, after=replace(maker.BEFORE, **change), first=first)
    return replace(visit, after=replace(visit.after, sources=(Source(f"after {first}", 1, f"{first}"),)))


def test_a_shift_is_corrected_confirmed_and_followed_back(world, judged, tmp_path):
    assert judged.verdict == CORRECT
    assert judged.proposed == "axis"
    assert not judged.accepted
    assert "shift" in {change.kind for change in judged.changes if change.significant}
    child = correct_model(judged)
    assert (child.lineage.number, child.state.name) == (2, "provisional")
    assert child.lineage.parent.fingerprint == fingerprint_of(world.model) == judged.fingerprint
    child = load_model(save_model(child, tmp_path / "two.model"))

    confirmation = drawn(world, 2, first=201, n=16, **SHIFTED)
    again = revalidate(child, confirmation.after, confirmation.reference)
    assert again.verdict == HOLDS
    grown = load_model(save_model(confirm_model(again), tmp_path / "three.model"))
    assert (grown.lineage.number, grown.state.name) == (3, "draft")

    result = predict(grown, confirmation.after)
    assert len(result.lineage) == 3
    assert "model 3" in result.lineage[0]
    assert "provisional" in result.lineage[1]
    assert CORRECT in result.lineage[1]
    assert fingerprint_of(child)[:16] in result.lineage[1]
    assert fingerprint_of(world.model)[:16] in result.lineage[2]
    assert "calibration" in result.lineage[2]
    assert result.lineage[1] in str(result)
    errors = np.array([row.value for row in result.predictions]) - confirmation.reference.values[:, 0]
    assert np.sqrt(np.mean(errors**2)) < 1.5 * world.model.revalidation.sep
    assert {source.name for source in grown.lineage.made_from} == {"after 201"}
    assert {source.name for source in grown.lineage.ancestors[1].made_from} == {"after 101"}


def test_paired_differences_decide_and_errors_judge_the_scatter(judged):
    assert judged.bias.bias == pytest.approx(float(np.mean(judged.after - judged.before)))
    assert judged.scatter.sep == pytest.approx(float(np.std(judged.after - judged.reference, ddof=1)))


def test_the_parent_is_never_edited(world, judged):
    before = fingerprint_of(world.model)
    for row in judged.remedies:
        if row.available and row.name != "none":
            child = correct_model(judged, row.name)
            np.testing.assert_allclose(child.predict_values(child.test_spectra), child.test_predictions)
    assert fingerprint_of(world.model) == before
    assert trace(world.model)[0].startswith("model 1")


def test_standards_that_made_the_model_do_not_confirm_it(world, shifted, judged):
    child = correct_model(judged)
    again = revalidate(child, shifted.after, shifted.reference, allowed_bias=0.2, allowed_sep=0.3)
    assert again.accepted
    with pytest.raises(SampleMismatchError, match="had a part"):
        confirm_model(again)


def test_only_a_provisional_model_that_holds_is_confirmed(world, judged):
    same = drawn(world, 3)
    result = revalidate(world.model, same.after, same.reference, before=same.before)
    with pytest.raises(ParameterError, match="only a provisional one"):
        confirm_model(result)
    child = correct_model(judged, "bias")
    other = drawn(world, 4, first=301, shift=2.0)
    with pytest.raises(ParameterError, match="only when it holds"):
        confirm_model(revalidate(child, other.after, other.reference))


def test_no_change_needs_no_remedy_and_few_standards_decide_nothing(world):
    same = drawn(world, 5, n=20)
    result = revalidate(world.model, same.after, same.reference, before=same.before)
    assert result.verdict == HOLDS
    assert result.proposed == ""
    with pytest.raises(ParameterError, match="No remedy is proposed"):
        correct_model(result)
    few = drawn(world, 6, n=3)
    told = revalidate(world.model, few.after, few.reference, before=few.before)
    assert told.verdict == CANNOT_DECIDE
    assert "would in 90 %" in " ".join(told.reasons)


def test_an_allowed_bias_too_small_to_prove_is_not_decided(world):
    same = drawn(world, 7)
    result = revalidate(world.model, same.after, same.reference, before=same.before, allowed_bias=0.001)
    assert result.verdict == CANNOT_DECIDE
    assert result.power.chance_of_holds < 0.01
    assert result.basis.source == "given with the standards"


def test_standards_that_lost_solvent_are_doubted_before_the_instrument(world):
    maker = world.maker
    visit = maker.draw_visit(np.random.default_rng(8), 16, after=maker.BEFORE, lost=0.4)
    result = revalidate(world.model, visit.after, visit.reference, before=visit.before)
    assert result.rule == "standards in doubt"
    assert result.proposed == ""


def test_an_unknown_or_unfit_remedy_is_refused(world, shifted):
    result = revalidate(world.model, shifted.after, shifted.reference)
    with pytest.raises(ParameterError, match="expected one of"):
        correct_model(result, "prayer")
    with pytest.raises(ParameterError, match="cannot be applied"):
        correct_model(result, "axis")


def test_a_standard_without_its_spectrum_from_before_is_named(world, shifted):
    with pytest.raises(SampleMismatchError, match="K7-V101"):
        revalidate(world.model, shifted.after, shifted.reference, before=shifted.before[np.arange(2, 24)])


def test_one_standard_is_refused(world, shifted):
    table = shifted.reference
    one = ReferenceTable(table.sample_ids[:1], table.analytes, table.values[:1], table.notes[:1])
    with pytest.raises(NotEnoughDataError, match="two or more"):
        revalidate(world.model, shifted.after.select(table.sample_ids[:1]), one)


@pytest.mark.parametrize("bound", [0.0, -1.0, float("inf"), float("nan")])
def test_bounds_are_above_zero(world, bound):
    with pytest.raises(ParameterError, match="above zero"):
        basis_of(world.model, allowed_bias=bound)


def test_a_model_without_a_basis_is_judged_by_its_left_out_samples(world):
    basis = basis_of(replace(world.model, revalidation=None))
    assert basis.allowed_bias == world.model.uncertainty.s0
    assert "states nothing" in basis.source


def test_film_and_empty_beam_are_part_of_the_evidence(world, shifted):
    maker, rng = world.maker, np.random.default_rng(9)
    moved = replace(maker.BEFORE, **SHIFTED)
    record = InstrumentRecord(
        film=maker.film_spectrum(rng, moved),
        film_before=maker.film_spectrum(rng, maker.BEFORE),
        blank=maker.blank_spectrum(rng, moved),
        blank_before=maker.blank_spectrum(rng, maker.BEFORE),
    )
    result = revalidate(world.model, shifted.after, shifted.reference, before=shifted.before, instrument=record)
    text = str(result)
    for heading in ("Polystyrene film", "Empty beam", "Check standards", "Domain"):
        assert heading in text
    assert result.evidence.film.axis_change.offset == pytest.approx(0.6, abs=0.05)
    assert result.to_dict()["evidence"]["film"]["bands"]
    assert "standards" not in result.to_dict()


def test_the_calibrations_own_spectra_are_no_check(world):
    maker = world.maker
    own = maker.draw_visit(np.random.default_rng(3), 4)
    sources = tuple(Source(f"{i}.dx", 1, f"{i}") for i in range(4))
    model = replace(world.model, training=sources[:1])
    with pytest.raises(SampleMismatchError, match=r"made from 0\.dx; expected spectra measured after the visit"):
        revalidate(model, replace(own.after, sources=sources), own.reference)
    table = replace(own.after, sources=sources[:1])  # one table may hold calibration and check samples
    assert revalidate(model, table, own.reference).verdict


def test_samples_of_the_calibration_are_told_and_confirm_nothing(world):
    child = correct_model(revalidate(world.model, *_after(drawn(world, 4, **SHIFTED))))
    lineage = replace(child.lineage, ancestors=(replace(child.lineage.ancestors[0], samples=("K7-V201",)),))
    confirmation = drawn(world, 2, first=201, n=16, **SHIFTED)
    result = revalidate(replace(child, lineage=lineage), confirmation.after, confirmation.reference)
    assert any("K7-V201 took part in making the model" in reason for reason in result.reasons)
    assert result.verdict == HOLDS
    with pytest.raises(SampleMismatchError, match="K7-V201 had a part"):
        confirm_model(result)


def test_a_provisional_model_is_not_asked_about_spectra_from_before(world):
    child = correct_model(revalidate(world.model, *_after(drawn(world, 4, **SHIFTED))))
    visit = drawn(world, 5, first=201, **SHIFTED)
    with pytest.raises(ParameterError, match="The model is provisional"):
        revalidate(child, visit.after, visit.reference, before=visit.before)


def test_bounds_given_by_hand_stand_in_the_lineage(world):
    visit = drawn(world, 4, **SHIFTED)
    child = correct_model(revalidate(world.model, *_after(visit), allowed_sep=0.09), "slope_bias")
    assert child.lineage.verdict.endswith("(bias up to 0.05, SEP up to 0.09 % m/m allowed)")
    assert "residual spectra up to" in child.state.why  # limits had to be widened


def test_a_film_out_of_tolerance_is_not_accepted(world):
    visit = drawn(world, 6)
    film = world.maker.film_spectrum(np.random.default_rng(1), replace(world.maker.BEFORE, shift=3.0))
    result = revalidate(world.model, *_after(visit), before=visit.before, instrument=InstrumentRecord(film=film))
    assert result.verdict == HOLDS
    assert not result.accepted
    assert "the film is out of tolerance" in result.reasons[1]


def _after(visit):
    return visit.after, visit.reference
