"""Cells of a column of reference values: numbers, limits, words; units and basis."""

import math
from pathlib import Path

import pytest

from quant.errors import FileFormatError, ParameterError
from quant.readers.reference_column import ColumnOf
from quant.spectra.reference_table import Analyte

FAT = Analyte("fat", "% m/m")
PATH = Path("r.csv")


def read(cell, column=None, moisture="", decimal="."):
    return (column or ColumnOf(FAT)).read(PATH, 7, cell, moisture, decimal)


@pytest.mark.parametrize(
    "cell", ["<0.05", "< 0.05", "<=0.05", "≤ 0.05", "n.d. <0.05", "nd < 0.05", "N.D. (<0.05)", "not detected (< 0.05)"]
)
def test_limits(cell):
    value, limit = read(cell)
    assert math.isnan(value)
    assert limit == 0.05


def test_a_limit_with_a_comma():
    assert read("< 0,05", decimal=",")[1] == 0.05
    with pytest.raises(FileFormatError, match=r"line 7: found '0,05' in column 'fat'; .*Set decimal = \",\""):
        read("< 0,05")


@pytest.mark.parametrize("cell", ["nd", "N.D.", "n.d", "not detected", "<LOD", "< LOQ"])
def test_words_need_the_limit(cell):
    assert read(cell, ColumnOf(FAT, detection_limit=0.1))[1] == 0.1
    with pytest.raises(FileFormatError, match=r"State what it means as detection_limit under \[\[analyte\]\]"):
        read(cell)


@pytest.mark.parametrize("cell", ["", "-", "N/A", "nan"])
def test_no_value(cell):
    assert all(map(math.isnan, read(cell)))


@pytest.mark.parametrize(
    ("cell", "message"),
    [
        ("<0", "expected a detection limit above 0"),
        ("<-1", "expected a detection limit above 0"),
        ("<", "found '<' in column 'fat'; expected a number"),
        (">5", "found '>5' in column 'fat'; expected a number"),
        ("<0.05 %", "found '0.05 %' in column 'fat'; expected a number"),
        ("<<1", "expected a number"),
        ("n.d. 0.05", "expected a number"),
        ("1e999", r"expected a number of at most 1e\+100"),
        ("<-1e200", r"expected a number of at most|above 0"),
    ],
)
def test_neither_value_nor_limit(cell, message):
    with pytest.raises(FileFormatError, match=message):
        read(cell)


def test_units():
    column = ColumnOf(FAT, unit="mg/kg", detection_limit=100)
    assert read("500", column)[0] == 0.05
    assert read("<500", column)[1] == 0.05
    assert read("nd", column)[1] == 0.01  # the limit is in the unit of the cells
    per_litre = ColumnOf(Analyte("NaCl", "mol/L"), unit="% m/m", density=1.02, molar_mass=58.44)
    assert read("5.844", per_litre)[0] == pytest.approx(1.02)


def test_basis():
    column = ColumnOf(Analyte("fat", "% m/m", basis="dry"), unit="g/kg", basis="wet", moisture_column="water")
    assert read("100", column, "20")[0] == pytest.approx(12.5)
    assert read("<100", column, "20")[1] == pytest.approx(12.5)
    assert math.isnan(read("", column, "")[0])  # no value, no moisture needed
    for moisture in ("", "100", "-1"):
        with pytest.raises(
            FileFormatError, match="as moisture in column 'water'; expected a number from 0 to below 100 %"
        ):
            read("100", column, moisture)
    back = ColumnOf(Analyte("fat", "% m/m", basis="wet"), basis="dry", moisture_column="water", moisture_unit="g/kg")
    assert read("12.5", back, "200")[0] == pytest.approx(10)


@pytest.mark.parametrize(
    ("analyte", "options", "message"),
    [
        (FAT, {"unit": "g/L"}, "without density of the sample"),
        (Analyte("fat"), {"unit": "ppm"}, "column_unit = 'ppm' needs unit"),
        (FAT, {"density": 1.0}, "density and molar_mass go with column_unit"),
        (FAT, {"detection_limit": 0.0}, "detection_limit = 0.0; expected a number above 0"),
        (FAT, {"detection_limit": float("nan")}, "detection_limit = nan"),
        (FAT, {"basis": "dry"}, "column_basis = 'dry' needs basis"),
        (
            Analyte("fat", "% m/m", basis="wet"),
            {"basis": "dry"},
            "without the moisture of each sample; name its column",
        ),
        (FAT, {"moisture_column": "water"}, "moisture_column is given, but no basis is changed"),
        (
            Analyte("fat", "g/L", basis="wet"),
            {"basis": "dry", "moisture_column": "w"},
            "from dry to wet basis of unit = 'g/L'; expected a mass fraction",
        ),
        (
            Analyte("fat", "% m/m", basis="wet"),
            {"basis": "dry", "moisture_column": "w", "moisture_unit": "mg/L"},
            "moisture_unit = 'mg/L'; expected a mass fraction",
        ),
    ],
)
def test_what_cannot_be_converted(analyte, options, message):
    with pytest.raises(ParameterError, match=message):
        ColumnOf(analyte, **options)
