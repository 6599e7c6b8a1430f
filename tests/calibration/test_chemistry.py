"""What a recipe may say of chemistry and what becomes of it: columns, other analytes, band area."""

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.indirect import DIRECT, INDIRECT, UNKNOWN
from quant.errors import RecipeError
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

N = 16
RECIPE = """title = "t"
[spectra]
files = ["none.csv"]
[reference]
file = "none.csv"
decimal = ","
[[analyte]]
name = "acetone"
[regression]
"""
PLS = "max_factors = 3\n"
BAND = 'method = "band_area"\nbands = [{ signal = "height_at", position = 1715 }]\n'


def calibrated(chemistry, regression=PLS, *, analytes=("acetone",), water=None, unit="cm-1"):
    """Two bands, at 1715 of acetone and at 1640 of water; contents by fixed rules."""
    i = np.arange(N)
    acetone, moist = 1 + (5 * i) % 16 / 8, 1 + (7 * i) % 16 / 8
    axis = np.arange(1800.0, 1600.0, -5.0)
    bands = [np.exp(-(((axis - position) / 15) ** 2)) for position in (1715, 1640)]
    spectra = np.column_stack([acetone, moist]) @ bands + 0.002 * np.sin(np.outer(i + 1, np.arange(40) + 1) ** 1.5)
    ids = [f"S{k}" for k in i]
    cells = water or [f"{each:.3f}".replace(".", ",") for each in moist]
    columns = np.column_stack([acetone, moist])[:, : len(analytes)]
    table = ReferenceTable(ids, [Analyte(name) for name in analytes], columns, [{"moisture": cell} for cell in cells])
    samples = pair_samples(
        SpectraSet(spectra, SpectralAxis(axis if unit == "cm-1" else i_axis(axis), unit), ids), table
    )
    recipe = RECIPE + regression + chemistry
    for name in analytes[1:]:
        recipe += f'[[analyte]]\nname = "{name}"\n'
    return calibrate(recipe_from_text(recipe), samples=samples)


def i_axis(axis):
    """Number points instead."""
    return np.arange(axis.size, dtype=float)


def test_a_column_with_decimal_commas_and_gaps():
    cells = [f"{1 + (7 * i) % 16 / 8:.3f}".replace(".", ",") for i in range(N)]
    cells[0], cells[1] = "", "<0,1"
    behind = calibrated('[chemistry]\ninterferents = ["moisture"]\n', water=cells)["acetone"].chemistry
    assert (behind.verdict, behind.test.n_samples) == (DIRECT, N - 2)


def test_another_analyte_serves_as_interferent():
    result = calibrated('[[chemistry]]\nname = "water"\ninterferents = ["acetone"]\n', analytes=("acetone", "water"))
    assert result["water"].chemistry.verdict == DIRECT
    assert result["water"].chemistry.test.effects[1].name == "acetone"
    assert result["acetone"].chemistry.verdict == UNKNOWN  # nothing is said of it
    assert result["acetone"].chemistry.test is None


@pytest.mark.parametrize(
    ("name", "water", "words"),
    [
        ("humidity", None, "no column of the reference table; there are 'acetone', 'moisture'"),
        ("moisture", ["dry"] * N, "found 'dry' in column 'moisture'"),
    ],
)
def test_columns_that_are_refused(name, water, words):
    with pytest.raises(RecipeError, match=words):
        calibrated(f'[chemistry]\ninterferents = ["{name}"]\n', water=water)


def test_bands_alone():
    right = calibrated("[chemistry]\nanalyte = [1715]\nmatrix = [1640]\nhalf_width = 30\n")["acetone"].chemistry
    assert right.verdict == DIRECT
    assert right.share_of("bands of the analyte") > 0.9
    assert right.share_of("no such region") == 0
    wrong = calibrated("[chemistry]\nanalyte = [1640]\nmatrix = [1715]\nhalf_width = 30\n")["acetone"].chemistry
    assert (wrong.verdict, wrong.through) == (INDIRECT, "the bands of the matrix")
    unsaid = calibrated("[chemistry]\nanalyte = [1640]\nhalf_width = 30\n")["acetone"].chemistry
    assert unsaid.verdict == UNKNOWN  # the matrix may absorb anywhere
    away = calibrated("[chemistry]\nanalyte = [1047]\nmatrix = [1715]\n")["acetone"].chemistry
    assert "None of the bands of the analyte lies where the calibration looks." in away.remarks


def test_without_a_regression_vector_only_the_interferents_are_tested():
    assert calibrated("", BAND)["acetone"].chemistry is None
    behind = calibrated('[chemistry]\nanalyte = [1715]\ninterferents = ["moisture"]\n', BAND)["acetone"].chemistry
    assert behind.verdict == DIRECT
    assert behind.shares == ()
    assert behind.remarks == ("No shares of bands are stated: the method has no regression vector.",)
    alone = calibrated("[chemistry]\nanalyte = [1715]\n", BAND)["acetone"].chemistry
    assert alone.verdict == UNKNOWN


def test_point_numbers_have_no_bands():
    behind = calibrated("[chemistry]\nanalyte = [1715]\n", unit="point")["acetone"].chemistry
    assert (behind.verdict, behind.shares) == (UNKNOWN, ())
    assert "counts points" in behind.remarks[0]


def test_it_is_printed_where_the_recipe_speaks_of_it():
    assert "Chemistry: predicts the analyte" in str(calibrated("[chemistry]\nanalyte = [1715]\nhalf_width = 30\n"))
    assert "Chemistry" not in str(calibrated(""))
