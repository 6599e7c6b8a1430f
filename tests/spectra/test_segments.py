"""Axis values, contiguous segments, spacing."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.spectra.segments import axis_values, describe_segment, equal_spacing, segments


def test_axis_values():
    np.testing.assert_array_equal(axis_values(None, 3), [0, 1, 2])
    np.testing.assert_array_equal(axis_values([4000, 3998, 3990], 3), [4000, 3998, 3990])


@pytest.mark.parametrize(
    ("axis", "message"),
    [
        ([1, 2], r"2 value\(s\), but the spectra have 3 point\(s\)"),
        ([1, 2, 2], r"turns or stands still at 2 then 2"),
        ([3, 1, 2], r"turns or stands still at 1 then 2"),
        ([1, 1, 1], r"at 1 then 1, 1 then 1"),
        ([1, np.nan, 3], r"not finite"),
        ([[1, 2, 3]], r"shape \(1, 3\)"),
    ],
)
def test_refuses_what_is_no_axis(axis, message):
    with pytest.raises(ParameterError, match=message):
        axis_values(axis, 3)


@pytest.mark.parametrize("sign", [1, -1])
def test_segments(sign):
    axis = sign * np.array([0, 2, 4, 10, 12, 14, 16, 40.0])
    assert segments(axis) == [slice(0, 3), slice(3, 7), slice(7, 8)]
    assert describe_segment(axis, slice(3, 7)) == f"{sign * 10} to {sign * 16} (4 points)"


def test_a_single_left_out_point_is_a_cut_and_uneven_steps_are_not():
    assert segments(np.delete(np.arange(10.0), 4)) == [slice(0, 4), slice(4, 9)]
    assert segments([0, 1, 2.4, 3.4]) == [slice(0, 4)]
    assert segments([5.0]) == [slice(0, 1)]


def test_equal_spacing_is_signed_and_ignores_cuts():
    assert equal_spacing([0, 2, 4, 10, 12]) == 2
    assert equal_spacing([12, 10, 4, 2, 0]) == -2
    assert equal_spacing(np.round(np.linspace(850, 1050, 100), 2)) == pytest.approx(200 / 99, rel=1e-12)


@pytest.mark.parametrize("step", [0.985, 1.015])
def test_refuses_steps_more_than_one_percent_off(step):
    axis = np.cumsum([100.0, 1, 1, 1, step, 1, 1])
    with pytest.raises(ParameterError, match=rf"steps of {step} between 103 and .*; expected 1 throughout.*resample"):
        equal_spacing(axis)
    assert equal_spacing(np.cumsum([100.0, 1, 1, 1, 1 + (step - 1) / 2, 1, 1])) == pytest.approx(1, abs=0.002)


def test_one_point_has_no_spacing():
    with pytest.raises(ParameterError, match="at least two points"):
        equal_spacing([1.0])
