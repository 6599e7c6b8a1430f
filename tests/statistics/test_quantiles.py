"""Quantiles against tables, and the limits built on them."""

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.quantiles import (
    chi_square_quantile,
    f_quantile,
    rmse_confidence_interval,
    t_quantile,
    t_two_sided_p,
    upper_limit,
)


# Tables of section 2.2 of our published values (computed).
@pytest.mark.parametrize(
    ("p", "dof", "value"),
    [(0.975, 4, 2.7764), (0.975, 9, 2.2622), (0.975, 60, 2.0003), (0.95, 5, 2.0150), (0.95, 100, 1.6602)],
)
def test_students_t_against_the_table(p, dof, value):
    assert t_quantile(p, dof) == pytest.approx(value, abs=5e-5)
    assert t_quantile(1 - p, dof) == pytest.approx(-value, abs=5e-5)
    assert t_two_sided_p(value, dof) == pytest.approx(2 * (1 - p), abs=2e-5)


# sqrt F(0.95; v, M), the T_UE/SEC table of section 2.2 (computed).
@pytest.mark.parametrize(
    ("above", "below", "root"), [(9, 20, 1.547), (10, 50, 1.423), (19, 100, 1.301), (20, 500, 1.262), (50, 20, 1.402)]
)
def test_f_against_the_table(above, below, root):
    assert np.sqrt(f_quantile(0.95, above, below)) == pytest.approx(root, abs=5e-4)


def test_chi_square_against_the_published_ten_degrees_of_freedom():
    assert chi_square_quantile(0.95, 10) == pytest.approx(18.3070, abs=5e-5)  # section 4.5 (computed)


def test_the_interval_of_an_rmsep_by_hand():
    # chi-square(0.975; 10) = 20.4832, (0.025; 10) = 3.2470: any printed table.
    low, high = rmse_confidence_interval(2.0, 10)
    assert low == pytest.approx(2 * np.sqrt(10 / 20.4832), abs=1e-5)
    assert high == pytest.approx(2 * np.sqrt(10 / 3.2470), abs=1e-4)


def test_the_interval_of_an_rmsep_covers_at_its_rate():
    errors = np.random.default_rng(20).normal(0, 0.3, (4000, 12))
    low, high = np.array([rmse_confidence_interval(value, 12) for value in np.sqrt(np.mean(errors**2, axis=1))]).T
    covered = np.sum((low < 0.3) & (high > 0.3))
    assert stats.binom.ppf(0.0005, 4000, 0.95) <= covered <= stats.binom.ppf(0.9995, 4000, 0.95)


def test_the_upper_limit_by_hand():
    # Cube roots 1, 2, 3: mean 2, SD 1; t(0.95, 2) = 2.919986 (any table).
    assert upper_limit([1.0, 8.0, 27.0], 3, 0.95) == pytest.approx((2 + 2.919986 * np.sqrt(4 / 3)) ** 3, rel=1e-6)


def test_the_upper_limit_on_logarithms_by_hand():
    # Logarithms 0, 1, 2: mean 1, SD 1.
    found = upper_limit(np.exp([0.0, 1.0, 2.0]), 3, 0.95, "logarithm")
    assert found == pytest.approx(np.exp(1 + 2.919986 * np.sqrt(4 / 3)), rel=1e-6)


def test_pooled_repeats_count_samples_not_values():
    values = np.array([1.0, 8.0, 27.0])
    pooled = upper_limit(np.tile(values, 4), 3, 0.95)
    spread = np.std(np.tile([1.0, 2.0, 3.0], 4), ddof=1)
    assert pooled == pytest.approx((2 + 2.919986 * spread * np.sqrt(4 / 3)) ** 3, rel=1e-6)
    assert pooled > upper_limit(np.tile(values, 4), 12, 0.95)


def test_the_upper_limit_is_passed_by_new_chi_squares_at_its_rate():
    rng = np.random.default_rng(21)
    draws = rng.chisquare(4, (4000, 31))
    above = sum(new > upper_limit(known, 30, 0.95) for *known, new in draws)
    assert stats.binom.ppf(0.0005, 4000, 0.05) <= above <= stats.binom.ppf(0.9995, 4000, 0.05)


def test_impossible_questions_are_refused():
    with pytest.raises(ParameterError, match="probability of 1 "):
        t_quantile(1, 5)
    with pytest.raises(NotEnoughDataError, match="0 degrees of freedom"):
        t_quantile(0.9, 0)
    with pytest.raises(NotEnoughDataError):
        f_quantile(0.9, 4, -1)
    with pytest.raises(NotEnoughDataError):
        rmse_confidence_interval(1.0, 0)
    with pytest.raises(ParameterError, match="-1"):
        rmse_confidence_interval(-1.0, 5)
    with pytest.raises(ParameterError, match=r"1 value\(s\) are below zero, at position\(s\) 1"):
        upper_limit([1.0, -0.1], 2, 0.95)
    with pytest.raises(ParameterError, match=r"1 value\(s\) are not above zero, at position\(s\) 1"):
        upper_limit([1.0, 0.0], 2, 0.95, "logarithm")
    with pytest.raises(ParameterError, match="scale = 'root'"):
        upper_limit([1.0, 2.0], 2, 0.95, "root")
    with pytest.raises(NotEnoughDataError, match=r"2 value\(s\) of 1 unit"):
        upper_limit([1.0, 2.0], 1, 0.95)
