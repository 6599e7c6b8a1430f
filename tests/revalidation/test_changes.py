"""Paired standards: what is found, in what words, and what is refused."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.errors import NotEnoughDataError
from quant.model.calibration import Calibration
from quant.recipe.load import recipe_from_text
from quant.result import field_docs
from quant.revalidation.change_pairs import used_points
from quant.revalidation.changes import Change, estimate_changes, format_changes
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.simulate import Band, band_profile
from quant.spectra.simulate_instrument import InstrumentState, measure
from quant.spectra.spectra_set import SpectraSet

AXIS = SpectralAxis(np.arange(2000.0, 1499.0, -2.0), "cm-1")
PURE = np.stack(
    [band_profile(AXIS.values, b) for b in (Band(1735, 22, 0.05), Band(1650, 30, 0.08), Band(1850, 26, 0.3))]
)
STATE = InstrumentState(noise=5e-4, path_variation=0.02, baseline_offset=2e-3)
RECIPE = """title = "t"
[spectra]
files = ["x"]
[reference]
file = "x"
[[analyte]]
name = "acid"
unit = "% m/m"
{extra}
[[preprocessing]]
step = "keep_ranges"
ranges = [[1950, 1550]]
[regression]
factors = 2
"""


def spectra_of(
    n: int, state: InstrumentState, seed: int, *, lost: float = 0.0, quantity: str = "absorbance"
) -> SpectraSet:
    """Two spectra each of standards C01 ..., always of the same composition."""
    content = np.random.default_rng(1).uniform(1.0, 9.0, (n, 2)) * np.array([1.0 - lost, 1.0])
    rows = np.repeat(np.column_stack([content, np.ones(n)]) @ PURE, 2, axis=0)
    measured = measure(rows, AXIS.values, np.random.default_rng(seed), state)
    ids = [f"C{i // 2 + 1:02d}" for i in range(2 * n)]
    return SpectraSet(10.0**-measured if quantity == "transmittance" else measured, AXIS, ids, quantity)


def model_of(quantity: str = "absorbance") -> Calibration:
    spectra = spectra_of(16, STATE, 2, quantity=quantity)
    values = np.random.default_rng(1).uniform(1.0, 9.0, (16, 2))[:, :1]
    ids = list(dict.fromkeys(spectra.sample_ids))
    extra = '[[preprocessing]]\nstep = "absorbance"\n' if quantity == "transmittance" else ""
    table = ReferenceTable(ids, [Analyte("acid", "% m/m")], values)
    return calibrate(recipe_from_text(RECIPE.format(extra=extra)), pair_samples(spectra, table)).model


@pytest.fixture(scope="module")
def model() -> Calibration:
    return model_of()


def kinds(changes: tuple[Change, ...]) -> dict[str, Change]:
    return {c.kind: c for c in changes}


def test_a_shift_is_told_in_words_with_its_cause_and_its_class(model: Calibration) -> None:
    found = kinds(estimate_changes(spectra_of(8, STATE, 3), spectra_of(8, replace(STATE, shift=0.6), 4), model))
    shift = found["shift"]
    assert shift.significant
    assert shift.size == pytest.approx(0.6, abs=max(4 * shift.standard_error, 0.02))
    assert shift.unit == "cm⁻¹"
    assert shift.same_class_as == ("stretch",)  # a range of 400 cm⁻¹ is too short to tell the two apart
    assert found["stretch"].same_class_as == ("shift",)
    assert found["stretch"].p_value == shift.p_value
    assert found["stretch"].size == pytest.approx(0.6 / 1750.0, rel=0.15)  # as if it were the stretch alone
    assert shift.words.startswith("Bands lie 0.")
    assert "cannot be told apart from stretch of the axis" in shift.words
    assert "re-aligned" in shift.usual_cause
    assert str(shift).startswith(shift.words)


def test_significant_changes_come_first_those_that_cost_most_at_the_top(model: Calibration) -> None:
    state = replace(STATE, shift=0.6, offset=0.05)
    found = estimate_changes(spectra_of(8, STATE, 3), spectra_of(8, state, 4), model)
    told = [c.significant for c in found]
    assert told == sorted(told, reverse=True)
    costs = [abs(c.effect or 0.0) for c in found if c.significant]
    assert costs == sorted(costs, reverse=True)
    assert {"shift", "offset"} <= {c.kind for c in found if c.significant}


def test_before_and_after_exchanged_turns_the_signs(model: Calibration) -> None:
    one, other = spectra_of(8, STATE, 3), spectra_of(8, replace(STATE, gain=1.1, shift=0.2), 4)
    there, back = kinds(estimate_changes(one, other, model)), kinds(estimate_changes(other, one, model))
    for kind in ("shift", "offset", "resolution", "vapour"):
        error = there[kind].standard_error
        assert back[kind].size == pytest.approx(-there[kind].size, abs=0.5 * error)
    assert (1 + back["gain"].size) * (1 + there["gain"].size) == pytest.approx(1.0, abs=0.01)


def test_evaporation_is_laid_on_the_standards(model: Calibration) -> None:
    found = kinds(estimate_changes(spectra_of(10, STATE, 3), spectra_of(10, STATE, 4, lost=0.15), model))
    assert found["content"].significant
    truth = -0.15 * np.random.default_rng(1).uniform(1.0, 9.0, (10, 2))[:, 0].mean()
    # Size is judged against the mean spectrum: the analyte is a large share of it, so part of its loss looks like gain.
    assert 1.2 * truth < found["content"].size < 0.6 * truth
    assert found["content"].unit == "% m/m"
    assert "not the instrument" in found["content"].usual_cause
    assert not found["shift"].significant


def test_transmittance_is_taken_as_absorbance() -> None:
    state = replace(STATE, shift=0.6, gain=1.1)
    one, other = (
        kinds(estimate_changes(spectra_of(8, STATE, 3, quantity=q), spectra_of(8, state, 4, quantity=q), model_of(q)))
        for q in ("absorbance", "transmittance")
    )
    for kind in ("shift", "gain", "resolution"):
        assert other[kind].size == pytest.approx(one[kind].size, abs=one[kind].standard_error)


def test_a_reversed_axis_and_unpaired_standards_make_no_difference(model: Calibration) -> None:
    before, after = spectra_of(8, STATE, 3), spectra_of(8, STATE, 4)
    reversed_after = SpectraSet(after.values[:, ::-1], after.axis.reversed(), after.sample_ids)
    fewer = before[np.arange(len(before)) >= 2]
    expected = estimate_changes(fewer, after.select(fewer.sample_ids), model)
    assert [c.size for c in estimate_changes(fewer, reversed_after, model)] == pytest.approx([c.size for c in expected])


def test_too_few_standards_are_refused_by_name(model: Calibration) -> None:
    with pytest.raises(NotEnoughDataError, match=r"3 standard.*C01, C02, C03.*at least 4"):
        estimate_changes(spectra_of(3, STATE, 3), spectra_of(8, STATE, 4), model)


def test_other_spectra_altogether_are_unexplained(model: Calibration) -> None:
    before = spectra_of(8, STATE, 3)
    rng = np.random.default_rng(5)
    strange = band_profile(AXIS.values, Band(1790, 40, 1.5)) + 0.001 * rng.standard_normal(before.values.shape)
    found = kinds(estimate_changes(before, SpectraSet(strange, AXIS, before.sample_ids), model))
    assert all(np.isfinite(c.size) for c in found.values())
    assert any(c.significant for c in found.values())


def noisy(level: np.ndarray, seed: list[int]) -> SpectraSet:
    """Eight standards that differ by noise alone."""
    rows = level + 1e-3 * np.random.default_rng(seed).standard_normal((8, len(AXIS)))
    return SpectraSet(rows, AXIS, [f"C{i:02d}" for i in range(8)])


def test_standards_all_alike_can_be_compared(model: Calibration) -> None:
    pairs = [(noisy(PURE.sum(axis=0), [seed, 1]), noisy(PURE.sum(axis=0), [seed, 2])) for seed in range(20)]
    called = sum(any(c.significant for c in estimate_changes(before, after, model)) for before, after in pairs)
    assert called <= 5  # 99.9 % bound about 5 %


def test_empty_beams_have_sizes_too(model: Calibration) -> None:
    empty = np.zeros(len(AXIS))
    assert all(np.isfinite(c.size) for c in estimate_changes(noisy(empty, [1]), noisy(empty, [2]), model))


def test_only_the_range_of_the_model_is_used(model: Calibration) -> None:
    used = AXIS.values[used_points(model)]
    assert (used.min(), used.max()) == (1550.0, 1950.0)
    before, after = spectra_of(8, STATE, 3), spectra_of(8, STATE, 4)
    spoilt = after.values.copy()
    spoilt[:, AXIS.values < 1500.5] += 5.0
    found = estimate_changes(before, SpectraSet(spoilt, AXIS, after.sample_ids), model)
    assert [c.size for c in found] == pytest.approx([c.size for c in estimate_changes(before, after, model)])


def test_changes_print_and_explain_their_keys(model: Calibration) -> None:
    found = estimate_changes(spectra_of(8, STATE, 3), spectra_of(8, STATE, 4), model)
    assert format_changes(found).count("\n") == len(found)
    assert set(field_docs(Change)) == set(found[0].to_dict())
    assert all("can be shown" in str(c) for c in found if not c.significant)
