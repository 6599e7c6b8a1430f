"""Sets of the drying demo with known truth: what intervals and limits promise is counted on them.

The long tests leave their counts in tests/long/results.json, from which the README quotes.
"""

import importlib.util
import json
import platform
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest
from scipy import stats

from quant.calibration.calibrate import calibrate
from quant.model.calibration import Calibration
from quant.prediction.applicability import NOT_APPLICABLE
from quant.prediction.predict import predict
from quant.recipe.load import load_recipe
from quant.spectra.sample_set import pair_samples

SEED = 20261201  # fixed before the first run
MARGIN = 4  # new samples drawn for each one counted, since those outside the calibrated range do not count


@dataclass
class Counts:
    """What was counted over many sets."""

    sets: int = 0
    covered: int = 0  # first in-domain new sample of each set: its new reference result inside the interval
    covered_true: int = 0  # its true value inside that interval
    true_intervals: int = 0
    covered_at_half_width: int = 0  # control: intervals half as wide
    new: int = 0  # in-domain new samples
    rejected: int = 0  # called not applicable
    beyond_calibration: int = 0  # control: residual beyond the 99 % point of the calibration's own residuals
    foreign: Counter[str] = field(default_factory=Counter)  # foreign spectra called not applicable, by kind


@pytest.fixture(scope="session")
def drying(repository: Path) -> ModuleType:
    """The module that draws sets of the drying demo."""
    path = repository / "demo_sets" / "dryer_solvent" / "make.py"
    specification = importlib.util.spec_from_file_location("drying", path)
    assert specification is not None
    assert specification.loader is not None
    module = importlib.util.module_from_spec(specification)
    specification.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def count_sets(drying: ModuleType, repository: Path) -> Callable[..., Counts]:
    """Draw sets, calibrate each by the demo's recipe, predict new samples and foreign spectra, and count."""
    recipe = load_recipe(repository / "configs" / "dryer_solvent.toml").model_copy(update={"validation": None})

    def count(n_sets: int, n_standards: int, new_a_set: int, seed: int = SEED) -> Counts:
        counts = Counts(sets=n_sets)
        for number in range(n_sets):
            rng = np.random.default_rng([seed, n_standards, number])
            part = drying.draw_set(rng, n_standards, 4, 4).standards
            samples = pair_samples(part.spectra.with_notes(recipe.spectra.notes), part.reference)
            result = calibrate(recipe, samples=samples).analytes[0]
            new = drying.draw_part(rng, MARGIN * new_a_set, "N", 61)
            _count_new(counts, result.model, new, new_a_set, float(np.quantile(result.picture.residual, 0.99)))
            _count_foreign(counts, result.model, drying, rng)
        return counts

    return count


def _count_new(counts: Counts, model: Calibration, new: object, wanted: int, calibration_limit: float) -> None:
    limits = model.limits
    inside = np.flatnonzero((new.truth >= limits.lowest) & (new.truth <= limits.highest))[:wanted]
    assert inside.size == wanted
    names = [new.reference.sample_ids[i] for i in inside]
    result = predict(model, new.spectra.select(names))
    counts.new += wanted
    counts.rejected += sum(row.applicability == NOT_APPLICABLE for row in result.predictions)
    residuals = [row.residual * limits.residual_warn for row in result.predictions]
    counts.beyond_calibration += sum(residual > calibration_limit for residual in residuals)
    first, value, truth = result.predictions[0], new.reference.values[inside[0], 0], new.truth[inside[0]]
    counts.covered += int(first.low <= value <= first.high)
    counts.covered_at_half_width += int(abs(value - first.value) <= (first.high - first.low) / 4)
    if first.true_low is not None and first.true_high is not None:
        counts.true_intervals += 1
        counts.covered_true += int(first.true_low <= truth <= first.true_high)


def _count_foreign(counts: Counts, model: Calibration, drying: ModuleType, rng: np.random.Generator) -> None:
    for kind in drying.FOREIGN:
        spectra = drying.as_spectra(drying.foreign_spectra(rng, kind, 1), ["X"], 1)
        counts.foreign[kind] += predict(model, spectra)["X"].applicability == NOT_APPLICABLE


@pytest.fixture(scope="session")
def bounds() -> Callable[[int, float], tuple[int, int]]:
    """99.9 % bounds of a binomial count about its nominal rate."""
    return lambda n, rate: (int(stats.binom.ppf(0.0005, n, rate)), int(stats.binom.ppf(0.9995, n, rate)))


@pytest.fixture
def keep_result(repository: Path) -> Callable[[str, dict[str, object]], None]:
    """Write counts of a long test into tests/long/results.json, with versions and seed."""
    path = repository / "tests" / "long" / "results.json"

    def keep(name: str, found: dict[str, object]) -> None:
        content = json.loads(path.read_text("utf-8")) if path.exists() else {}
        content[name] = {
            **found,
            "seed": found.get("seed", SEED),
            "numpy": np.__version__,
            "python": platform.python_version(),
        }
        path.write_text(json.dumps(dict(sorted(content.items())), indent=2) + "\n", encoding="utf-8")

    return keep
