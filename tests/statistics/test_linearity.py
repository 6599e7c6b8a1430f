"""Mandel's test and lack of fit against published data, among them lines of high r² that are curved."""

import math

import numpy as np
import pytest

from quant.errors import NotEnoughDataError
from quant.statistics.linearity import lack_of_fit_test, mandel_test, variance_homogeneity_test
from quant.statistics.straight_line import fit_line

# Anscombe sets I and II: from memory, reproduced.
ANSCOMBE_X = [10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5]
ANSCOMBE_1 = [8.04, 6.95, 7.58, 8.81, 8.33, 9.96, 7.24, 4.26, 10.84, 4.82, 5.68]
ANSCOMBE_2 = [9.14, 8.14, 8.74, 8.77, 9.26, 8.10, 6.13, 3.10, 9.13, 7.26, 4.74]

# EURACHEM/CITAC QUAM:2012 A5, cadmium by AAS: found.
CADMIUM_X = np.repeat([0.1, 0.3, 0.5, 0.7, 0.9], 3)
CADMIUM_Y = [0.028, 0.029, 0.029, 0.084, 0.083, 0.081, 0.135, 0.131, 0.133, 0.180, 0.181, 0.183, 0.215, 0.230, 0.216]

# NIST StRD Pontius, load cell: from memory, reproduced.
PONTIUS_X = np.tile(np.arange(1, 21) * 150_000.0, 2)
PONTIUS_Y = [
    *(0.11019, 0.21956, 0.32949, 0.43899, 0.54803, 0.65694, 0.76562, 0.87487, 0.98292, 1.09146),
    *(1.20001, 1.30822, 1.41599, 1.52399, 1.63194, 1.73947, 1.84646, 1.95392, 2.06128, 2.16844),
    *(0.11052, 0.22018, 0.32939, 0.43886, 0.54798, 0.65739, 0.76596, 0.87474, 0.98300, 1.09150),
    *(1.20004, 1.30818, 1.41613, 1.52408, 1.63159, 1.73965, 1.84696, 1.95445, 2.06177, 2.16829),
]


def test_anscombe_1_is_straight_and_2_is_curved():
    straight, curved = mandel_test(ANSCOMBE_X, ANSCOMBE_1), mandel_test(ANSCOMBE_X, ANSCOMBE_2)
    for found, y in ((straight, ANSCOMBE_1), (curved, ANSCOMBE_2)):
        line = fit_line(ANSCOMBE_X, y)
        assert [round(line.intercept, 1), round(line.slope, 2)] == [3.0, 0.5]
        assert line.correlation**2 == pytest.approx(0.6665, abs=0.001)
        assert found.line_sd == pytest.approx(1.237, abs=5e-4)
        assert found.limit == pytest.approx(11.259, abs=5e-4)
    assert straight.statistic == pytest.approx(0.532, abs=5e-4)
    assert not straight.curved
    assert curved.statistic == pytest.approx(4.9e6, rel=0.01)
    assert curved.curved
    assert "curved" in str(curved)


def test_the_cadmium_line_is_visibly_curved():
    # Extra on these data: computed.
    found = mandel_test(CADMIUM_X, CADMIUM_Y)
    assert found.statistic == pytest.approx(15.33, abs=5e-3)
    assert found.limit == pytest.approx(9.33, abs=5e-3)
    assert found.curved
    assert [found.constant, found.linear, found.quadratic] == pytest.approx(
        [-0.00101429, 0.298143, -0.0571429], rel=5e-6
    )
    fit = lack_of_fit_test(CADMIUM_X, CADMIUM_Y)
    assert fit.statistic == pytest.approx(4.885, abs=5e-4)
    assert fit.limit == pytest.approx(3.708, abs=5e-4)
    assert fit.significant
    assert (fit.n, fit.n_levels) == (15, 5)
    assert "lack of fit F" in str(fit)


def test_nitrite_is_straight():
    # Ten standards as in ISO 8466-1 / DIN 38402-51: data from memory, attribution unverified, figures recomputed.
    y = [0.140, 0.281, 0.405, 0.535, 0.662, 0.789, 0.916, 1.058, 1.173, 1.303]
    found = mandel_test(np.arange(1, 11) * 0.05, y)
    assert found.quadratic_sd == pytest.approx(0.0052290, abs=5e-8)
    assert found.variance_difference == pytest.approx(2.2091e-5, abs=5e-10)
    assert found.statistic == pytest.approx(0.8079, abs=5e-5)
    assert found.limit == pytest.approx(12.246, abs=5e-4)
    assert not found.curved
    assert [found.constant, found.linear, found.quadratic] == pytest.approx([0.013500, 2.620273, -0.081818], abs=5e-7)


def test_pontius_certified_quadratic():
    found = mandel_test(PONTIUS_X, PONTIUS_Y)
    assert found.constant == pytest.approx(6.73565789473684e-4, rel=1e-9)
    assert found.linear == pytest.approx(7.32059160401003e-7, rel=1e-12)
    assert found.quadratic == pytest.approx(-3.16081871345029e-15, rel=1e-10)
    assert found.quadratic_sd == pytest.approx(2.05177424076185e-4, rel=1e-10)
    assert found.statistic == pytest.approx(4218.5, abs=0.05)  # computed
    assert found.limit == pytest.approx(7.37, abs=5e-3)
    assert round(fit_line(PONTIUS_X, PONTIUS_Y).correlation ** 2, 5) == 0.99999


def test_the_difference_is_that_of_the_two_sums_of_squares():
    found = mandel_test(ANSCOMBE_X, ANSCOMBE_1)
    difference = 9 * found.line_sd**2 - 8 * found.quadratic_sd**2
    assert found.variance_difference == pytest.approx(difference, rel=1e-10)


def test_an_exact_curve_is_infinitely_curved():
    found = mandel_test([0, 1, 2, 3, 4], [0, 1, 4, 9, 16])
    assert found.statistic == math.inf
    assert found.curved
    assert found.p == 0.0


def test_variance_homogeneity():
    # ISO 8466-1 (from memory): F(0.99; 9, 9) = 5.351 for ten replicates at each end.
    low, high = np.arange(10.0), 2.0 * np.arange(10.0)
    found = variance_homogeneity_test(low, high)
    assert found.limit == pytest.approx(5.351, abs=5e-4)
    assert found.statistic == pytest.approx(4.0)
    assert not found.significant
    swapped = variance_homogeneity_test(2.5 * np.arange(10.0), np.arange(10.0))
    assert swapped.statistic == pytest.approx(6.25)
    assert swapped.significant
    uneven = variance_homogeneity_test(3.0 * np.arange(4.0), np.arange(10.0))  # F(0.99; 3, 9), larger variance first
    assert uneven.limit == pytest.approx(6.992, abs=5e-4)


def test_straight_lines_are_called_curved_no_more_often_than_stated():
    rng = np.random.default_rng(4)
    x = np.repeat(np.arange(1.0, 7.0), 2)
    tests = [
        (mandel_test(x, y, 0.95).curved, lack_of_fit_test(x, y).significant) for y in 3 * x + rng.normal(size=(500, 12))
    ]
    counts = np.sum(tests, axis=0)
    assert ((counts >= 11) & (counts <= 42)).all()  # 99.9 % binomial bounds about 25


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="exactly"):
        mandel_test([1, 2, 3, 4], [2, 4, 6, 8])
    with pytest.raises(NotEnoughDataError, match="2 different x"):
        mandel_test([1, 1, 2, 2], [1, 2, 3, 4])
    with pytest.raises(NotEnoughDataError, match="some with replicates"):
        lack_of_fit_test([1, 2, 3, 4], [1, 2, 3, 5])
    with pytest.raises(NotEnoughDataError, match="means repeated"):
        lack_of_fit_test([1, 1, 2, 2, 3, 3], [1, 1, 2, 2, 4, 4])
    with pytest.raises(NotEnoughDataError, match="do not differ"):
        variance_homogeneity_test([1.0, 1.0], [1.0, 2.0])
