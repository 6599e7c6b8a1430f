"""Keeping and leaving out ranges."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.ranges import KeepRanges, LeaveOutRanges
from quant.preprocessing.snv import SNV

AXIS = np.arange(2000.0, 1000.0, -100.0)  # falling: 2000, 1900, ..., 1100
SPECTRA = np.vstack([AXIS, AXIS / 10])


def test_keeps_both_ends_in_either_order():
    for ranges in ([[1900, 1700], [1200, 1300]], [(1700, 1900), (1300, 1200)]):
        kept = KeepRanges(ranges, AXIS).fit_transform(SPECTRA)
        np.testing.assert_array_equal(kept[0], [1900, 1800, 1700, 1300, 1200])
        np.testing.assert_array_equal(KeepRanges(ranges).axis_after(AXIS), kept[0])


def test_leaves_out_both_ends():
    left = LeaveOutRanges([[1900, 1500], [1550, 1200]], AXIS)  # overlapping ranges are one
    np.testing.assert_array_equal(left.fit_transform(SPECTRA)[1], [200, 110])
    np.testing.assert_array_equal(left.axis_after(AXIS), [2000, 1100])


@pytest.mark.parametrize("step", [KeepRanges, LeaveOutRanges])
def test_without_ranges_everything_stays(step):
    np.testing.assert_array_equal(step().fit_transform(SPECTRA), SPECTRA)
    np.testing.assert_array_equal(step().axis_after(AXIS), AXIS)


def test_without_axis_points_are_numbered_from_zero():
    np.testing.assert_array_equal(KeepRanges([[0, 1]]).fit_transform(SPECTRA)[0], [2000, 1900])


@pytest.mark.parametrize("step", [KeepRanges, LeaveOutRanges])
@pytest.mark.parametrize(
    ("ranges", "message"),
    [
        ([[1900, 1800], [900, 800]], r"without a single point: \[900, 800\]; .*2000 to 1100 \(10 points\).*unit"),
        ([[1890, 1810]], r"without a single point: \[1890, 1810\]"),
        ([[1900, 1800, 1700]], r"holds \[1900, 1800, 1700\]; expected the two ends"),
        ([1900, 1800], r"holds 1900; .*Write each range as a pair"),
        ([[1900, np.nan]], r"holds \[1900, nan\]; expected .* finite"),
    ],
)
def test_refuses_ranges_that_cannot_be_meant(step, ranges, message):
    with pytest.raises(ParameterError, match=message):
        step(ranges, AXIS).fit(SPECTRA)


@pytest.mark.parametrize("step", [KeepRanges([], AXIS), LeaveOutRanges([[0, 5000]], AXIS)])
def test_something_has_to_stay(step):
    with pytest.raises(ParameterError, match=r"no point of the axis, 2000 to 1100 .*At least one has to stay"):
        step.fit(SPECTRA)


def test_missing_points_may_be_left_out():
    spectra = SPECTRA.copy()
    spectra[1, 2:4] = np.nan
    left = LeaveOutRanges([[1800, 1700]], AXIS).fit_transform(spectra)
    np.testing.assert_array_equal(left[1], [200, 190, 160, 150, 140, 130, 120, 110])
    kept = KeepRanges([[1900, 1800]], AXIS).fit_transform(spectra)
    assert np.isnan(kept[1, 1])
    with pytest.raises(ParameterError, match=r"NaN: 1 value\(s\)"):
        SNV().fit(kept)
    spectra[0, 0] = np.inf
    with pytest.raises(ParameterError, match=r"infinity .* 1 value\(s\) in 1 row\(s\), the first of them \[0\]"):
        KeepRanges().fit(spectra)


def test_the_axis_has_to_fit_the_spectra():
    with pytest.raises(ParameterError, match=r"axis has 9 value\(s\), but the spectra have 10"):
        KeepRanges(axis=AXIS[:-1]).fit(SPECTRA)
