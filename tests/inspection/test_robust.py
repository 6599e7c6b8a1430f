"""Limits for the largest of many, and what stands out."""

import numpy as np
import pytest

from quant.inspection.robust import largest_z, robust_sd, robust_z, standing_out


def test_by_hand():
    values = np.array([1.0, 2.0, 3.0, 4.0, 100.0])  # median 3, absolute deviations 2, 1, 0, 1, 97
    assert robust_sd(values) == pytest.approx(1.4826)
    assert robust_z(values)[4] == pytest.approx(97 / 1.4826)
    assert np.array_equal(robust_z(np.array([1.0, 1.0, 1.0, 9.0])), [0, 0, 0, 0])


def test_the_limit_holds_its_rate_on_other_draws():
    # 99.9 % bounds of a binomial count of 2000 at 2 %: 21 to 61; the limit itself comes from 4000 draws.
    rng = np.random.default_rng(20260105)
    limit = largest_z(36, 0.02)
    passed = sum(robust_z(rng.standard_normal(36)).max() > limit for _ in range(2000))
    assert 18 <= passed <= 65


def test_both_sides_need_a_wider_limit():
    assert largest_z(36, 0.02, both_sides=True) > largest_z(36, 0.02)
    # Known from theory for many numbers, where median and MAD are certain: Φ⁻¹(0.98^(1/500)) = 3.93.
    assert largest_z(500, 0.02) == pytest.approx(3.94, abs=0.35)


def test_a_large_number_stands_out_the_largest_first():
    rng = np.random.default_rng(2)
    values = np.exp(0.2 * rng.standard_normal(40))
    assert standing_out(values).size == 0
    values[[7, 3]] = 5.0, 50.0
    assert standing_out(values).tolist() == [3, 7]
    assert standing_out(values, least_ratio=10).tolist() == [3]


def test_new_numbers_are_judged_by_the_usual_ones():
    values = np.concatenate([np.exp(0.2 * np.random.default_rng(2).standard_normal(30)), np.full(20, 30.0)])
    assert standing_out(values, usual=30).tolist() == list(range(30, 50))


@pytest.mark.parametrize("values", [np.ones(30), np.arange(5.0), np.zeros(30)])
def test_few_or_equal_numbers_say_nothing(values):
    assert standing_out(values).size == 0
