"""Results to draw: simulated, small, the same every time."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.result import AnalyteResult
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

HEAD = """
title = "Acetone in paste"
[spectra]
files = ["none.csv"]
[reference]
file = "none.csv"
[[analyte]]
name = "acetone"
unit = "% m/m"
"""
CUT = '[[preprocessing]]\nstep = "keep_ranges"\nranges = [[1800, 1600], [1300, 1100]]\n'
BAND = """[regression]
method = "band_area"
bands = [{ signal = "area", range = [1745, 1685], baseline = [1780, 1650] }]
reference_band = { signal = "height", range = [1260, 1180], baseline = [1290, 1110] }
"""
VALIDATED = '[validation]\nsamples = ["S21..S28"]\n'
AXIS = np.arange(1800.0, 1096.0, -4.0)


def small(recipe: str, *, axis=AXIS, unit="cm-1", name=str, odd=False) -> AnalyteResult:
    """Calibrate on 28 simulated samples; `name` turns S01 into a sample ID, `odd` puts a foreign band into S28."""
    rng = np.random.default_rng(20260101)
    values = np.linspace(0.5, 5.0, 28)[rng.permutation(28)].round(3)
    band = np.exp(-(((AXIS - 1715) / 14) ** 2))
    matrix = np.exp(-(((AXIS - 1220) / 18) ** 2)) + 0.3 * np.exp(-(((AXIS - 1660) / 30) ** 2))
    spectra = 0.1 * values[:, None] * band + rng.uniform(0.9, 1.1, (28, 1)) * matrix
    spectra += rng.normal(0, 5e-4, spectra.shape)
    if odd:
        spectra[27] += 0.5 * np.exp(-(((AXIS - 1180) / 10) ** 2))
    ids = [name(f"S{i + 1:02d}") for i in range(28)]
    samples = pair_samples(
        SpectraSet(spectra, SpectralAxis(axis, unit), ids),
        ReferenceTable(ids, [Analyte("acetone", "% m/m")], values[:, None]),
    )
    return calibrate(recipe_from_text(HEAD + recipe), samples=samples).analytes[0]


@pytest.fixture(scope="session")
def make():
    return small


@pytest.fixture(scope="session")
def pls():
    return small(CUT + VALIDATED)


@pytest.fixture(scope="session")
def unvalidated():
    return small("")


@pytest.fixture(scope="session")
def band():
    return small(BAND + VALIDATED)
