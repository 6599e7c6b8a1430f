"""Equivalence decides, tests for a difference advise."""

import math

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.revalidation.equivalence import (
    FAMILY,
    advisory_tests,
    bias_equivalence,
    extra_sum_of_squares,
    scatter_equivalence,
    upper_factor,
)

# published-values.md 2.2, small complete cases [computed]
ERRORS = np.array([0.3, -0.1, 0.2, 0.4, 0.1, 0.0, 0.2, -0.2, 0.3, 0.1])
PREDICTED = np.arange(2.0, 17.0, 2.0)
REFERENCE = np.array([2.3, 3.9, 6.2, 8.4, 10.1, 12.6, 14.2, 16.9])


def test_bias_of_the_published_case():
    found = bias_equivalence(ERRORS, allowed=0.5)
    assert found.bias == pytest.approx(0.13, abs=1e-12)
    assert found.sd == pytest.approx(0.188856, abs=1e-6)
    # t(0.95, 9) = 1.8331 (published-values.md 2.2, quantiles [computed])
    assert found.high - found.bias == pytest.approx(1.8331 * 0.188856 / math.sqrt(10), abs=1e-5)


def test_equivalence_is_shown_just_beyond_the_end_of_the_interval_and_not_just_inside():
    high = bias_equivalence(ERRORS, allowed=1.0).high
    shown, not_shown = bias_equivalence(ERRORS, high * 1.0001), bias_equivalence(ERRORS, high * 0.9999)
    assert shown.shown
    assert shown.p < 0.05
    assert not not_shown.shown
    assert not_shown.p > 0.05


def test_a_bias_is_judged_without_regard_to_its_sign():
    assert bias_equivalence(ERRORS, 0.3).p == pytest.approx(bias_equivalence(-ERRORS, 0.3).p)


def test_scatter_needs_room_for_its_upper_limit():
    # chi²(0.05, 9) = 3.325 [from memory, any table]
    assert upper_factor(10) == pytest.approx(math.sqrt(9 / 3.325), rel=1e-3)
    limit = 0.188856 * upper_factor(10)
    assert scatter_equivalence(ERRORS, limit * 1.001).shown
    assert not scatter_equivalence(ERRORS, limit * 0.999).shown


def test_advisory_tests_of_the_published_case():
    errors = PREDICTED - REFERENCE
    tests = {t.name: t for t in advisory_tests(errors, errors, REFERENCE, sep=0.3, n_validation=30)}
    assert tuple(tests) == FAMILY
    # t = 2.96023 of the bias [computed]; Holm takes the smallest p four times
    assert tests["bias"].statistic == pytest.approx(2.96023, abs=1e-5)
    assert tests["bias"].value == pytest.approx(-0.325)
    assert tests["SEP"].value == pytest.approx(0.310530, abs=1e-6)


def test_extra_sum_of_squares_is_the_square_of_the_slope_t():
    # Slope t = 1.934494 of the reference on the prediction, published-values.md 2.2 [computed]; 5.3: F = t²
    assert extra_sum_of_squares(REFERENCE - PREDICTED, PREDICTED) == pytest.approx(1.934494**2, rel=1e-5)


def test_the_extra_sum_of_squares_sees_a_slope_that_the_ratio_of_variances_hardly_sees():
    # published-values.md 5.3 [computed by simulation]: n = 12, slope 1.3: 84 % against 18 %
    rng = np.random.default_rng(20260301)
    x, n, runs = np.linspace(0.0, 1.0, 12), 12, 600
    sigma = 0.3 * math.sqrt(np.sum((x - x.mean()) ** 2)) / 3.28  # so that the slope has a power of 84 %
    limit = 4.9646  # F(0.95; 1, 10) [from memory, any table]
    limit_ratio = 2.9430  # F(0.95; 11, 10) [from memory, any table]
    found = ratio = 0
    for _ in range(runs):
        d = 0.3 * x + sigma * rng.standard_normal(n)
        statistic = extra_sum_of_squares(d, x)
        found += statistic > limit
        ratio += (1 + statistic / 10) * 10 / 11 > limit_ratio
    assert 0.79 <= found / runs <= 0.89
    assert ratio / runs < 0.3


def test_an_unchanged_instrument_is_seldom_called_changed():
    rng = np.random.default_rng(20260302)
    runs, called, at_once = 600, 0, 0
    for _ in range(runs):
        reference = rng.uniform(0.1, 2.0, 12)
        d = 0.03 * rng.standard_normal(12)
        tests = advisory_tests(d, d, reference, sep=0.03, n_validation=16)
        called += any(t.significant for t in tests)
        at_once += any(t.p / 4 <= 0.05 for t in tests)  # known-bad control: each test at 5 % for itself, at best
    assert called / runs <= 0.04  # nominal 2 %, 99.9 % bound
    assert at_once > called


@pytest.mark.parametrize("allowed", [0.0, -1.0, math.nan])
def test_a_bound_that_allows_nothing_is_refused(allowed):
    with pytest.raises(ParameterError, match="above zero"):
        bias_equivalence(ERRORS, allowed)


def test_too_few_standards_are_refused():
    with pytest.raises(NotEnoughDataError, match="two or more"):
        bias_equivalence([0.1], 1.0)
    with pytest.raises(NotEnoughDataError, match="4 or more"):
        advisory_tests([0.1, 0.2, 0.1], [0.1, 0.2, 0.1], [1.0, 2.0, 3.0], sep=0.1, n_validation=10)


def test_one_level_has_no_slope():
    errors = np.array([0.1, -0.1, 0.05, 0.0])
    tests = {t.name: t for t in advisory_tests(errors, errors, np.ones(4), sep=0.1, n_validation=10)}
    assert tests["slope"].p == 1.0
    assert tests["joint ellipse"].p == 1.0
