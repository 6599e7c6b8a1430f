"""Small sets of samples made in memory, and recipes with a table [screen] for them."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from quant.recipe.load import recipe_from_text
from quant.screening.problem import Problem
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet

HEAD = """
title = "A test"
[spectra]
files = ["spectra.csv"]
[reference]
file = "reference.csv"
[[analyte]]
name = "acid"
unit = "% m/m"
[regression]
max_factors = 5
"""
FOLDS = """
[cross_validation]
scheme = "random_folds"
folds = 4
repeats = 2
"""
STEPS = """
[[screen.choice]]
name = "scatter"
optional = true
steps = [{ step = "snv" }, { step = "msc" }]
[[screen.choice]]
name = "derivative"
optional = true
steps = [{ step = "savitzky_golay", window = 5, polynomial = 2, vary = { derivative = [0, 1] } }]
"""


def samples_of(n: int = 24, replicates: int = 1, seed: int = 1, **own: Any) -> SampleSet:
    """Spectra with one band that follows the acid's content, on another that does not."""
    rng = np.random.default_rng(seed)
    axis = np.linspace(1800.0, 1600.0, 41)
    values = own.get("values", np.linspace(1.0, 9.0, n))
    acid, matrix = (np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0))
    content = np.stack([np.linspace(1.0, 9.0, n), rng.uniform(4, 6, n)], axis=1)
    rows = np.repeat(np.arange(n), replicates)
    spectra = (content @ np.stack([acid, matrix]))[rows] * 0.1 + rng.normal(0, 0.01, (rows.size, axis.size))
    if "twins" in own:  # pairs of samples whose spectra become equal
        for one, other in own["twins"]:
            spectra[other] = spectra[one]
    ids = [f"S{i + 1:02d}" for i in range(n)]
    table = ReferenceTable(ids, [Analyte("acid", "% m/m")], values[:, None])
    return pair_samples(SpectraSet(spectra, SpectralAxis(axis, "cm-1"), [ids[i] for i in rows]), table)


@pytest.fixture(scope="session")
def make_samples() -> Callable[..., SampleSet]:
    return samples_of


@pytest.fixture(scope="session")
def make_recipe() -> Callable[..., Any]:
    """Return what makes a recipe of the tables that follow [screen]."""
    return lambda screen="", head=HEAD, folds=FOLDS: recipe_from_text(f"{head}{folds}[screen]\n{screen}", name="t.toml")


@pytest.fixture(scope="session")
def make_problem(make_recipe) -> Callable[..., Problem]:
    def make(screen: str = STEPS, samples: SampleSet | None = None, **own: Any) -> Problem:
        return Problem(samples_of() if samples is None else samples, make_recipe(screen, **own), "acid")

    return make
