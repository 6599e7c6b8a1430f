"""Division by length, area, or the signal of a band."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.preprocessing.normalise import NormaliseBand, UnitArea, UnitLength, normalise_band, unit_area, unit_length

AXIS = np.array([1810.0, 1800, 1790, 1600, 1590, 1580])  # falling, with a gap
X = np.array([[0.0, 2.0, 0.0, 1.0, -1.0, 3.0]])


def test_length_by_hand():
    np.testing.assert_allclose(unit_length([[3.0, -4.0]]), [[0.6, -0.8]], rtol=1e-15)


def test_area_by_hand():
    # |x| by trapezia: 10 + 10 before the gap, 10 + 20 behind it, nothing across.
    np.testing.assert_allclose(unit_area(X, AXIS), X / 50, rtol=1e-14)
    np.testing.assert_allclose(unit_area([[1.0, 1.0, 2.0]]), [[0.4, 0.4, 0.8]], rtol=1e-14)  # points 1 apart: 1 + 1.5


def test_band_by_hand():
    # Area 10·(0 + 2)/2 + 10·(2 + 0)/2 = 20; greatest height 2; height at 1585: half-way from −1 to 3.
    np.testing.assert_allclose(normalise_band(X, {"signal": "area", "range": [1810, 1790]}, AXIS), X / 20)
    np.testing.assert_allclose(normalise_band(X, {"signal": "height", "range": [1790, 1810]}, AXIS), X / 2)
    np.testing.assert_allclose(NormaliseBand("height_at", position=1585, axis=AXIS).fit_transform(X), X / 1)
    # Tangent baseline (textbooks, from memory; computed): A1 = 0.10 at 1800, A2 = 0.16 at 1680, A0 = 0.71 at 1730 make
    # 0.5750.
    spectrum = np.array([[0.10, 0.71, 0.16]])
    step = NormaliseBand("height_at", position=1730, baseline=(1800, 1680), axis=[1800.0, 1730, 1680])
    np.testing.assert_allclose(step.fit_transform(spectrum), spectrum / 0.5750, rtol=1e-14)


def test_the_whole_axis_is_the_default_band():
    np.testing.assert_allclose(NormaliseBand().fit_transform([[1.0, 2.0, 1.0]]), [[1 / 3, 2 / 3, 1 / 3]], rtol=1e-14)


def test_a_line_added_under_the_baseline_changes_nothing_but_itself():
    axis = np.arange(1800.0, 1700.0, -2)
    band = {"signal": "area", "range": [1790, 1710], "baseline": [1790, 1710]}
    x = np.exp(-(((axis - 1750) / 10) ** 2))
    line = 0.3 + 0.002 * (axis - 1750)
    plain, lifted = normalise_band([x], band, axis)[0], normalise_band([x + line], band, axis)[0]
    np.testing.assert_allclose(lifted / plain, (x + line) / x, rtol=1e-9)


def test_refuses_zeros():
    for step in (UnitLength(), UnitArea()):
        with pytest.raises(QuantityError, match=r"1 spectra have no .*zero throughout.*row\(s\) 1 "):
            step.fit([[1.0, 2.0, 1.0]]).transform([[1.0, 0, 0], [0, 0, 0]])


def test_refuses_bands_without_signal():
    step = NormaliseBand("height_at", position=1590, axis=AXIS).fit(X)
    with pytest.raises(QuantityError, match=r"1 spectra have no signal above zero in the band \(height at 1590\)"):
        step.transform(X)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"range": (1800, 1590)}, "meets a gap of the axis, whose contiguous ranges are 1810 to 1790"),
        ({"signal": "height_at", "position": 1700.0}, "meets a gap of the axis"),
        ({}, "meets a gap of the axis"),
        ({"range": (1900, 1800)}, "reaches outside the axis"),
        ({"signal": "height_at"}, "lacks 'position'"),
        ({"signal": "height", "position": 1800.0}, "unknown key 'position'"),
        ({"signal": "hight", "range": (1810, 1790)}, "signal of band 1 = 'hight'; expected one of"),
    ],
)
def test_bands_that_do_not_fit(options, message):
    for check in (lambda step: step.fit(X), lambda step: step.axis_after(AXIS)):
        with pytest.raises(ParameterError, match=message):
            check(NormaliseBand(**options, axis=AXIS))


def test_refuses_areas_of_single_points():
    with pytest.raises(NotEnoughDataError, match="n_features = 1"):
        UnitArea().fit([[1.0]])
    with pytest.raises(ParameterError, match="n_features=1"):
        NormaliseBand().fit([[1.0]])
