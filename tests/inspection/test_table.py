"""All checks together: they take whatever can be read, and speak in one form."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.inspection.finding import GRAVITIES
from quant.inspection.inspect import inspect
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = """title = "t"
[spectra]
files = ["none"]
[reference]
file = "none"
[[analyte]]
name = "a"
[[analyte]]
name = "b"
"""
BANDS = """[regression]
method = "band_area"
bands = [{ signal = "area", range = [1000, 2000] }]
reference_band = { signal = "area", range = [2000, 3000] }
"""


def odd_samples(rng, quantity):
    """Few or many samples, points and replicates; equal, huge, tiny or missing ordinates and values."""
    n, points, m = (int(rng.choice(numbers)) for numbers in ([1, 2, 3, 5, 9, 30], [8, 13, 40, 300], [1, 2, 3]))
    rows = rng.choice([1e-6, 1.0, 100.0]) * rng.normal(size=(n * m, points)) * rng.choice([0, 1])
    rows += rng.choice([0.0, 1.0, 0.5])
    rows[rng.random(rows.shape) < rng.choice([0.0, 0.01, 0.5, 1.0])] = np.nan
    values = rng.normal(size=(n, 2)) * rng.choice([0, 1])
    values[rng.random(values.shape) < rng.choice([0.0, 0.3])] = np.nan
    ids = [f"S{i}" for i in range(n)]
    axis = SpectralAxis(np.linspace(4000, 500, points), "cm-1")
    spectra = SpectraSet(rows, axis, [sample for sample in ids for _ in range(m)], quantity)
    return pair_samples(spectra, ReferenceTable(ids, [Analyte("a"), Analyte("b", "%")], values), missing="drop")


@pytest.mark.parametrize("quantity", ["absorbance", "transmittance", "reflectance", "log_reflectance", "arbitrary"])
@pytest.mark.parametrize("regression", ["", BANDS])
def test_whatever_can_be_read_can_be_looked_over(quantity, regression):
    step = "absorbance" if quantity == "transmittance" else "snv"
    recipe = recipe_from_text(f'{RECIPE}[[preprocessing]]\nstep = "{step}"\n{regression}')
    rng = np.random.default_rng(20260105)
    looked_over = 0
    for _ in range(20):
        try:
            result = inspect(recipe, samples=odd_samples(rng, quantity))
        except ParameterError as problem:
            assert "range of band" in str(problem)  # noqa: PT017 (the others are none: too few points for a band)
            continue
        looked_over += 1
        assert str(result).count("\n\n") >= len(result.findings)
        assert all(finding.gravity in GRAVITIES and finding.title and finding.code for finding in result.findings)
        result.to_json()
    assert looked_over >= 5


def test_a_band_without_signal_is_a_stop():
    rng = np.random.default_rng(1)
    axis = SpectralAxis(np.linspace(4000, 500, 71), "cm-1")
    rows = rng.random((10, 71))
    rows[4, (axis.values >= 2000) & (axis.values <= 3000)] = 0.0
    ids = [f"S{i}" for i in range(10)]
    table = ReferenceTable(ids, [Analyte("a"), Analyte("b")], rng.random((10, 2)))
    result = inspect(recipe_from_text(RECIPE + BANDS), samples=pair_samples(SpectraSet(rows, axis, ids), table))
    [finding] = result.found("no_band_signal")
    assert "row(s) 4" in finding.evidence
    assert not result.accepted
