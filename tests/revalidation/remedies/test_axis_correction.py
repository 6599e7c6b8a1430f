"""Shift and stretch of the axis, found and taken back."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError
from quant.revalidation.remedies.axis_correction import axis_error, axis_map, correct_axis

AXIS = np.arange(1850.0, 899.0, -2.0)


def bands(axis, width=14.0):
    return sum(
        h * np.exp(-(((axis - c) / width) ** 2)) for c, h in ((1740, 1.0), (1375, 0.5), (1240, 0.8), (1050, 0.6))
    )


@pytest.mark.parametrize(("shift", "stretch"), [(0.0, 0.0), (0.5, 0.0), (-1.5, 0.0), (0.0, 4e-4), (0.8, -3e-4)])
def test_shift_and_stretch_are_found_beside_gain_and_baseline(shift, stretch):
    middle = (AXIS.max() + AXIS.min()) / 2
    moved = 1.07 * bands(AXIS - shift - stretch * (AXIS - middle)) + 0.02 + 1e-5 * AXIS
    found = axis_error(bands(AXIS), moved, AXIS, np.ones(AXIS.size, dtype=bool))
    assert found[0] == pytest.approx(shift, abs=0.02)
    assert found[1] == pytest.approx(stretch, abs=2e-5)


def test_the_map_takes_the_error_back():
    moved = bands(AXIS - 0.7)
    np.testing.assert_allclose(axis_map(AXIS, 0.7, 0.0).transform(moved[None])[0], bands(AXIS), atol=2e-4)


def test_a_corrected_model_predicts_as_before(world):
    standards = world.standards(np.random.default_rng(2), shift=0.8)
    everyone = np.arange(len(standards))
    moved = standards.after.value - standards.before
    restored = standards.evaluated(correct_axis(standards, everyone), everyone).value - standards.before
    assert abs(moved.mean()) > 0.1
    assert abs(restored.mean()) < 0.02


def test_too_few_points_are_refused():
    with pytest.raises(NotEnoughDataError, match="12 or more"):
        axis_error(bands(AXIS), bands(AXIS), AXIS, np.arange(AXIS.size) < 5)
