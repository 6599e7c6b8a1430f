"""The smallest result that has everything, and one whose names are hostile."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.result import CalibrationResult
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source
from quant.spectra.reference_table import Analyte, ReferenceTable, Repeatability
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = """title = "Acetone in paste"
[spectra]
files = ["none.csv"]
[reference]
file = "none.csv"
[[analyte]]
name = "acetone"
unit = "% m/m"
[[exclude]]
samples = ["S09"]
reason = "bottle leaked"
[regression]
{regression}
[validation]
samples = ["V1..V6"]
"""
PLS = "max_factors = 2"
BAND = 'method = "band_area"\nbands = [{ signal = "area", range = [1030, 1010] }]'
NOTES = {"technique": "ATR", "resolution": "4"}
IDS = (*(f"S{i:02d}" for i in range(1, 10)), *(f"V{i}" for i in range(1, 7)))


def smallest(
    regression: str = PLS,
    *,
    recipe: str = RECIPE,
    ids=IDS,
    names=("acetone",),
    laboratory_error: float | None = 0.02,
    repeats: bool = False,
) -> CalibrationResult:
    """Calibrate on nine samples of six points, and six to validate; the disturbances are no random numbers.

    With `repeats`, every value is the mean of two determinations, and S08 lies below a detection limit.
    """
    i = np.arange(len(ids))
    values = 1.0 + (5 * i) % 13 * 0.25
    band, matrix = np.array([0.1, 0.4, 1.0, 0.4, 0.1, 0.0]), np.array([0.3, 0.2, 0.2, 0.5, 1.0, 0.6])
    spectra = values[:, None] * band + (1 + 0.1 * np.cos(2.0 * i))[:, None] * matrix
    spectra += 0.01 * np.sin(np.outer(i + 1, np.arange(1, 7)) ** 1.5)
    axis = SpectralAxis(np.arange(1040.0, 980.0, -10.0), "cm-1")
    source = Source("paste.csv", 1234, "0123456789abcdef" * 4)
    below = np.full((len(ids) + 1, len(names)), np.nan)
    if repeats:
        below[7], values[7] = 0.5, np.nan
    table = ReferenceTable(
        [*ids, "X1"],
        [Analyte(name, "% m/m", laboratory_error) for name in names],
        np.append(values, 1.0)[:, None].repeat(len(names), axis=1),
        [{"origin": "process" if k % 2 else "spiked"} for k in range(len(ids) + 1)],
        censored=below,
        determinations=2 if repeats else 1,
        repeatability=dict.fromkeys(names, Repeatability(0.03, 14, 14)) if repeats else {},
    )
    samples = pair_samples(SpectraSet(spectra, axis, ids, notes=[NOTES] * len(ids), sources=[source]), table)
    result = calibrate(recipe_from_text(recipe.replace("{regression}", regression)), samples=samples)
    versions = {"quant": "0.0.0", "numpy": "0.0.0", "python": "0.0.0"}  # of the golden texts
    analytes = tuple(replace(found, model=replace(found.model, versions=versions)) for found in result.analytes)
    return replace(result, analytes=analytes)


HOSTILE = '<script src="https://evil.example/x.js">alert(1)</script>'
HOSTILE_ID = "\"'><img src=x onerror=alert(1)>$\\frac{"


@pytest.fixture(scope="session")
def make():
    return smallest


@pytest.fixture(scope="session")
def pls():
    return smallest()


@pytest.fixture(scope="session")
def band():
    return smallest(BAND)


@pytest.fixture(scope="session")
def unvalidated():
    return smallest(recipe=RECIPE.partition("[validation]")[0], laboratory_error=None)


@pytest.fixture(scope="session")
def hostile():
    """A title, an analyte, a reason and sample IDs that try to be HTML, XML or formulas."""
    ids = [f"{HOSTILE_ID}{name}" for name in IDS]
    quoted = [sample.replace("\\", "\\\\").replace('"', '\\"') for sample in ids]
    recipe = RECIPE.replace("bottle leaked", HOSTILE.replace('"', '\\"')).replace('"acetone"', f"'{HOSTILE}'")
    recipe = recipe.replace('"Acetone in paste"', f"'{HOSTILE}'").replace('"S09"', f'"{quoted[8]}"')
    recipe = recipe.replace('"V1..V6"', ", ".join(f'"{sample}"' for sample in quoted[9:]))
    return smallest(recipe=recipe, ids=ids, names=(HOSTILE,))
