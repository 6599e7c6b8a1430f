"""Skewness, kurtosis and Shapiro & Wilk's test."""

import warnings

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError
from quant.statistics.normality import normality


def test_moments_by_hand():
    # -1, -1, -1, 3: mean 0, m2 = 3, m3 = 6, m4 = 21; g1 = 6/3^1.5, g2 = 21/9 - 3.
    found = normality([-1.0, -1.0, -1.0, 3.0])
    assert found.skewness == pytest.approx(6 / 3**1.5)
    assert found.excess_kurtosis == pytest.approx(21 / 9 - 3)
    # ISO 12099 (from memory): 2·sqrt(6/n), 2·sqrt(24/n).
    assert (found.skewness_limit, found.kurtosis_limit) == pytest.approx((2 * 1.5**0.5, 2 * 6**0.5))
    assert found.within_rule
    assert "Shapiro-Wilk p" in str(found)


def test_normal_residuals_pass_and_skewed_or_heavy_tailed_ones_do_not():
    rng = np.random.default_rng(5)
    normal = [normality(rng.normal(size=40)) for _ in range(200)]
    assert 2 <= sum(found.shapiro_p <= 0.05 for found in normal) <= 22  # 99.9 % binomial bounds about 10
    assert sum(found.within_rule for found in normal) > 160
    skewed, heavy = normality(rng.exponential(size=100)), normality(rng.standard_t(1.5, size=100))
    assert skewed.skewness > skewed.skewness_limit
    assert heavy.excess_kurtosis > heavy.kurtosis_limit
    for found in (skewed, heavy):
        assert not found.within_rule
        assert found.shapiro_p < 0.001


def test_unit_and_origin_do_not_matter():
    x = np.random.default_rng(6).normal(size=30)
    one, other = normality(x), normality(1e-6 * x - 3e-6)
    assert other.skewness == pytest.approx(one.skewness)
    assert other.excess_kurtosis == pytest.approx(one.excess_kurtosis)
    assert other.shapiro_p == pytest.approx(one.shapiro_p, rel=1e-6)
    assert one.shapiro_p == pytest.approx(stats.shapiro(x).pvalue)


def test_very_many_values_have_no_p_and_no_warning():
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        assert normality(np.random.default_rng(7).normal(size=5001)).shapiro_p is None


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="at least 3"):
        normality([1.0, 2.0])
    with pytest.raises(NotEnoughDataError, match="at least 3"):
        normality([1.0, 1.0, 1.0])
