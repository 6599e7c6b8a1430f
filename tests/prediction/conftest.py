"""Calibrations made in memory, of one band that follows the acid's content, and new spectra for them."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.model.calibration import Calibration
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

HEAD = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\nunit = "% m/m"\n'
BAND = '[regression]\nmethod = "band_area"\nbands = [{ signal = "height_at", position = 1730 }]'
NOISE = 0.004


def spectra_of(values: np.ndarray, seed: int, replicates: int = 1, **own: Any) -> SpectraSet:
    """Return noisy spectra of samples S01, S02 ... with so much acid."""
    rng = np.random.default_rng(seed)
    axis = np.linspace(1800.0, 1600.0, 41)
    bands = np.stack([np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0)])
    rows = np.repeat(np.arange(values.size), replicates)
    content = np.stack([values, rng.uniform(4, 6, values.size)], axis=1)[rows]
    spectra = 0.1 * content @ bands + rng.normal(0, NOISE, (rows.size, axis.size))
    return SpectraSet(spectra, SpectralAxis(axis, "cm-1"), [f"S{i + 1:02d}" for i in rows], **own)


@pytest.fixture
def new_spectra() -> Callable[..., SpectraSet]:
    """Return what makes new spectra."""
    return spectra_of


@pytest.fixture
def make_model() -> Callable[..., Calibration]:
    """Return what makes a model of 15 samples, by PLS with two factors unless told otherwise."""

    def make(tables: str = "[regression]\nfactors = 2", replicates: int = 1, **own: Any) -> Calibration:
        values = np.linspace(1.0, 9.0, 15)
        spectra = spectra_of(values, 1, replicates, notes=own.get("notes"))
        analyte = Analyte("acid", "% m/m", own.get("laboratory_error"))
        table = ReferenceTable([f"S{i + 1:02d}" for i in range(15)], [analyte], values[:, None])
        return calibrate(recipe_from_text(HEAD + tables), pair_samples(spectra, table)).model

    return make


@pytest.fixture
def band() -> str:
    """Return the tables of a recipe that reads one height backwards."""
    return BAND
