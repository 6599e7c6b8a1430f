"""The smallest result that has everything, and one whose names are hostile."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.result import CalibrationResult
from quant.calibration.sealed import Ledger
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
AUDIT = """[decision]
limit = 2.5
name = "drying, step 3"
[acceptance]
max_rmsep = 0.05
min_samples = 10
"""
CHEMISTRY = """[chemistry]
analyte = [[1035, 1015]]
matrix = [1000]
interferents = ["water"]
"""
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
    replicates: int = 1,
    levels: int = 13,
    ledger: Ledger | None = None,
    water: bool = False,
) -> CalibrationResult:
    """Calibrate on nine samples of six points, and six to validate; the disturbances are no random numbers.

    With `replicates`, every sample has so many spectra; with few `levels`, reference values come again.
    With `water`, the reference table has a column of it.
    With `repeats`, every value is the mean of two determinations, and S08 lies below a detection limit.
    """
    i = np.arange(len(ids))
    values = 1.0 + (5 * i) % levels * 0.25
    band, matrix = np.array([0.1, 0.4, 1.0, 0.4, 0.1, 0.0]), np.array([0.3, 0.2, 0.2, 0.5, 1.0, 0.6])
    spectra = values[:, None] * band + (1 + 0.1 * np.cos(2.0 * i))[:, None] * matrix
    spectra = np.repeat(spectra, replicates, axis=0)
    spectra += 0.01 * np.sin(np.outer(np.arange(1, len(spectra) + 1), np.arange(1, 7)) ** 1.5)
    each = [sample for sample in ids for _ in range(replicates)]
    axis = SpectralAxis(np.arange(1040.0, 980.0, -10.0), "cm-1")
    source = Source("paste.csv", 1234, "0123456789abcdef" * 4)
    below = np.full((len(ids) + 1, len(names)), np.nan)
    if repeats:
        below[7], values[7] = 0.5, np.nan
    table = ReferenceTable(
        [*ids, "X1"],
        [Analyte(name, "% m/m", laboratory_error) for name in names],
        np.append(values, 1.0)[:, None].repeat(len(names), axis=1),
        [
            {"origin": "process" if k % 2 else "spiked"}
            | ({"water": f"{1 + 0.1 * np.cos(2.0 * k):.4f}"} if water else {})
            for k in range(len(ids) + 1)
        ],
        censored=below,
        determinations=2 if repeats else 1,
        repeatability=dict.fromkeys(names, Repeatability(0.03, 14, 14)) if repeats else {},
    )
    samples = pair_samples(SpectraSet(spectra, axis, each, notes=[NOTES] * len(each), sources=[source]), table)
    result = calibrate(recipe_from_text(recipe.replace("{regression}", regression)), samples=samples, ledger=ledger)
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
def audited(tmp_path_factory):
    """Two spectra a sample, a limit, criteria of which one is not met, and a validation set looked at twice."""
    ledger = Ledger(tmp_path_factory.mktemp("ledger") / "looks.json")
    smallest(recipe=RECIPE, replicates=2, ledger=ledger)
    return smallest(recipe=RECIPE + AUDIT, replicates=2, ledger=ledger)


@pytest.fixture(scope="session")
def chemical():
    """Bands and an interferent are named."""
    return smallest(recipe=RECIPE + CHEMISTRY, water=True)


@pytest.fixture(scope="session")
def undecided():
    """The area of a band whose levels come again, and a limit below what it can see."""
    return smallest(BAND, recipe=RECIPE + "[decision]\nlimit = 0.001\n", levels=7)


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
