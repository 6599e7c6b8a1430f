"""What a recipe says of reference values, and that it reaches the reader."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import RecipeError
from quant.readers.dates import ORDERS
from quant.readers.reference_csv import REPLICATES
from quant.recipe.load import load_samples, recipe_from_text
from quant.recipe.reference_schema import AnalyteTable, ReferenceSection
from quant.spectra.reference_table import BASES

HEAD = 'title = "t"\n[spectra]\nfiles = ["spectra.csv"]\naxis_unit = "nm"\n[reference]\nfile = "values.csv"\n'


def words(model, key):
    entry = model.model_json_schema()["properties"][key]
    return {word for branch in [entry, *entry.get("anyOf", [])] for word in branch.get("enum", [])}


def test_words_agree_with_those_of_the_reader():
    assert words(ReferenceSection, "replicates") == set(REPLICATES)
    assert words(ReferenceSection, "date_order") == set(ORDERS)
    assert words(AnalyteTable, "basis") == words(AnalyteTable, "column_basis") == set(BASES)


def test_everything_reaches_the_reader(tmp_path: Path):
    (tmp_path / "spectra.csv").write_text("sample,900,902,904\nA,1,2,3\nB,2,3,4\n")
    (tmp_path / "values.csv").write_text(
        "sample;fat;water;sampled;salt\nA;90,0;10;03/04/2026;nd\nA;80,0;20;03/04/2026;nd\nB;<70;30;;<0,2\n"
    )
    text = f"""{HEAD}decimal = ","
replicates = "average"
date_column = "sampled"
date_order = "mdy"
[[analyte]]
name = "fat"
unit = "% m/m"
column_unit = "g/kg"
basis = "dry"
column_basis = "wet"
moisture_column = "water"
[[analyte]]
name = "NaCl"
column = "salt"
unit = "mol/L"
column_unit = "% m/m"
density = 1.02
molar_mass = 58.44
detection_limit = 0.1
"""
    samples = load_samples(recipe_from_text(text, folder=tmp_path))
    assert samples.analytes[0].printed_unit == "% m/m dry basis"
    assert samples.values[0, 0] == pytest.approx(10)
    assert samples.upper_limits("fat")[1] == pytest.approx(10)
    assert samples.upper_limits("NaCl") == pytest.approx(np.array([1.02, 2.04]) / 58.44)
    assert samples.determinations.tolist() == [[2, 2], [1, 1]]
    assert samples.notes[0]["date"] == "2026-03-04"


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ('unit = "g/L"\ncolumn_unit = "ppm"', "No conversion from 'ppm' .* without density of the sample"),
        ('unit = "g/L"\ncolumn_unit = "%"', "'%' alone does not say of what"),
        ('unit = "mg/kg"\ndensity = 1.0', "density and molar_mass go with column_unit"),
        ('basis = "dry"\ncolumn_basis = "wet"', "name its column as moisture_column"),
        ('basis = "moist"', "basis = 'moist'; expected 'wet' or 'dry'"),
        ('moisture_unit = "g/kg"', "moisture_unit goes with moisture_column"),
        ("detection_limit = 0", "detection_limit = 0; expected greater than 0"),
        ('unit = "g/L"\ncolumn_unit = "mol/L"\nmolar_mass = -1', "molar_mass = -1; expected greater than 0"),
    ],
)
def test_contradictions(keys, message):
    with pytest.raises(RecipeError, match=rf"^recipe\.toml, \[analyte\] number 1: .*{message}") as caught:
        recipe_from_text(f'{HEAD}[[analyte]]\nname = "fat"\n{keys}', name="recipe.toml")
    assert ".." not in str(caught.value)
