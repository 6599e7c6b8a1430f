"""Simulated service visits with known truth: what is said of them, and what the proposed remedy restores.

A visit matters ("broken") where the bias of 300 untouched samples moved by more than is allowed, or their SEP exceeds
what is allowed. It can be mended ("mendable") where a correction fitted to 500 standards brings their RMSEP to within
1.15 times what it was, and is "beyond mending" where none brings bias and SEP within what is allowed. Recalibration
does not count there, since with 500 new samples it is a new calibration.
"""

import importlib.util
import sys
from collections import Counter
from dataclasses import dataclass, field, replace
from functools import cache, partial
from typing import Any

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.recipe.load import load_recipe
from quant.revalidation.remedies.table import RECALIBRATION, REMEDIES
from quant.revalidation.revalidate import revalidate
from quant.revalidation.standards import gather, training_of
from quant.revalidation.verdict import CANNOT_DECIDE, HOLDS, REBUILD
from quant.spectra.sample_set import pair_samples
from quant.spectra.simulate import PureComponent
from quant.spectra.simulate_instrument import measure
from quant.spectra.simulate_substances import ACETONE

SEED = 20261201  # fixed before the first run
# Rules were chosen on plants below 100. A first count, on 1000 to 1199, showed vapour and baseline that vary more to be
# judged badly; plants counted now were not looked at before.
COUNTED = range(2000, 2200)
UNTOUCHED = 300  # samples that remedies are judged on
MANY = 500  # standards of the best that can be done
RESTORED = 1.15  # times the RMSEP before the visit
# A new substance with bands where the solvent has none.
RESIDUE = PureComponent("residue", [(1640.0, 18.0, 0.01, "mixed"), (1150.0, 20.0, 0.01, "mixed")])
AXIS = {"shift", "stretch"}


@dataclass(frozen=True)
class Visit:
    """What a visit changes in the instrument, the kinds that name it (one of each set), what the standards lost."""

    changed: dict[str, Any] = field(default_factory=dict)
    causes: tuple[set[str], ...] = ()
    lost: float = 0.0


VISITS = {
    "nothing": Visit(),
    "shift 0.1": Visit({"shift": 0.1}, (AXIS,)),
    "shift 0.3": Visit({"shift": 0.3}, (AXIS,)),
    "shift 1": Visit({"shift": 1.0}, (AXIS,)),
    "shift 2": Visit({"shift": 2.0}, (AXIS,)),
    "stretch 1e-4": Visit({"stretch": 1e-4}, (AXIS,)),
    "stretch 5e-4": Visit({"stretch": 5e-4}, (AXIS,)),
    "gain 1.1": Visit({"gain": 1.1}, ({"gain"},)),
    "gain 1.5": Visit({"gain": 1.5}, ({"gain"},)),
    "resolution 4 to 5": Visit({"resolution": 5.0}, ({"resolution"},)),
    "resolution 4 to 8": Visit({"resolution": 8.0}, ({"resolution"},)),
    "offset 0.01": Visit({"offset": 0.01}, ({"offset"},)),
    "baseline drift five times": Visit(
        {"baseline_offset": 2e-2, "baseline_slope": 1e-2, "baseline_curvature": 6e-3},
        ({"offset", "baseline_slope", "baseline_curvature", "baseline_spread"},),
    ),
    "noise twice": Visit({"noise": 1.6e-3}, ({"noise"},)),
    "noise three times": Visit({"noise": 2.4e-3}, ({"noise"},)),
    "vapour ten times": Visit({"water_vapour": 4e-3}, ({"vapour", "vapour_spread"},)),
    "vapour fifty times": Visit({"water_vapour": 2e-2}, ({"vapour", "vapour_spread"},)),
    "acetone left": Visit({"interferent": ACETONE, "interferent_amount": 0.002}, ({"unexplained"},)),
    "residue on the crystal": Visit({"interferent": RESIDUE, "interferent_amount": 1.0}, ({"unexplained"},)),
    # Gain alone costs nothing behind SNV, so that it need not be named.
    "shift and gain": Visit({"shift": 0.5, "gain": 1.05}, (AXIS,)),
    "shift and resolution": Visit({"shift": 0.3, "resolution": 5.0}, (AXIS, {"resolution"})),
    "stretch and noise": Visit({"stretch": 2e-4, "noise": 1.2e-3}, (AXIS,)),
    "resolution and vapour": Visit({"resolution": 5.0, "water_vapour": 4e-3}, ({"resolution"},)),
    "standards lost solvent": Visit(lost=0.15),
}
SHARES = (("named", "broken"), ("mendable, restored", "mendable"), ("beyond mending, rebuild", "beyond mending"))
UNCHANGED = ("nothing", "standards lost solvent")  # as far as the instrument goes


@pytest.fixture(scope="module")
def visits(repository):
    """The module that draws visits of the demo."""
    path = repository / "demo_sets" / "service_visit" / "make.py"
    specification = importlib.util.spec_from_file_location("visits_of_known_truth", path)
    module = importlib.util.module_from_spec(specification)
    sys.modules["visits_of_known_truth"] = module
    specification.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def recipe(repository):
    """The demo's recipe."""
    return load_recipe(repository / "configs" / "dryer_solvent.toml")


class Plant:
    """A calibration, and 300 samples that no standard saw."""

    def __init__(self, visits, recipe, seed):
        self.visits, self.seed = visits, seed
        self.rng = np.random.default_rng([SEED, seed])
        drawn = visits.dryer.draw_set(self.rng)
        self.training, validation = (pair_samples(p.spectra, p.reference) for p in (drawn.standards, drawn.validation))
        self.model = calibrate(recipe, self.training, validation).model
        part = visits.dryer.draw_part(self.rng, UNTOUCHED, "V")
        self.values = part.reference.values[:, 0]
        self.composition = part.composition
        self.validated = self.errors(self.model, self.measured(visits.BEFORE))  # before the visit

    def measured(self, state):
        """Spectra of the untouched samples, two each, on the instrument in some state."""
        dryer = self.visits.dryer
        rows = np.repeat(dryer.true_absorbances(self.composition), 2, axis=0)
        return measure(rows, dryer.AXIS.values, self.rng, state)

    def errors(self, model, spectra):
        """Errors of the untouched samples."""
        return model.method.predict(model.process(spectra).reshape(UNTOUCHED, 2, -1).mean(axis=1)) - self.values

    def ratio(self, errors):
        """RMSEP of the untouched samples by what it was before the visit."""
        return float(np.sqrt(np.mean(errors**2) / np.mean(self.validated**2)))

    def within(self, errors, basis):
        """Whether bias and SEP of the untouched samples are within what is allowed."""
        return abs(errors.mean() - self.validated.mean()) <= basis.allowed_bias and errors.std() <= basis.allowed_sep

    def with_many(self, state, spectra):
        """Errors of the untouched samples behind each correction fitted to 500 standards."""
        drawn = self.visits.draw_visit(self.rng, MANY, after=state)
        samples = pair_samples(drawn.after, drawn.reference)
        many = gather(self.model, samples, drawn.before, training_of(self.model, self.training))
        corrections = [remedy for remedy in REMEDIES if remedy.kind != RECALIBRATION]
        return [self.errors(remedy.fit(many, np.arange(MANY)), spectra) for remedy in corrections]

    def visit(self, name, *, with_many=False):
        """One visit: what was said, what was true, and how far the proposed remedy brought the error back."""
        visit = VISITS[name]
        self.rng = np.random.default_rng([SEED, self.seed, list(VISITS).index(name)])
        state = replace(self.visits.BEFORE, **visit.changed)
        drawn = self.visits.draw_visit(self.rng, 12, after=state, lost=visit.lost)
        result = revalidate(self.model, drawn.after, drawn.reference, before=drawn.before, training=self.training)
        spectra = self.measured(state)
        broken = not self.within(self.errors(self.model, spectra), result.basis)
        changes = [entry for entry in result.changes if entry.significant]
        found = {kind for entry in changes for kind in (entry.kind, *entry.same_class_as)}
        restored = False
        if result.proposed:
            fit = next(remedy.fit for remedy in REMEDIES if remedy.name == result.proposed)
            restored = self.ratio(self.errors(fit(result.standards, np.arange(12)), spectra)) <= RESTORED
        best = self.with_many(state, spectra) if with_many and broken else []
        mendable = any(self.ratio(errors) <= RESTORED for errors in best)
        beyond = bool(best) and not mendable and not any(self.within(errors, result.basis) for errors in best)
        said_changed = result.verdict not in (HOLDS, CANNOT_DECIDE)
        return {
            "visits": True,
            result.verdict: True,
            "broken": broken,
            "named": broken and all(found & cause for cause in visit.causes),
            "wrongly holds": broken and result.verdict == HOLDS,
            "called broken": said_changed,
            "proposed": bool(result.proposed),
            "restored": restored,
            "mendable": mendable,
            "mendable, restored": mendable and restored,
            "not mendable": bool(best) and not mendable,
            "not mendable, rebuild": bool(best) and not mendable and result.verdict == REBUILD,
            "beyond mending": beyond,
            "beyond mending, rebuild": beyond and result.verdict == REBUILD,
        }


@pytest.fixture(scope="module")
def count(visits, recipe):
    """Count over seeds."""
    plant = cache(partial(Plant, visits, recipe))

    def over(name, seeds, *, with_many=False):
        table = Counter()
        for seed in seeds:
            found = plant(seed).visit(name, with_many=with_many)
            table.update({key: int(value) for key, value in found.items()})
        return table

    return over


HALVES = [range(100, 110), range(110, 120)]  # of twenty seeds


@pytest.mark.parametrize("seeds", HALVES, ids=["first half", "second half"])
@pytest.mark.parametrize("name", UNCHANGED)
def test_an_unchanged_instrument_is_not_called_broken(count, bounds, name, seeds):
    found = count(name, seeds)
    assert found["broken"] == 0
    assert found["called broken"] <= bounds(len(seeds), 0.02)[1]
    assert found[HOLDS] >= 1 or name != "nothing"


@pytest.mark.parametrize("seeds", HALVES, ids=["first half", "second half"])
@pytest.mark.parametrize("name", ["shift 0.3", "resolution 4 to 8", "residue on the crystal", "shift and resolution"])
def test_visits_that_matter_are_named_and_mended(count, bounds, name, seeds):
    found = count(name, seeds)
    assert found["broken"] >= 8  # what follows would say nothing of visits that do not matter
    assert found["wrongly holds"] == 0
    assert found["named"] >= bounds(found["broken"], 0.9)[0]
    assert found["restored"] >= bounds(found["broken"], 0.9)[0]


@pytest.mark.parametrize("seeds", HALVES, ids=["first half", "second half"])
def test_noise_that_matters_is_not_mended_by_a_correction(count, bounds, seeds):
    found = count("noise three times", seeds)
    assert found["broken"] >= 5
    assert found["wrongly holds"] == 0
    assert found[REBUILD] >= bounds(found["broken"], 0.9)[0]


# Maps and new fits by twelve standards bring scatter of their own; where noise has grown, little room is left for it.
NOT_MENDED_YET = ("vapour ten times", "vapour fifty times", "resolution and vapour", "stretch and noise")


@pytest.mark.long
@pytest.mark.parametrize(
    "name",
    [
        pytest.param(
            name, marks=[pytest.mark.xfail(strict=True, reason="mended in less than 90 %")] * (name in NOT_MENDED_YET)
        )
        for name in VISITS
    ],
)
def test_two_hundred_visits(count, bounds, keep_result, name):
    found = count(name, COUNTED, with_many=True)
    keep_result(f"visit: {name}", {key: int(value) for key, value in sorted(found.items())})
    assert found["wrongly holds"] <= 10  # 5 %
    assert name not in UNCHANGED or found["called broken"] <= 10
    for part, whole in SHARES:
        assert found[part] >= bounds(found[whole], 0.9)[0]  # all kinds together: test_quoted_figures.py
