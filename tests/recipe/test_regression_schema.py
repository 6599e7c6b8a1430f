"""What [regression] may say, and what it becomes."""

import numpy as np
import pytest

from quant.errors import RecipeError
from quant.recipe.load import recipe_from_text
from quant.recipe.pipeline import build_method
from quant.recipe.regression_schema import RegressionTable
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.pcr import PCR
from quant.regression.registry import METHODS

HEAD = """title = "A mixture"
[spectra]
files = ["a.csv"]
[reference]
file = "b.csv"
[[analyte]]
name = "ester"
[[analyte]]
name = "acid"
"""
AXIS = np.linspace(1800.0, 1600.0, 21)
BAND = 'method = "band_area"\nbands = [{ range = [1700, 1750] }]\n'
CLS = 'method = "classical_least_squares"\n'


def recipe(regression, more=""):
    return recipe_from_text(f"{HEAD}[regression]\n{regression}\n{more}", name="test.toml")


def test_every_registered_method_can_be_asked_for():
    methods = RegressionTable.model_json_schema()["properties"]["method"]["enum"]
    assert methods == list(METHODS)


def test_pcr_is_built_with_the_factors_looked_at():
    method = build_method(recipe('method = "pcr"'), AXIS, 7)
    assert type(method) is PCR
    assert method.n_factors == 7


def test_classical_least_squares_has_all_other_analytes_and_columns_as_components():
    asked = recipe(f'{CLS}components = ["water"]\nbackground = true\nbaseline = "slope"\nnon_negative = true')
    method = build_method(asked, AXIS, 1, "acid")
    assert type(method) is ClassicalLeastSquares
    assert method.companions == ("ester", "water")
    assert (method.background, method.baseline, method.non_negative) == (True, "slope", True)
    assert method.axis is AXIS
    assert build_method(asked, AXIS, 1).companions == ("acid", "water")


def test_curve_and_weights_reach_the_band_area():
    method = build_method(recipe(f'{BAND}line_weights = "1/s^2"\nsd_column = "sd"'), AXIS, 1)
    assert type(method) is BandArea
    assert method.companions == ("sd",)
    assert build_method(recipe(f'{BAND}curve = "quadratic"'), AXIS, 1).curve == "quadratic"


def test_defaults_are_those_of_the_estimators():
    plain = build_method(recipe(BAND), AXIS, 1)
    assert (plain.curve, plain.line_weights, plain.sd_column) == ("line", "equal", None)
    assert (plain.curve, plain.line_weights) == (BandArea().curve, BandArea().line_weights)
    bare, default = build_method(recipe(CLS), AXIS, 1), ClassicalLeastSquares()
    for name in ("background", "baseline", "non_negative"):
        assert getattr(bare, name) == getattr(default, name)


@pytest.mark.parametrize(
    ("regression", "terms"),
    [
        (BAND, (1, "a straight line")),
        (f"{BAND}through_origin = true", (0, "a straight line")),
        (f'{BAND}curve = "quadratic"', (2, "a quadratic")),
        (CLS, (1, "2 components")),
        (f'{CLS}components = ["water"]\nbackground = true', (3, "3 components and a background")),
    ],
)
def test_methods_without_a_choice_of_factors_say_their_terms(regression, terms):
    table = recipe(regression).regression
    assert not table.on_factors
    assert table.fixed_terms(2) == terms


def test_pls_and_pcr_choose():
    assert [recipe(f'method = "{name}"').regression.on_factors for name in ("pls", "pcr")] == [True, True]


@pytest.mark.parametrize(
    ("regression", "message"),
    [
        ('method = "pcr"\nbaseline = "slope"', 'baseline does not belong to method = "pcr"'),
        ('method = "pls"\ncurve = "quadratic"', 'curve does not belong to method = "pls"'),
        (f"{CLS}max_factors = 3", 'max_factors does not belong to method = "classical_least_squares"'),
        (f'{BAND}components = ["water"]', 'components does not belong to method = "band_area"'),
        (f'{BAND}curve = "quadratic"\nthrough_origin = true', "through_origin = true does not go with"),
        (f'{BAND}line_weights = "1/s^2"', 'line_weights = "1/s\\^2" and sd_column'),
        (f'{BAND}sd_column = "sd"', 'line_weights = "1/s\\^2" and sd_column'),
        (f'{BAND}line_weights = "1/y"', "line_weights = '1/y'; expected 'equal', '1/x', '1/x\\^2' or '1/s\\^2'"),
        (f'{CLS}components = ["acid"]', "components name acid twice"),
        (f'{CLS}components = ["water", "water"]', "components name water twice"),
    ],
)
def test_what_does_not_belong_together_is_refused(regression, message):
    with pytest.raises(RecipeError, match=message):
        recipe(regression)


@pytest.mark.parametrize("step", ["snv", "msc", "mean_centre"])
def test_steps_that_undo_sums_of_spectra_are_refused(step):
    steps = f'[[preprocessing]]\nstep = "{step}"\n'
    with pytest.raises(RecipeError, match=f"sums of pure spectra, which {step} undoes"):
        recipe(CLS, steps)
    assert recipe('method = "pcr"', steps).regression.method == "pcr"
