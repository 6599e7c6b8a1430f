"""The straight baseline through two positions."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.preprocessing.baseline import StraightBaseline, straight_baseline


def test_worked_example():
    # two-point (tangent) baseline: 0.10 at 1800, 0.16 at 1680, 0.71 at 1730 -> base 0.1350, corrected 0.5750; computed
    axis = np.arange(1800.0, 1670.0, -10.0)
    spectrum = np.full(axis.size, 0.3)
    spectrum[axis == 1800], spectrum[axis == 1680], spectrum[axis == 1730] = 0.10, 0.16, 0.71
    corrected = StraightBaseline(1800, 1680, axis).fit_transform(spectrum[np.newaxis])[0]
    assert corrected[axis == 1730] == pytest.approx(0.5750, abs=1e-14)
    np.testing.assert_allclose(corrected[[0, -1]], 0.0, atol=1e-16)


def test_positions_between_points_lie_on_the_straight_line_between_them():
    corrected = straight_baseline([[0.0, 2.0, 2.0, 6.0]], None, 0.5, 2.5)  # 1 at 0.5, 4 at 2.5: slope 1.5
    np.testing.assert_allclose(corrected, [[-0.25, 0.25, -1.25, 1.25]])


def test_first_and_last_point_by_default():
    np.testing.assert_allclose(StraightBaseline().fit_transform([[1.0, 5.0, 3.0]]), [[0.0, 3.0, 0.0]])


@pytest.mark.parametrize(
    ("first", "second", "message"),
    [
        (1900, 1680, r"lie outside the axis: 1900; the axis holds 1800 to 1680"),
        (1800, 1600, r"lie outside the axis: 1600"),
        (1700, 1700, r"both 1700; a line needs two"),
        (1800, np.inf, r"not finite"),
    ],
)
def test_refuses_positions_that_give_no_line(first, second, message):
    axis = np.arange(1800.0, 1670.0, -10.0)
    with pytest.raises(ParameterError, match=message):
        StraightBaseline(first, second, axis).fit(np.ones((2, axis.size)))


def test_refuses_a_position_in_a_gap():
    with pytest.raises(ParameterError, match=r"in a gap of the axis: 5; the axis holds 0 to 2 .*, 8 to 9"):
        StraightBaseline(0, 5, axis=[0, 1, 2, 8, 9]).fit(np.ones((1, 5)))


def test_refuses_single_points():
    with pytest.raises(NotEnoughDataError, match="at least two points"):
        StraightBaseline().fit([[1.0]])
