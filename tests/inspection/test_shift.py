"""Shifts of less than a point, in cm⁻¹."""

import numpy as np
import pytest

from quant.inspection.shift import axis_shifts
from quant.spectra.simulate_effects import shift_axis

AXIS = np.arange(2000.0, 800.0, -2.0)


@pytest.mark.parametrize("shift", [0.2, -0.5, 1.0])
def test_a_shift_is_measured(shift):
    rng = np.random.default_rng(20260105)
    bands = sum(rng.uniform(0.3, 1) * np.exp(-(((AXIS - centre) / 12) ** 2)) for centre in range(850, 1950, 90))
    rows = rng.uniform(0.8, 1.2, (15, 1)) * bands + 1e-4 * rng.standard_normal((15, AXIS.size))
    rows[6] = shift_axis(rows[6:7], AXIS, shift)[0]
    found, alike = axis_shifts(rows, AXIS)
    assert found[6] == pytest.approx(shift, rel=0.05)  # first order
    assert alike[6]
    assert np.abs(np.delete(found, 6)).max() < 0.02


def test_one_band_that_moves_is_chemistry():
    rng = np.random.default_rng(20260105)
    centres = np.arange(850, 1950, 90)
    rows = np.zeros((15, AXIS.size))
    for centre in centres:
        moved = np.where(np.arange(15) == 6, 3.0 * (centre == centres[4]), 0.0)[:, None]
        rows += np.exp(-(((AXIS - centre - moved) / 12) ** 2))
    found, _ = axis_shifts(rows + 1e-4 * rng.standard_normal(rows.shape), AXIS)
    assert abs(found[6]) < 0.02
