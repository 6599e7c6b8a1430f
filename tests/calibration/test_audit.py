"""What the audit gives the model: a limit, its guard band, and the solvents' table."""

import numpy as np
import pytest
from scipy import stats

from quant.calibration.calibrate import calibrate
from quant.chemistry.solvent_limits import EDITION
from quant.errors import RecipeError
from quant.recipe.load import recipe_from_text

PLS = "[regression]\nfactors = 2\n"


def test_a_limit_becomes_a_rule_of_the_model(make_recipe, make_samples):
    text = '[decision]\nlimit = 4.0\nkind = "lower"\nrisk = 0.01\nname = "assay"\nsource = "specification 12"\n'
    found = calibrate(make_recipe(PLS + text), make_samples(20))
    rule = found.model.decision
    assert (rule.limit, rule.kind, rule.risk) == (4.0, "lower", 0.01)
    assert rule.factor == pytest.approx(stats.t.ppf(0.99, 17))
    told = found.analytes[0].audit.decision
    assert told.told == "assay: lower limit 4 % m/m (specification 12), risk 1 %"
    assert (told.decidable, told.remark) == (True, "")


@pytest.mark.parametrize(
    ("limit", "decidable", "remark"),
    [
        (0.001, False, "it lies below the limit of quantification of "),
        (20.0, True, "the limit lies outside the calibrated range 1 to 9 % m/m"),
    ],
)
def test_limits_that_mean_little(make_recipe, make_samples, limit, decidable, remark):
    told = calibrate(make_recipe(f"{PLS}[decision]\nlimit = {limit}"), make_samples(20)).analytes[0].audit.decision
    assert told.decidable is decidable
    assert told.remark.startswith(remark)


def test_a_solvent_of_the_table(make_samples):
    recipe = (
        'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\nunit = "{}"\n'
        "[regression]\nfactors = 2\n[decision]\n{}"
    )
    samples = make_samples(20, values=np.linspace(0.0, 0.5, 20))
    # ICH Q3C, option 1: acetonitrile 410 ppm, PDE 4.1 mg/day [from memory], published-values 3.2
    text = recipe.format("% m/m", 'solvent = "acetonitrile"')
    rule = calibrate(recipe_from_text(text), samples).model.decision
    assert rule.limit == pytest.approx(0.041)
    assert EDITION in rule.source
    half = recipe.format("% m/m", 'solvent = "acetonitrile"\ndose = 5.0')
    assert calibrate(recipe_from_text(half), samples).model.decision.limit == pytest.approx(0.082)
    unknown = recipe.format("% m/m", 'solvent = "acetonitril"')
    with pytest.raises(RecipeError, match="Did you mean acetonitrile"):
        calibrate(recipe_from_text(unknown), samples)
    elsewhere = recipe.format("octane number", 'solvent = "acetonitrile"')
    with pytest.raises(RecipeError, match=r"\[decision\] of acid: No conversion from 'mg/kg' to 'octane number'"):
        calibrate(recipe_from_text(elsewhere), samples)
