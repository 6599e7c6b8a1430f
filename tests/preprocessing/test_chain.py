"""Chains of steps."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.preprocessing.baseline import StraightBaseline
from quant.preprocessing.centre import MeanCentre
from quant.preprocessing.chain import apply_chain, chain_axes, chain_learns, fit_chain, place_on_axis
from quant.preprocessing.msc import MSC
from quant.preprocessing.ranges import KeepRanges, LeaveOutRanges
from quant.preprocessing.registry import STEPS
from quant.preprocessing.resample import Resample
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.snv import SNV

AXIS = np.arange(2000.0, 1800.0, -4.0)
SPECTRA = np.random.default_rng(5).normal(size=(6, AXIS.size)).cumsum(axis=1)
STEPS_IN_ORDER = [
    KeepRanges([[1990, 1930], [1900, 1820]]),
    SavitzkyGolay(7, 2, 1),
    LeaveOutRanges([[1950, 1940]]),
    SNV(),
    MeanCentre(),
]


def test_axes_follow_the_steps():
    axes = chain_axes(STEPS_IN_ORDER, AXIS)
    kept = AXIS[((AXIS >= 1930) & (AXIS <= 1990)) | ((AXIS >= 1820) & (AXIS <= 1900))]
    assert [axis.size for axis in axes] == [50, kept.size, kept.size, kept.size - 3, kept.size - 3, kept.size - 3]
    np.testing.assert_array_equal(axes[2], kept)
    resampled = chain_axes([Resample(1990, 1900, 3)], AXIS)[1]
    np.testing.assert_array_equal(resampled, np.arange(1990, 1899, -3))


def test_each_step_is_told_the_axis_it_meets():
    placed = place_on_axis(STEPS_IN_ORDER, AXIS)
    np.testing.assert_array_equal(placed[0].axis, AXIS)
    assert placed[1].axis.size == placed[2].axis.size == 36
    assert STEPS_IN_ORDER[0].axis is None


@pytest.mark.parametrize(
    ("step", "message"),
    [
        (LeaveOutRanges([[1980, 1970]]), r"\[1980, 1970\]; the axis covers 1960 to"),
        (SavitzkyGolay(17), r"window = 17 is longer than the segment\(s\) 1960 to 1900 \(16 points\)"),
        (StraightBaseline(1980, 1910), r"outside the axis: 1980"),
        (Resample(1980, 1910, 2), r"outside the axis: 1980"),
    ],
)
def test_what_does_not_fit_the_axis_is_found_before_any_spectrum_is_read(step, message):
    with pytest.raises(ParameterError, match=message):
        chain_axes([KeepRanges([[1960, 1900]]), step], AXIS)


def test_fit_and_apply_do_what_the_steps_do_one_by_one():
    steps = place_on_axis(STEPS_IN_ORDER, AXIS)
    fitted, result = fit_chain(steps, SPECTRA)
    by_hand = SPECTRA
    for step in steps:
        by_hand = step.fit(by_hand).transform(by_hand)
    np.testing.assert_array_equal(result, by_hand)
    np.testing.assert_array_equal(apply_chain(fitted, SPECTRA), result)
    assert [type(step) for step in fitted] == [type(step) for step in steps]


def test_weights_reach_the_steps_that_learn():
    weight = np.array([1, 1, 1, 0, 0, 0])
    _, weighted = fit_chain([SNV(), MeanCentre()], SPECTRA, None, weight)
    np.testing.assert_allclose(weighted[:3].mean(axis=0), 0.0, atol=1e-15)
    assert np.abs(weighted.mean(axis=0)).max() > 1e-3


def test_fitting_leaves_the_given_steps_alone():
    step = MSC()
    fit_chain([step], SPECTRA)
    assert not hasattr(step, "reference_")


def test_missing_points_that_a_range_leaves_out_do_no_harm():
    spectra = SPECTRA.copy()
    spectra[2, AXIS > 1990] = np.nan
    fitted, result = fit_chain(place_on_axis(STEPS_IN_ORDER, AXIS), spectra)
    np.testing.assert_array_equal(result, fit_chain(place_on_axis(STEPS_IN_ORDER, AXIS), SPECTRA)[1])
    np.testing.assert_array_equal(apply_chain(fitted, spectra), result)
    with pytest.raises(ParameterError, match="Input X contains NaN"):
        fit_chain(place_on_axis(STEPS_IN_ORDER[1:], AXIS), spectra)


def test_an_empty_chain_changes_nothing():
    fitted, result = fit_chain([], SPECTRA)
    assert fitted == []
    np.testing.assert_array_equal(result, SPECTRA)


def test_which_steps_learn_from_other_spectra():
    assert {name for name, step in STEPS.items() if step.learns} == {"msc", "emsc", "mean_centre", "scale_columns"}
    assert chain_learns(STEPS_IN_ORDER)
    assert not chain_learns(STEPS_IN_ORDER[:-1])
