"""The pattern of a gas is found in the amount that was added, and wide bands are not taken for it."""

import numpy as np
import pytest

from quant.inspection.atmosphere import match
from quant.spectra.simulate_effects import carbon_dioxide_spectrum, water_vapour_spectrum

AXIS = np.arange(4000.0, 1000.0, -2.0)


@pytest.mark.parametrize(("pattern", "sharp"), [(water_vapour_spectrum, True), (carbon_dioxide_spectrum, False)])
def test_the_amount_of_a_gas(pattern, sharp):
    rng = np.random.default_rng(20260105)
    gas = pattern(AXIS)
    rows = np.exp(-(((AXIS - 1700) / 20) ** 2)) + 2e-4 * rng.standard_normal((9, AXIS.size))
    rows[3] += 0.02 * gas
    rows[4] -= 0.01 * gas
    window = (AXIS > 1350) & (AXIS < 1900) if sharp else (AXIS > 2260) & (AXIS < 2420)
    height, alike = match(rows, gas, window, sharp=sharp)
    assert height[[3, 4]] == pytest.approx([0.02, -0.01], rel=0.05)
    assert alike[3] > 0.9
    assert alike[4] < -0.9
    assert np.abs(np.delete(height, [3, 4])).max() < 5e-4
    assert np.abs(np.delete(alike, [3, 4])).max() < 0.5


def test_bands_that_vary_are_no_vapour():
    rng = np.random.default_rng(20260105)
    bands = np.array([np.exp(-(((AXIS - centre) / 10) ** 2)) for centre in (1740, 1660, 1600, 1510, 1450)])
    rows = rng.uniform(0.1, 0.5, (20, 5)) @ bands + 2e-4 * rng.standard_normal((20, AXIS.size))
    _, alike = match(rows, water_vapour_spectrum(AXIS), (AXIS > 1350) & (AXIS < 1900), sharp=True)
    assert np.abs(alike).max() < 0.5
