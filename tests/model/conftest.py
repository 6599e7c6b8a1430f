"""Two small models: PLS behind steps that learn, and the area of a band over that of another."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.model.calibration import Calibration
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

HEAD = """
title = "Säure in µm"
[spectra]
files = ["x"]
decimal = ","
[reference]
file = "x"
[[analyte]]
name = "acid"
unit = "% m/m"
laboratory_error = 0.05
"""
KINDS = {
    "pls": '[[preprocessing]]\nstep = "leave_out_ranges"\nranges = [[1690, 1710]]\n'
    '[[preprocessing]]\nstep = "msc"\n'
    '[[preprocessing]]\nstep = "savitzky_golay"\nwindow = 5\nderivative = 1\n'
    '[[preprocessing]]\nstep = "scale_columns"\n'
    "[regression]\nfactors = 2",
    "band_area": '[regression]\nmethod = "band_area"\nbands = [{ range = [1700, 1760], baseline = [1700, 1760] }]\n'
    'reference_band = { signal = "height", range = [1640, 1690] }',
}


@pytest.fixture(params=list(KINDS))
def model(request: pytest.FixtureRequest) -> Calibration:
    """Return a model of either kind."""
    rng = np.random.default_rng(1)
    axis, values = np.linspace(1800.0, 1600.0, 41), np.linspace(1.0, 9.0, 12)
    bands = np.stack([np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0)])
    content = np.stack([values, rng.uniform(4.9, 5.1, 12)], axis=1)
    ids = [f"S{i + 1:02d}" for i in range(12)]
    notes = [{"technique": "ATR"}] * 12
    spectra = 0.1 * content @ bands + rng.normal(0, 0.001, (12, 41)) + 0.01
    table = ReferenceTable(ids, [Analyte("acid", "% m/m", 0.05)], values[:, None])
    samples = pair_samples(SpectraSet(spectra, SpectralAxis(axis, "cm-1"), ids, notes=notes), table)
    return calibrate(recipe_from_text(HEAD + KINDS[request.param]), samples).model
