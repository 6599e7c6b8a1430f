"""Signals of bands on spectra small enough to check by hand."""

import numpy as np
import pytest

from quant.errors import AxisMismatchError, ParameterError
from quant.spectra.bands import place_bands, refuse_gaps


def signal(values, axis, *bands, reference=None):
    X = np.atleast_2d(np.asarray(values, dtype=float))
    return place_bands(list(bands), reference, axis, X.shape[1]).signals(X)


def test_tangent_baseline():
    # A1 = 0.10 at 1800, A2 = 0.16 at 1680, A0 = 0.71 at 1730: base 0.1350, corrected 0.5750 (computed).
    band = {"signal": "height_at", "position": 1730, "baseline": [1800, 1680]}
    assert signal([0.10, 0.71, 0.16], [1800, 1730, 1680], band) == pytest.approx(0.5750, rel=1e-14)


def test_gaussian_band_area():
    # height × full width at half maximum × 1.064467 (computed: sqrt(pi/(4 ln 2)))
    x, height, width = np.arange(1600.0, 1801, 2), 0.8, 20.0
    gaussian = height * np.exp(-4 * np.log(2) * ((x - 1700) / width) ** 2)
    area = signal(gaussian, x, {"signal": "area", "range": [1600, 1800]})
    assert area == pytest.approx(height * width * 1.064467, rel=1e-6)


def test_lorentzian_band_area():
    # height × full width at half maximum × 1.570796 (computed: pi/2), of which the range holds 2/pi·atan(2R/width)
    x, height, width = np.arange(-2000.0, 2001), 0.8, 20.0
    lorentzian = height / (1 + (2 * x / width) ** 2)
    area = signal(lorentzian, x, {"signal": "area", "range": [-2000, 2000]})
    assert area == pytest.approx(height * width * np.arctan(2 * 2000 / width), rel=1e-6)
    assert area == pytest.approx(height * width * 1.570796, rel=4e-3)


def test_area_counts_the_points_inside_and_interpolates_none():
    values, axis = [9, 1, 3, 2, 9], [0, 1, 2, 4, 5]
    assert signal(values, axis, {"signal": "area", "range": [1, 4]}) == pytest.approx(2 + 5)
    assert signal(values, axis, {"signal": "area", "range": [4.4, 0.6]}) == pytest.approx(2 + 5)


def test_area_is_positive_on_a_falling_axis():
    assert signal([0, 1, 0], [1700, 1690, 1680], {"signal": "area", "range": [1680, 1700]}) == pytest.approx(10)


def test_ends_of_a_range_survive_rounding_of_the_axis():
    axis = 0.1 * np.arange(11)  # holds 0.30000000000000004 for 0.3
    assert axis[3] > 0.3
    assert signal(np.ones(11), axis, {"signal": "area", "range": [0.1, 0.3]}) == pytest.approx(0.2)
    assert signal(np.ones(11), -axis, {"signal": "area", "range": [-0.3, -0.1]}) == pytest.approx(0.2)


def test_height_is_the_vertex_of_the_parabola_even_between_uneven_points():
    axis = np.array([0.0, 1, 2.5, 3, 4.2])
    parabola = 2 - 0.3 * (axis - 2.2) ** 2
    assert signal(parabola, axis, {"signal": "height", "range": [0, 4.2]}) == pytest.approx(2.0, rel=1e-14)
    tilted = parabola + 0.7 * axis - 3
    band = {"signal": "height", "range": [0, 4.2], "baseline": [0, 4.2]}
    chord = np.interp(axis, [0, 4.2], parabola[[0, -1]])
    corrected = np.polynomial.Polynomial.fit(axis, parabola - chord, 2)
    vertex = corrected(corrected.deriv().roots()[0])
    assert signal(tilted, axis, band) == pytest.approx(vertex, rel=1e-12)


def test_height_at_the_end_of_the_range_and_on_a_flat_top():
    band = {"signal": "height", "range": [0, 3]}
    values = [[1, 2, 3, 4], [4, 3, 2, 1], [1, 1, 1, 1]]
    assert signal(values, None, band).tolist() == [4, 4, 1]
    assert signal([1, 2, 9, 9], None, {"signal": "height", "range": [0, 1]}).tolist() == [2]


def test_height_at_interpolates_between_points():
    assert signal([1, 3, 3], [10, 20, 30], {"signal": "height_at", "position": 15}) == pytest.approx(2)
    assert signal([1, 3, 5], [10, 20, 30], {"signal": "height_at", "position": 30}) == pytest.approx(5)


def test_baseline_may_lie_outside_the_range_and_between_points():
    values = [0.0, 1, 7, 3, 4]  # the line y = x with a peak of 5 at 2
    band = {"signal": "area", "range": [1, 3], "baseline": [0.5, 3.5]}
    assert signal(values, None, band) == pytest.approx(5)


def test_signals_are_summed_and_divided_by_the_reference():
    bands = [{"signal": "height_at", "position": p} for p in (0, 1)]
    assert signal([[1, 2, 4], [3, 3, 2]], None, *bands).tolist() == [3, 6]
    reference = {"signal": "height_at", "position": 2}
    assert signal([[1, 2, 4], [3, 3, 2]], None, *bands, reference=reference).tolist() == [0.75, 3]


def test_no_band_is_the_area_of_the_whole_axis():
    X = np.array([[1.0, 2, 3]])
    assert place_bands(None, None, [9, 5, 1], 3).signals(X).tolist() == [16]


@pytest.mark.parametrize(
    ("band", "message"),
    [
        ({"signal": "area", "ragne": [1, 3]}, r"unknown key 'ragne'.*Did you mean 'range'\?"),
        ({"signal": "area", "position": 2}, "unknown key 'position'"),
        ({"signal": "area"}, "lacks 'range'"),
        ({"signal": "height_at"}, "lacks 'position'"),
        ({"signal": "surface", "range": [1, 3]}, "signal of band 1 = 'surface'; expected one of 'area', 'height'"),
        ({"range": [1, 3]}, "expected a dict such as"),
        ("area", "expected a dict such as"),
        ({"signal": "area", "range": [1, 9]}, "reaches outside the axis, which goes from 0 to 4"),
        ({"signal": "height_at", "position": -1}, "reaches outside the axis"),
        ({"signal": "area", "range": [1.2, 2.8]}, r"holds 1 point\(s\)"),
        ({"signal": "area", "range": [2, 2]}, r"holds 1 point\(s\)"),
        ({"signal": "area", "range": [1, 2, 3]}, "expected two axis values"),
        ({"signal": "area", "range": ["a", "b"]}, "expected two axis values"),
        ({"signal": "height_at", "position": [1, 2]}, "expected one axis value"),
        ({"signal": "area", "range": [1, np.nan]}, "expected two axis values"),
        ({"signal": "area", "range": [1, 3], "baseline": [2, 2]}, "two different points"),
        ({"signal": "area", "range": [1, 3], "baseline": [0, 7]}, "baseline of band 1 .* outside the axis"),
    ],
)
def test_refuses_a_band_and_says_what_to_do(band, message):
    with pytest.raises(ParameterError, match=message):
        place_bands([band], None, None, 5)
    with pytest.raises(ParameterError, match=message.replace("band 1", "reference_band")):
        place_bands(None, band, None, 5)


def test_refuses_no_bands_and_one_that_is_not_in_a_list():
    for bands in ([], {"signal": "area", "range": [1, 3]}):
        with pytest.raises(ParameterError, match="expected a list"):
            place_bands(bands, None, None, 5)


def test_refuses_an_axis_that_does_not_fit():
    with pytest.raises(AxisMismatchError, match="axis has 4 values, the spectra have 5 points"):
        place_bands(None, None, np.arange(4), 5)
    for axis in ([0, 1, 1, 2], [0, 2, 1, 3], [3, 1, 2, 0]):
        with pytest.raises(ParameterError, match="rise or fall throughout"):
            place_bands(None, None, axis, 4)


@pytest.mark.parametrize(
    ("band", "reference", "message"),
    [
        ({"signal": "area", "range": [1595, 1605]}, None, None),
        (
            {"signal": "area", "range": [1590, 1800]},
            None,
            r"the band \(area from 1590 to 1800\) meets a gap",
        ),
        ({"signal": "height_at", "position": 1700}, None, "height at 1700"),
        ({"signal": "height_at", "position": 1600, "baseline": [1590, 1800]}, None, None),
        ({"signal": "height_at", "position": 1600, "baseline": [1590, 1700]}, None, "the baseline of the band"),
        ({"signal": "height_at", "position": 1600}, {"signal": "height", "range": [1600, 1805]}, "1600 to 1805"),
    ],
)
@pytest.mark.parametrize("step", [1, -1])
def test_bands_that_meet_a_gap(band, reference, message, step):
    axis = np.array([*range(1580, 1611, 5), *range(1790, 1811, 5)], dtype=float)[::step]
    placed = place_bands([band], reference, axis, axis.size)
    if message is None:
        refuse_gaps("band_area", placed)
    else:
        with pytest.raises(ParameterError, match=message):
            refuse_gaps("band_area", placed)
