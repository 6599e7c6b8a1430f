"""Savitzky-Golay: published integers, moments, ends, an independent implementation, refusals."""

import math
from itertools import pairwise

import numpy as np
import pytest
from scipy.signal import savgol_filter

from quant.errors import ParameterError
from quant.preprocessing.savitzky_golay import SavitzkyGolay, savitzky_golay, window_coefficients

# A. Savitzky, M. J. E. Golay, Analytical Chemistry 36 (1964) 1627-1639. Quadratic smoothing of 5, 7, 9 points was found
# in a public comment quoting the 1964 table; all others are from memory of the tables, every line was recomputed
# in exact rational arithmetic. Half a line is given: the left half and the middle.
# (window, polynomials that share the line, derivative, left half with middle, N)
TABLES = [
    (5, (2, 3), 0, [-3, 12, 17], 35),
    (7, (2, 3), 0, [-2, 3, 6, 7], 21),
    (9, (2, 3), 0, [-21, 14, 39, 54, 59], 231),
    (11, (2, 3), 0, [-36, 9, 44, 69, 84, 89], 429),
    (13, (2, 3), 0, [-11, 0, 9, 16, 21, 24, 25], 143),
    (15, (2, 3), 0, [-78, -13, 42, 87, 122, 147, 162, 167], 1105),
    (17, (2, 3), 0, [-21, -6, 7, 18, 27, 34, 39, 42, 43], 323),
    (21, (2, 3), 0, [-171, -76, 9, 84, 149, 204, 249, 284, 309, 324, 329], 3059),
    (25, (2, 3), 0, [-253, -138, -33, 62, 147, 222, 287, 342, 387, 422, 447, 462, 467], 5175),
    (7, (4, 5), 0, [5, -30, 75, 131], 231),
    (9, (4, 5), 0, [15, -55, 30, 135, 179], 429),
    (11, (4, 5), 0, [18, -45, -10, 60, 120, 143], 429),
    (13, (4, 5), 0, [110, -198, -135, 110, 390, 600, 677], 2431),
    (5, (1, 2), 1, [-2, -1, 0], 10),
    (7, (1, 2), 1, [-3, -2, -1, 0], 28),
    (9, (1, 2), 1, [-4, -3, -2, -1, 0], 60),
    (11, (1, 2), 1, [-5, -4, -3, -2, -1, 0], 110),
    (13, (1, 2), 1, [-6, -5, -4, -3, -2, -1, 0], 182),
    (15, (1, 2), 1, [-7, -6, -5, -4, -3, -2, -1, 0], 280),
    (5, (3, 4), 1, [1, -8, 0], 12),
    (7, (3, 4), 1, [22, -67, -58, 0], 252),
    (9, (3, 4), 1, [86, -142, -193, -126, 0], 1188),
    (11, (3, 4), 1, [300, -294, -532, -503, -296, 0], 5148),
    (13, (3, 4), 1, [1133, -660, -1578, -1796, -1489, -832, 0], 24024),
    (15, (3, 4), 1, [12922, -4121, -14150, -18334, -17842, -13843, -7506, 0], 334152),
    (5, (2, 3), 2, [2, -1, -2], 7),
    (7, (2, 3), 2, [5, 0, -3, -4], 42),
    (9, (2, 3), 2, [28, 7, -8, -17, -20], 462),
    (11, (2, 3), 2, [15, 6, -1, -6, -9, -10], 429),
    (13, (2, 3), 2, [22, 11, 2, -5, -10, -13, -14], 1001),
    (15, (2, 3), 2, [91, 52, 19, -8, -29, -44, -53, -56], 6188),
    (7, (4, 5), 2, [-13, 67, -19, -70], 132),
    (9, (4, 5), 2, [-126, 371, 151, -211, -370], 1716),
    (11, (4, 5), 2, [-90, 174, 146, 1, -136, -190], 1716),
]


@pytest.mark.parametrize(
    ("window", "polynomial", "derivative", "half", "norm"),
    [(window, p, derivative, half, norm) for window, ps, derivative, half, norm in TABLES for p in ps],
)
def test_integers_of_the_1964_tables(window, polynomial, derivative, half, norm):
    mirrored = half + [(-1) ** derivative * value for value in half[-2::-1]]
    integers = window_coefficients(window, polynomial, derivative)[window // 2] * norm
    np.testing.assert_allclose(integers, mirrored, rtol=1e-12, atol=1e-12 * max(map(abs, half)))


def test_end_points_of_the_five_point_quadratic():
    # computed in exact rational arithmetic: value of the fitted polynomial at the first and at the second point
    ends = window_coefficients(5, 2)[:2] * 35
    np.testing.assert_allclose(ends, [[31, 9, -3, -5, 3], [9, 13, 12, 6, -5]], rtol=1e-12)


@pytest.mark.parametrize("window", [5, 9, 15, 25])
@pytest.mark.parametrize("polynomial", [0, 1, 2, 3, 4])
def test_moments_at_every_point_of_the_window(window, polynomial):
    """Σ c_i i^j = d!·δ_jd (Steinier, Termonia, Deltour 1972; the condition is exact whatever the printing)."""
    for derivative in range(polynomial + 1):
        coefficients = window_coefficients(window, polynomial, derivative)
        for point in range(window):
            offsets = np.arange(window, dtype=float) - point
            for power in range(polynomial + 1):
                expected = math.factorial(derivative) if power == derivative else 0.0
                scale = np.abs(coefficients[point]) @ np.abs(offsets) ** power + 1.0
                assert coefficients[point] @ offsets**power == pytest.approx(expected, abs=1e-12 * scale)


@pytest.mark.parametrize(
    ("window", "polynomial", "derivative"),
    [(3, 1, 0), (5, 2, 0), (11, 2, 1), (9, 2, 2), (15, 3, 3), (21, 4, 4), (25, 6, 2), (101, 2, 0)],
)
@pytest.mark.parametrize("spacing", [1.0, -3.857])
def test_agrees_with_an_independent_implementation(window, polynomial, derivative, spacing):
    spectra = np.random.default_rng(20).normal(size=(7, 150))
    axis = 4000.0 + spacing * np.arange(150)
    expected = savgol_filter(spectra, window, polynomial, deriv=derivative, delta=spacing, mode="interp")
    ours = savitzky_golay(spectra, window, polynomial, derivative, axis)
    np.testing.assert_allclose(ours, expected, rtol=1e-9, atol=1e-9 * np.abs(expected).max())


@pytest.mark.parametrize("points", [11, 12, 41, 42, 43, 74, 75, 106])
def test_spectra_that_end_anywhere_in_a_block(points):
    """Inner windows are taken 32 at a time: none, one, a block less or more one."""
    spectra = np.random.default_rng(points).normal(size=(2, points))
    expected = savgol_filter(spectra, 11, 2, mode="interp")
    np.testing.assert_allclose(savitzky_golay(spectra, 11, 2), expected, atol=1e-13)


def test_window_as_long_as_the_spectrum():
    spectra = np.random.default_rng(21).normal(size=(3, 9))
    fits = np.array([np.polyval(np.polyfit(range(9), row, 2), range(9)) for row in spectra])
    np.testing.assert_allclose(savitzky_golay(spectra, 9, 2), fits, atol=1e-12)


def test_each_segment_by_itself():
    axis = np.concatenate([np.arange(2000.0, 1900.0, -4.0), np.arange(1500.0, 1400.0, -4.0)])
    spectra = np.random.default_rng(22).normal(size=(4, axis.size))
    whole = savitzky_golay(spectra, 7, 2, 1, axis)
    for first, last in pairwise([0, 25, 50]):
        alone = savitzky_golay(spectra[:, first:last], 7, 2, 1, axis[first:last])
        np.testing.assert_allclose(whole[:, first:last], alone, rtol=1e-13, atol=1e-15)


def test_a_step_at_a_cut_is_not_seen():
    axis = np.concatenate([np.arange(20.0), np.arange(40.0, 60.0)])
    spectrum = np.where(axis < 30, 1.0, 5.0)[np.newaxis]
    np.testing.assert_allclose(savitzky_golay(spectrum, 5, 2, 1, axis), 0.0, atol=1e-13)


def test_one_spectrum_does_not_depend_on_its_neighbours():
    spectra = np.random.default_rng(23).normal(size=(5, 60))
    together = savitzky_golay(spectra, 11, 2, 1)
    for row, alone in zip(together, spectra, strict=True):
        np.testing.assert_allclose(savitzky_golay(alone[np.newaxis], 11, 2, 1)[0], row, rtol=1e-13, atol=1e-14)


def test_an_axis_printed_rounded_is_equally_spaced():
    exact = np.linspace(850.0, 1050.0, 100)
    spectrum = (exact**2)[np.newaxis]
    ours = savitzky_golay(spectrum, 9, 2, 2, np.round(exact, 2))
    np.testing.assert_allclose(ours, 2.0, rtol=1e-4)  # the mean step is off by at most 0.01 in 200


def test_the_fitted_step_carries_its_coefficients():
    spectra = np.random.default_rng(24).normal(size=(6, 40))
    step = SavitzkyGolay(window=7, derivative=1, axis=np.arange(80.0, 0.0, -2.0)).fit(spectra)
    assert step.coefficients_.shape == (7, 7)
    np.testing.assert_allclose(step.coefficients_[3] * 28 * -2, [-3, -2, -1, 0, 1, 2, 3], atol=1e-12)
    assert step.bounds_.tolist() == [[0, 40]]


@pytest.mark.parametrize(
    ("parameters", "message"),
    [
        ({"window": 10}, r"window = 10; expected an odd number of points.*Use 9 or 11"),
        ({"window": 0}, r"window = 0; expected an odd"),
        ({"window": -3}, r"window = -3; expected an odd"),
        ({"window": 9.0}, r"window = 9\.0.*expected whole numbers"),
        ({"window": 5, "polynomial": 5}, r"polynomial = 5 with window = 5; expected a degree from 0 to 4"),
        ({"polynomial": -1}, r"polynomial = -1"),
        ({"derivative": 5, "polynomial": 6}, r"derivative = 5; expected 0 \(smoothing\) to 4"),
        ({"derivative": 3}, r"derivative = 3 of a polynomial of degree 2.*at least 3"),
        ({"window": 43}, r"window = 43 is longer than the segment\(s\) 0 to 39 \(40 points\).*shorter window"),
    ],
)
def test_refuses_what_cannot_be_meant(parameters, message):
    with pytest.raises(ParameterError, match=message):
        SavitzkyGolay(**parameters).fit(np.zeros((2, 40)))


def test_names_the_segment_that_is_too_short():
    axis = np.concatenate([np.arange(20.0), np.arange(100.0, 106.0)])
    with pytest.raises(ParameterError, match=r"100 to 105 \(6 points\); expected segments of at least 11"):
        SavitzkyGolay(axis=axis).fit(np.zeros((2, 26)))


def test_refuses_unequal_spacing():
    axis = np.arange(40.0)
    axis[20:] += 0.02
    with pytest.raises(ParameterError, match=r"steps of 1\.02 between 19 and 20\.02; expected 1 throughout.*resample"):
        SavitzkyGolay(axis=axis).fit(np.zeros((2, 40)))
