"""Local cubic interpolation: laws it has to keep, and what it refuses."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from quant.errors import ParameterError
from quant.spectra.resampling import interpolate, interpolation_weights


@st.composite
def axes(draw, least=4):
    """Rising or falling axes, unequally spaced by up to a third, so without cuts."""
    steps = draw(st.lists(st.floats(0.8, 1.15), min_size=least - 1, max_size=40))
    axis = np.concatenate([[0.0], np.cumsum(steps)]) + draw(st.floats(-50, 50))
    return axis[::-1] if draw(st.booleans()) else axis


@st.composite
def axes_and_positions(draw, least=4):
    axis = draw(axes(least))
    shares = draw(st.lists(st.floats(0, 1), min_size=1, max_size=10))
    return axis, axis[0] + np.array(shares) * (axis[-1] - axis[0])


@given(axes_and_positions(), st.tuples(*[st.floats(-3, 3)] * 4))
def test_exact_for_cubics(case, coefficients):
    axis, onto = case
    centre = axis.mean()
    values = np.polyval(coefficients, axis - centre)
    scale = np.abs(values).max() + 1
    result = interpolate(values[np.newaxis], axis, onto)[0]
    np.testing.assert_allclose(result, np.polyval(coefficients, onto - centre), atol=1e-10 * scale)


@given(axes(least=1), st.integers(0, 2**32 - 1))
def test_exact_at_the_points_themselves(axis, seed):
    values = np.random.default_rng(seed).normal(size=(3, axis.size))
    np.testing.assert_array_equal(interpolate(values, axis, axis), values)


@given(axes_and_positions(), st.integers(0, 2**32 - 1))
def test_a_reversed_axis_gives_the_same_values(case, seed):
    axis, onto = case
    values = np.random.default_rng(seed).normal(size=(2, axis.size))
    there, back = interpolate(values, axis, onto), interpolate(values[:, ::-1], axis[::-1], onto)
    np.testing.assert_allclose(there, back, atol=1e-11)


@given(axes_and_positions(least=1))
def test_weights_add_up_to_one(case):
    axis, onto = case
    _, weights = interpolation_weights(axis, onto)
    np.testing.assert_allclose(weights.sum(axis=1), 1.0, atol=1e-12)


@given(axes_and_positions(least=2), st.floats(-3, 3), st.floats(-3, 3))
def test_two_points_make_it_linear(case, slope, offset):
    axis, onto = case
    values = np.random.default_rng(4).normal(size=axis.size)
    order = np.argsort(axis)
    expected = np.interp(onto, axis[order], values[order])
    np.testing.assert_allclose(interpolate(values[np.newaxis], axis, onto, points=2)[0], expected, atol=1e-12)


def test_draws_on_two_points_on_either_side():
    sources, weights = interpolation_weights(np.arange(10.0), [4.5])
    assert sources.tolist() == [[3, 4, 5, 6]]
    np.testing.assert_allclose(weights, [[-1 / 16, 9 / 16, 9 / 16, -1 / 16]])  # Lagrange's midpoint weights


def test_a_smooth_band_converges_with_the_fourth_power_of_the_step():
    def worst(step):
        axis = np.arange(-60.0, 60.0 + step, step)
        onto = np.linspace(-50, 50, 997)
        return np.abs(
            interpolate(np.exp(-((axis / 15) ** 2))[np.newaxis], axis, onto) - np.exp(-((onto / 15) ** 2))
        ).max()

    assert worst(4.0) / worst(2.0) == pytest.approx(16, rel=0.15)


def test_each_side_of_a_cut_by_itself():
    axis = np.concatenate([np.arange(6.0), np.arange(20.0, 23.0), [40.0]])
    values = np.where(axis < 10, axis**3, axis**2)  # a segment of three points carries a parabola, of one a constant
    result = interpolate(values[np.newaxis], axis, [4.5, 5.0, 20.5, 22.0, 40.0])[0]
    np.testing.assert_allclose(result, [4.5**3, 125, 20.5**2, 484, 1600], rtol=1e-13)


@pytest.mark.parametrize(
    ("onto", "message"),
    [
        ([5.5], r"1 position\(s\) lie in a gap of the axis: 5\.5; the axis holds 0 to 5 \(6 points\), 20 to 25"),
        ([-0.1, 25.1], r"2 position\(s\) lie outside the axis: -0\.1, 25\.1;.*Nothing is extrapolated"),
        ([7, 26], r"lie off the axis: 7, 26"),
        ([np.nan], r"onto .*not finite"),
    ],
)
def test_refuses_positions_off_the_axis(onto, message):
    axis = np.concatenate([np.arange(6.0), np.arange(20.0, 26.0)])
    with pytest.raises(ParameterError, match=message):
        interpolate(np.zeros((1, 12)), axis, onto)


def test_rounding_at_an_end_is_forgiven():
    assert interpolate([[0.0, 1.0, 2.0]], [0.0, 0.1, 0.2], [3 * 0.1 - 0.1])[0, 0] == pytest.approx(2.0)
