"""Bias and slope corrections live in the regression."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.revalidation.remedies.values import correct_bias, correct_slope_and_bias, with_line


def test_a_corrected_model_predicts_on_the_line_and_is_as_far_from_its_samples(world):
    model, spectra = world.model, world.training.spectra.values
    moved = with_line(model, 0.2, 1.1)
    processed = model.process(spectra)
    np.testing.assert_allclose(moved.predict_values(spectra), 0.2 + 1.1 * model.predict_values(spectra), rtol=1e-9)
    np.testing.assert_array_equal(moved.method.leverage_each(processed), model.method.leverage_each(processed))
    np.testing.assert_array_equal(moved.method.residual_each(processed), model.method.residual_each(processed))
    assert moved.method.intercepts_[-1] == pytest.approx(0.2 + 1.1 * model.method.intercepts_[-1])


def test_corrections_hit_their_own_standards(world):
    standards = world.standards(np.random.default_rng(1), shift=0.3)
    everyone = np.arange(len(standards))
    for remedy in (correct_bias, correct_slope_and_bias):
        errors = standards.evaluated(remedy(standards, everyone), everyone).value - standards.target
        assert errors.mean() == pytest.approx(0.0, abs=1e-9)
    slope_left = np.polyfit(standards.after.value, errors, 1)[0]
    assert slope_left == pytest.approx(0.0, abs=1e-9)


def test_the_parent_is_not_touched(world):
    before = world.model.method.coefficients_.copy(), world.model.method.y_mean_
    with_line(world.model, 5.0, 2.0)
    np.testing.assert_array_equal(world.model.method.coefficients_, before[0])
    assert world.model.method.y_mean_ == before[1]


def test_a_method_that_carries_no_correction_says_so(world):
    other = replace(world.model, method=ClassicalLeastSquares())
    with pytest.raises(ParameterError, match="carries no correction"):
        with_line(other, 0.0, 1.0)


def test_one_level_has_no_slope(world):
    standards = world.standards(np.random.default_rng(1))
    with pytest.raises(NotEnoughDataError, match="one level"):
        correct_slope_and_bias(standards, np.array([0]))
