"""The pipeline of a recipe: fresh steps and a fresh regression for one axis."""

import numpy as np
import pytest

from quant.errors import ParameterError, QuantityError, RecipeError
from quant.recipe.load import recipe_from_text
from quant.recipe.pipeline import axis_behind, build_method, build_steps
from quant.regression.band_area import BandArea
from quant.regression.pls import PLS
from quant.spectra.axis import SpectralAxis

SMALLEST = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n'
AXIS = SpectralAxis(np.linspace(1800.0, 1600.0, 41), "cm-1")


def recipe_of(*steps: str, tables: str = ""):
    return recipe_from_text(
        SMALLEST + "".join(f"[[preprocessing]]\n{step}\n" for step in steps) + tables, name="a.toml"
    )


def test_each_step_knows_the_axis_it_meets():
    recipe = recipe_of('step = "keep_ranges"\nranges = [[1750, 1650]]', 'step = "savitzky_golay"\nwindow = 5')
    keep, smooth = build_steps(recipe, AXIS, "absorbance")
    assert keep.axis.tolist() == AXIS.values.tolist()
    assert smooth.axis.tolist() == AXIS.values[10:31].tolist()
    assert axis_behind([keep, smooth], AXIS).tolist() == AXIS.values[10:31].tolist()
    assert build_steps(recipe_of(), AXIS, "absorbance") == []


def test_transmittance_has_to_become_absorbance():
    assert len(build_steps(recipe_of('step = "absorbance"'), AXIS, "transmittance")) == 1
    with pytest.raises(
        QuantityError, match="The spectra are transmittance, which is not proportional to concentration"
    ):
        build_steps(recipe_of('step = "snv"'), AXIS, "transmittance")
    with pytest.raises(
        QuantityError, match="The step 'absorbance' needs transmittance, but the spectra are absorbance"
    ):
        build_steps(recipe_of('step = "absorbance"'), AXIS, "absorbance")


def test_the_number_of_the_wrong_table_is_told():
    with pytest.raises(RecipeError, match=r"^a\.toml, \[\[preprocessing\]\] number 2: unknown step 'x'"):
        build_steps(recipe_of('step = "snv"', 'step = "x"'), AXIS, "absorbance")
    with pytest.raises(ParameterError, match="1000"):
        build_steps(recipe_of('step = "keep_ranges"\nranges = [[1000, 900]]'), AXIS, "absorbance")


def test_the_method():
    pls = build_method(recipe_of(), AXIS.values, 7)
    assert isinstance(pls, PLS)
    assert pls.n_factors == 7
    bands = """[regression]
method = "band_area"
bands = [{ range = [1700, 1760], baseline = [1700, 1760] }, { signal = "height_at", position = 1720 }]
reference_band = { signal = "height", range = [1640, 1690] }
through_origin = true
"""
    area = build_method(recipe_of(tables=bands), AXIS.values, 1)
    assert isinstance(area, BandArea)
    assert area.bands == [
        {"signal": "area", "range": [1700.0, 1760.0], "baseline": [1700.0, 1760.0]},
        {"signal": "height_at", "position": 1720.0},
    ]
    assert area.reference_band == {"signal": "height", "range": [1640.0, 1690.0]}
    assert area.through_origin is True
    assert area.axis.tolist() == AXIS.values.tolist()
