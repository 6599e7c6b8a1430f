"""From a recipe to calibrations: what is chosen, kept and told."""

import json
import math
from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.result import NOT_PROVEN
from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.recipe.load import recipe_from_text
from quant.spectra.reference_table import Analyte
from quant.statistics.factor_rules import RULES


def with_ordinates(samples, values):
    return replace(samples, spectra=replace(samples.spectra, values=values))


def test_the_rule_chooses_and_is_told(make_samples, make_recipe):
    found = {
        rule: calibrate(make_recipe(f'[regression]\nfactors = "{rule}"'), make_samples(n=16))["acid"] for rule in RULES
    }
    for rule, result in found.items():
        assert result.factors == result.model.factors == result.cross_validation.choices[rule]
        assert result.rule == rule.replace("_", " ")
    fixed = calibrate(make_recipe("[regression]\nfactors = 3"), make_samples(n=16))["acid"]
    assert (fixed.factors, fixed.rule) == (3, "fixed in the recipe")


def test_the_model_predicts_what_was_fitted(make_samples, make_recipe):
    samples = make_samples(n=12, replicates=3)
    found = calibrate(make_recipe('[[preprocessing]]\nstep = "snv"\n[regression]\nfactors = 2'), samples)["acid"]
    assert found.model.predict_values(samples.spectra.values).shape == (36,)
    mean = samples.mean_by_sample(found.model.process(samples.spectra.values))
    assert found.fitted == pytest.approx(found.model.method.predict(mean))
    assert found.calibration.rmse == pytest.approx(np.sqrt(np.mean((found.fitted - found.reference) ** 2)))
    assert (found.n_samples, found.n_spectra) == (12, 36)


def test_test_spectra_span_the_range(make_samples, make_recipe):
    samples = make_samples(n=13, replicates=2)
    model = calibrate(make_recipe(), samples).model
    assert model.test_spectra.tolist() == samples.spectra.values[[0, 12, 24]].tolist()
    assert model.predict_values(model.test_spectra) == pytest.approx(model.test_predictions, abs=1e-12)


def test_factors_that_are_noise_are_not_kept(make_samples, make_recipe):
    samples = make_samples(n=12)
    exact = np.outer(samples.values[:, 0], np.linspace(1, 2, 41))
    made = with_ordinates(samples, exact)
    found = calibrate(make_recipe("[regression]\nfactors = 3"), made)["acid"]
    assert found.factors == 1
    assert found.rule.startswith("fixed in the recipe, but factor 2 would be numerical noise")


@pytest.mark.parametrize("level", [0.0, 1.0])
def test_flat_spectra_are_refused(make_samples, make_recipe, level):
    samples = make_samples(n=8)
    flat = with_ordinates(samples, np.full((8, 41), level))
    with pytest.raises(NotEnoughDataError, match=r"No factor can be found: .* Expected spectra that vary with"):
        calibrate(make_recipe(), flat)


def test_missing_points_are_told_by_sample(make_samples, make_recipe):
    samples = make_samples(n=8, replicates=2)
    values = samples.spectra.values.copy()
    values[[4, 5, 9], 7] = np.nan
    holed = with_ordinates(samples, values)
    with pytest.raises(
        QuantityError, match="3 of 16 spectra have missing points: S03, S05; expected a number at every"
    ):
        calibrate(make_recipe('[[preprocessing]]\nstep = "snv"'), holed)


def test_points_missing_outside_the_ranges_kept_do_no_harm(make_samples, make_recipe):
    samples = make_samples(n=12)
    values = samples.spectra.values.copy()
    values[3, 0] = np.nan
    holed = with_ordinates(samples, values)
    kept = '[[preprocessing]]\nstep = "keep_ranges"\nranges = [[1780, 1620]]\n'
    model = calibrate(make_recipe(kept), holed).model
    assert model.predict_values(values) == pytest.approx(model.predict_values(samples.spectra.values))
    values[3, 20] = np.nan
    with pytest.raises(
        QuantityError, match="1 of 12 spectra have missing points; expected a number at every point that"
    ):
        model.predict_values(values)


def test_without_steps_a_missing_point_is_told_as_one(make_samples, make_recipe):
    samples = make_samples(n=12)
    model = calibrate(make_recipe(), samples).model
    values = samples.spectra.values.copy()
    values[[2, 5], 7] = np.nan
    with pytest.raises(QuantityError, match="2 of 12 spectra have missing points"):
        model.predict_values(values)


def test_each_analyte_has_its_own_model(make_samples):
    samples = make_samples(n=12)
    values = np.column_stack([samples.values[:, 0], samples.values[::-1, 0]])
    values[4, 1] = np.nan
    both = replace(samples, analytes=(*samples.analytes, Analyte("water", "%")), values=values)
    text = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n'
    result = calibrate(recipe_from_text(f'{text}[[analyte]]\nname = "acid"\n[[analyte]]\nname = "water"\n'), both)
    assert [entry.analyte for entry in result.analytes] == ["acid", "water"]
    assert (result["acid"].n_samples, result["water"].n_samples) == (12, 11)
    assert [item.sample for item in result["water"].left_out] == ["S05"]
    assert result.model is result["acid"].model
    with pytest.raises(KeyError, match="No analyte 'salt'; there are acid, water"):
        result["salt"]


def test_samples_at_hand_and_a_recipe_that_names_files(make_samples, make_recipe):
    recipe = make_recipe('[validation]\nfiles = ["v.csv"]')
    with pytest.raises(ParameterError, match="only calibration samples were given"):
        calibrate(recipe, make_samples())


def test_what_is_printed(make_samples, make_recipe):
    alone = str(calibrate(make_recipe(), make_samples()))
    assert alone.startswith("A test\n\nCalibration of acid\n")
    assert NOT_PROVEN in alone
    recipe = make_recipe('[validation]\nsamples = ["S05..S08"]\n[regression]\nfactors = 2')
    proven = str(calibrate(recipe, make_samples()))
    assert NOT_PROVEN not in proven
    for name in ("RMSEC", "SEC", "RMSECV", "Q²", "independent validation", "RMSEP", "bias", "SEP", "R²", "RPD"):
        assert f"\n{name} " in proven


def test_the_result_as_json(make_samples, make_recipe):
    result = calibrate(make_recipe('[validation]\nsamples = ["S05..S08"]'), make_samples())
    record = json.loads(result.to_json())
    [entry] = record["analytes"]
    assert "model" not in entry
    assert entry["validation"]["sample_ids"] == ["S05", "S06", "S07", "S08"]
    assert entry["cross_validation"]["rmsecv"] == result["acid"].cross_validation.rmsecv.tolist()
    assert entry["cross_validation"]["replicate_variance"][0] is None  # NaN: there are no replicates
    assert math.isclose(entry["uncertainty"]["s0"], result.model.uncertainty.s0)


def test_same_inputs_same_bytes(make_samples, make_recipe):
    recipe = make_recipe('[cross_validation]\nscheme = "random_folds"\nfolds = 4')
    assert calibrate(recipe, make_samples()).to_json() == calibrate(recipe, make_samples()).to_json()
