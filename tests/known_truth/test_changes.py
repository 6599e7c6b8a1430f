"""What changed between two measurements of the same standards: named rightly, and nothing where nothing changed."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.model.calibration import Calibration
from quant.recipe.load import load_recipe
from quant.revalidation.changes import Change, estimate_changes
from quant.spectra.sample_set import pair_samples
from quant.spectra.simulate import PureComponent

SEED = 20261202  # fixed before the first run
N_STANDARDS = 12
# A new substance with bands where the solvent has none.
RESIDUE = PureComponent("residue", [(1640.0, 18.0, 0.01, "mixed"), (1150.0, 20.0, 0.01, "mixed")])


@dataclass(frozen=True)
class Case:
    """A simulated visit.

    Attributes
    ----------
    states : what the visit changes in the instrument
    named : kinds that have to be named, directly or as members of one class
    lost : share of the solvent that all standards lose
    """

    states: dict[str, Any]
    named: tuple[str, ...]
    lost: float = 0.0


# Sizes at which the prediction is off by about one SEP (0.04 % m/m) or more, where there is such a size at all: gain
# and offset leave behind no error after SNV, and noise, vapour no bias.
CASES = {
    "shift": Case({"shift": 0.1}, ("shift",)),
    "large shift": Case({"shift": 2.0}, ("shift",)),
    "stretch": Case({"stretch": 1e-4}, ("stretch",)),
    "gain": Case({"gain": 1.25}, ("gain",)),
    "offset": Case({"offset": 0.01}, ("offset",)),
    "resolution": Case({"resolution": 5.0}, ("resolution",)),
    "noise": Case({"noise": 1.6e-3}, ("noise",)),
    "vapour": Case({"water_vapour": 4e-3}, ("vapour_spread",)),
    "baseline drift": Case({"baseline_offset": 2e-2, "baseline_slope": 1e-2}, ("baseline_spread",)),
    "residue": Case({"interferent": RESIDUE, "interferent_amount": 1.0}, ("unexplained",)),
    "evaporation": Case({}, ("content",), lost=0.12),
    "shift and resolution": Case({"shift": 0.3, "resolution": 4.8}, ("shift", "resolution")),
}
Estimate = Callable[[Case, int], tuple[Change, ...]]


@pytest.fixture(scope="module")
def model(drying: ModuleType, repository: Path) -> Calibration:
    """A calibration by the recipe of the drying demo."""
    recipe = load_recipe(repository / "configs" / "dryer_solvent.toml").model_copy(update={"validation": None})
    part = drying.draw_set(np.random.default_rng(SEED), n_validation=4, n_new=4).standards
    samples = pair_samples(part.spectra.with_notes(recipe.spectra.notes), part.reference)
    return calibrate(recipe, samples=samples).analytes[0].model


@pytest.fixture(scope="module")
def estimate(drying: ModuleType, model: Calibration) -> Estimate:
    """Draw a visit, and estimate what changed."""

    def run(case: Case, number: int) -> tuple[Change, ...]:
        rng = np.random.default_rng([SEED, number])
        composition = drying.draw_part(rng, N_STANDARDS, "C", 81, replicates=1).composition
        ids = [f"C{i + 1:02d}" for i in range(N_STANDARDS)]
        after = composition * np.array([1.0 - case.lost, 1.0, 1.0, 1.0])
        sets = []
        for content, state in ((composition, drying.INSTRUMENT), (after, replace(drying.INSTRUMENT, **case.states))):
            rows = np.repeat(drying.true_absorbances(content), 2, axis=0)
            measured = drying.measure(rows, drying.AXIS.values, rng, state)
            sets.append(drying.as_spectra(measured, ids, 2))
        return estimate_changes(sets[0], sets[1], model)

    return run


def names(changes: tuple[Change, ...]) -> set[str]:
    """Kinds named as changed, with those that cannot be told apart from them."""
    return {name for c in changes if c.significant for name in (c.kind, *c.same_class_as)}


@pytest.mark.parametrize("name", CASES)
def test_the_cause_is_named(name: str, estimate: Estimate, bounds: Callable[[int, float], tuple[int, int]]) -> None:
    case, n = CASES[name], 20
    named = sum(set(case.named) <= names(estimate(case, number)) for number in range(n))
    assert named >= bounds(n, 0.95)[0]


def test_nothing_is_named_where_nothing_changed(
    estimate: Estimate, bounds: Callable[[int, float], tuple[int, int]]
) -> None:
    n = 40
    found = [estimate(Case({}, ()), number) for number in range(n)]
    most = bounds(n, 0.05)[1]
    assert sum(bool(names(changes)) for changes in found) <= most
    # The control: each question at 5 % by itself. Holm's smallest p is the smallest times the number of questions, 11.
    assert sum(min(c.p_value for c in changes) <= 11 * 0.05 for changes in found) > most


def test_sizes_and_their_standard_errors_are_right(estimate: Estimate) -> None:
    case = Case({"resolution": 5.0, "shift": 0.3}, ())
    found = [{c.kind: c for c in estimate(case, number)} for number in range(20)]
    for kind, size in (("shift", 0.3), ("resolution", 1.0), ("content", 0.0)):
        sizes = np.array([changes[kind].size for changes in found])
        stated = np.sqrt(np.mean([changes[kind].standard_error ** 2 for changes in found]))
        assert sizes.mean() == pytest.approx(size, abs=max(0.03 * size, 4 * stated / np.sqrt(20)))
        assert 0.5 * stated < sizes.std(ddof=1) < 1.6 * stated  # 99.9 % bounds of a standard deviation of 20


def test_effects_add_up_to_the_bias(drying: ModuleType, model: Calibration, estimate: Estimate) -> None:
    changes = {c.kind: c for c in estimate(Case({"shift": 0.3}, ()), 1)}
    rng = np.random.default_rng(SEED)
    rows = drying.true_absorbances(drying.draw_part(rng, 20, "C", 81, replicates=1).composition)
    quiet = replace(drying.INSTRUMENT, noise=0.0, water_vapour=0.0, path_variation=0.0)
    straight, moved = (
        drying.measure(rows, drying.AXIS.values, np.random.default_rng(1), replace(quiet, shift=shift))
        for shift in (0.0, 0.3)
    )
    bias = float((model.predict_values(moved) - model.predict_values(straight)).mean())
    assert changes["shift"].effect == pytest.approx(bias, rel=0.1)


@pytest.mark.long
@pytest.mark.parametrize("name", [*CASES, "nothing"])
def test_the_whole_table(name: str, estimate: Estimate, keep_result: Callable[[str, dict[str, object]], None]) -> None:
    n, case = 200, CASES.get(name, Case({}, ()))
    found = [names(estimate(case, number)) for number in range(n)]
    share = sum(set(case.named) <= each if case.named else bool(each) for each in found) / n
    keep_result(f"changes: {name}", {"visits": n, "named": share})
    assert share <= 0.05 + 0.05 if name == "nothing" else share >= 0.9
