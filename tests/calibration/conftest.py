"""Small sets of samples made in memory, and recipes for them."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from quant.recipe.load import recipe_from_text
from quant.recipe.schema import Recipe
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
"""


@pytest.fixture
def make_recipe() -> Callable[..., Recipe]:
    """Return what makes a recipe of the tables that follow the analyte's."""
    return lambda tables="": recipe_from_text(HEAD + tables, name="test.toml")


@pytest.fixture
def make_samples() -> Callable[..., SampleSet]:
    """Return what makes samples with one band that follows the acid's content, on another that does not."""

    def make(
        n: int = 12, replicates: int = 1, seed: int = 1, notes: list[dict[str, str]] | None = None, **own: Any
    ) -> SampleSet:
        rng = np.random.default_rng(seed)
        axis = np.linspace(1800.0, 1600.0, 41)
        values = own.get("values", np.linspace(1.0, 9.0, n))
        acid, matrix = (np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0))
        content = np.stack([values, rng.uniform(4, 6, n)], axis=1)
        rows = np.repeat(np.arange(n), replicates)
        spectra = (content @ np.stack([acid, matrix]))[rows] * 0.1 + rng.normal(0, 0.002, (rows.size, axis.size))
        ids = [f"S{i + 1:02d}" for i in range(n)]
        table = ReferenceTable(ids, [Analyte("acid", "% m/m", own.get("laboratory_error"))], values[:, None], notes)
        return pair_samples(
            SpectraSet(spectra, SpectralAxis(axis, "cm-1"), [ids[i] for i in rows]), table, missing="drop"
        )

    return make
