"""A dryer's calibration, and visits to its spectrometer with known changes."""

import importlib.util
import sys
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.model.calibration import Calibration
from quant.recipe.load import load_recipe
from quant.revalidation.standards import Standards, gather, training_of
from quant.spectra.sample_set import SampleSet, pair_samples

SEED = 20261101  # fixed before the first run


@dataclass(frozen=True)
class World:
    """A calibration with its own samples, and the module that draws visits."""

    model: Calibration
    training: SampleSet
    maker: ModuleType

    def standards(self, rng: np.random.Generator, n: int = 12, *, fit_anew: bool = True, **change: float) -> Standards:
        """Draw standards before and after a change of the instrument."""
        visit = self.maker.draw_visit(rng, n, after=replace(self.maker.BEFORE, **change))
        samples = pair_samples(visit.after, visit.reference)
        return gather(self.model, samples, visit.before, training_of(self.model, self.training) if fit_anew else None)


@pytest.fixture(scope="session")
def visits(repository: Path) -> ModuleType:
    """The module that draws visits of the demo."""
    path = repository / "demo_sets" / "service_visit" / "make.py"
    specification = importlib.util.spec_from_file_location("visits_for_tests", path)
    assert specification is not None
    assert specification.loader is not None
    module = importlib.util.module_from_spec(specification)
    sys.modules["visits_for_tests"] = module
    specification.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def make_world(visits: ModuleType, repository: Path) -> Callable[[int], World]:
    """Return what draws a set of the dryer by a seed and calibrates it."""
    recipe = load_recipe(repository / "configs" / "dryer_solvent.toml")

    def make(seed: int) -> World:
        drawn = visits.dryer.draw_set(np.random.default_rng(seed))
        training, validation = (pair_samples(p.spectra, p.reference) for p in (drawn.standards, drawn.validation))
        return World(calibrate(recipe, training, validation).model, training, visits)

    return make


@pytest.fixture(scope="session")
def world(make_world: Callable[[int], World]) -> World:
    """One calibration."""
    return make_world(SEED)
