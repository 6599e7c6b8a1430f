"""Gap-segment derivatives (K. H. Norris, P. C. Williams, Cereal Chemistry 61 (1984) 158; from memory)."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.gap_derivative import GapDerivative, gap_derivative


def test_worked_example():
    # Segments of 3, gap 2: means of 1, 4, 7 and of 16, 25, 36 around points 1 and 5; (77/3 − 4)/4 at point 3.
    x = [[1.0, 4.0, 7.0, 10.0, 16.0, 25.0, 36.0]]
    np.testing.assert_allclose(gap_derivative(x, 2, 3), [[(77 / 3 - 4) / 4]], rtol=1e-14)
    # Second: mean of 7, 10, 16 in the middle; (4 − 2·11 + 77/3)/2².
    np.testing.assert_allclose(gap_derivative(x, 2, 3, 2), [[(4 - 22 + 77 / 3) / 4]], rtol=1e-14)


def test_a_line_of_slope_m_gives_m_and_then_nothing():
    line = 3 - 0.25 * np.arange(20.0)
    np.testing.assert_allclose(gap_derivative([line], 3, 5), -0.25, rtol=1e-13)
    np.testing.assert_allclose(gap_derivative([line], 3, 5, 2), 0, atol=1e-14)


def test_derivatives_are_per_axis_unit_whichever_way_the_axis_runs():
    axis = np.arange(1800.0, 1700.0, -4.0)
    spectrum = np.sin(axis / 15)
    for order in (1, 2):
        falling = gap_derivative([spectrum], 2, 3, order, axis)
        rising = gap_derivative([spectrum[::-1]], 2, 3, order, axis[::-1])
        np.testing.assert_allclose(falling, rising[:, ::-1], rtol=1e-12)
    kept = GapDerivative(1, 1, axis=axis).axis_after(axis)
    np.testing.assert_allclose(gap_derivative([spectrum], 1, 1, 1, axis)[0], np.cos(kept / 15) / 15, atol=1e-3)


def test_points_at_the_ends_of_each_range_are_left_out():
    axis = np.concatenate([np.arange(0.0, 10), np.arange(50.0, 58)])
    step = GapDerivative(2, 3, axis=axis)
    np.testing.assert_array_equal(step.axis_after(axis), [3, 4, 5, 6, 53, 54])
    steps_up = np.concatenate([np.zeros(10), np.full(8, 100.0)])  # all of the rise lies in the gap
    np.testing.assert_array_equal(step.fit_transform([steps_up]), np.zeros((1, 6)))


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"gap": 0}, "gap = 0; expected at least 1"),
        ({"gap": 1.5}, r"gap = 1\.5, segment = 5; expected whole numbers"),
        ({"segment": 4}, "segment = 4; expected an odd number .* Use 3 or 5"),
        ({"segment": 0}, "segment = 0; expected an odd number .* Use 1 or 3"),
        ({"derivative": 3}, "derivative = 3; expected 1 or 2"),
        ({"gap": 8}, r"reach over 21 points, more than in the range\(s\) 0 to 19 \(20 points\)"),
        ({"axis": np.arange(20.0) ** 1.1}, "not equally spaced"),
    ],
)
def test_what_is_refused(options, message):
    with pytest.raises(ParameterError, match=message):
        GapDerivative(**options).fit(np.ones((1, 20)))
