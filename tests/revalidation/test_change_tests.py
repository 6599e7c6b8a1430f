import numpy as np
import pytest
from scipy import stats

from quant.revalidation.change_tests import dempster_p, mean_p, spread_p


def test_one_column_is_students_t() -> None:
    values = np.array([0.3, -0.1, 0.2, 0.4, 0.1, 0.0, 0.2, -0.2, 0.3, 0.1])
    # published-values.md 2.2 (computed): t = 2.17677 with 9 degrees of freedom
    assert mean_p(values[:, None]) == pytest.approx(2 * stats.t.sf(2.17677, 9), rel=1e-5)


def test_several_columns_are_hotellings_t_squared() -> None:
    rows = np.random.default_rng(2).normal(0.5, 1.0, (12, 2))
    mean, cov = rows.mean(axis=0), np.cov(rows.T)
    t_squared = 12 * mean @ np.linalg.inv(cov) @ mean
    assert mean_p(rows) == pytest.approx(stats.f.sf(t_squared * 10 / (2 * 11), 2, 10))


def test_no_more_standards_than_kinds_show_nothing() -> None:
    assert mean_p(np.ones((2, 2))) == 1.0


def test_equal_values_without_scatter() -> None:
    assert mean_p(np.zeros((5, 1))) == 1.0
    assert mean_p(np.ones((5, 1))) < 1e-6


@pytest.mark.parametrize("correlated", [False, True])
def test_dempsters_test_keeps_its_rate_and_sees_a_mean(correlated: bool) -> None:
    rng = np.random.default_rng(3)
    rows = rng.standard_normal((2000, 12, 60))
    if correlated:  # neighbours alike, as residual spectra are
        rows = np.apply_along_axis(np.convolve, 2, rows, np.ones(5), mode="same")
    rate = np.mean([dempster_p(each) <= 0.05 for each in rows])
    assert 0.034 < rate < 0.07  # 99.9 % binomial bounds about 5 %, and a little for an approximate test
    assert np.mean([dempster_p(each + 1.0) <= 0.05 for each in rows[:200]]) > 0.95


def test_equal_residuals_of_zero_are_no_change() -> None:
    assert dempster_p(np.zeros((5, 10))) == 1.0


def test_spread_is_the_two_sided_f_test() -> None:
    rng = np.random.default_rng(4)
    before, after = rng.normal(0, 1, 12), rng.normal(0, 3, 12)
    ratio = after.var(ddof=1) / before.var(ddof=1)
    assert spread_p(before, after) == pytest.approx(2 * stats.f.sf(ratio, 11, 11))
    assert spread_p(after, before) == pytest.approx(spread_p(before, after))
    assert spread_p(np.zeros(5), np.zeros(5)) == 1.0


def test_variances_of_parts_add_up_and_chance_is_not_understated() -> None:
    rng = np.random.default_rng(5)
    before, after = rng.normal(0, 1, (2, 2000, 12, 3)) * [3.0, 1.0, 0.5]
    found = np.array([spread_p(b, a) for b, a in zip(before, after, strict=True)])
    assert np.mean(found <= 0.05) < 0.05
    assert np.mean([spread_p(b, 4 * a) <= 0.05 for b, a in zip(before, after, strict=True)]) > 0.95
    assert spread_p(before[0], after[0]) == pytest.approx(spread_p(after[0], before[0]))
