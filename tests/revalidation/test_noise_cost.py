"""What grown noise costs: against the scatter of predictions of spectra that really are noisier."""

from dataclasses import replace

import numpy as np
import pytest

from quant.revalidation.noise_cost import added_by_noise


def scatter(world, noise):
    """Variance of predictions of one sample's mean of two spectra, noise being all that differs between them."""
    state = replace(world.maker.BEFORE, noise=noise, path_variation=0.0, water_vapour=0.0, carbon_dioxide=0.0)
    state = replace(state, baseline_offset=0.0, baseline_slope=0.0, baseline_curvature=0.0)
    row = world.maker.dryer.true_absorbances(np.array([[1.0, 0.3, 1.0, 4.0]]))
    rows = world.maker.measure(np.repeat(row, 2000, axis=0), world.model.axis.values, np.random.default_rng(1), state)
    return float(world.model.predict_values(rows).reshape(2, -1).mean(axis=0).var())


def test_the_cost_is_that_of_noisier_spectra(world):
    # White noise is assumed; here it is less where the vector is large.
    noise = world.maker.BEFORE.noise
    found = added_by_noise(world.standards(np.random.default_rng(8), noise=3 * noise), world.model)
    assert found == pytest.approx(scatter(world, 3 * noise) - scatter(world, noise), rel=0.4)


def test_less_noise_takes_scatter_away_and_none_without_spectra_from_before(world):
    standards = world.standards(np.random.default_rng(9), noise=world.maker.BEFORE.noise / 3)
    assert added_by_noise(standards, world.model) < 0
    assert added_by_noise(replace(standards, before_spectra=None), world.model) == 0
