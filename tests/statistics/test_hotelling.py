"""Hotelling's T² and its two limits against published formulas and computed tables."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.hotelling import (
    hotelling_t_squared,
    leverage_flag,
    t_squared_from_leverage,
    t_squared_limit_calibration,
    t_squared_limit_new,
)

# Tracy, Young, Mason 1992: formulas from memory, values computed. 95 % and 99 %, A = 1 ... 5.
NEW = {
    20: [(4.600, 8.594), (7.879, 13.329), (11.255, 18.254), (14.997, 23.803), (19.294, 30.295)],
    30: [(4.322, 7.851), (7.150, 11.672), (9.857, 15.319), (12.644, 19.086), (15.601, 23.104)],
    50: [(4.119, 7.326), (6.645, 10.572), (8.940, 13.488), (11.187, 16.328), (13.451, 19.184)],
    100: [(3.976, 6.967), (6.304, 9.853), (8.345, 12.339), (10.276, 14.669), (12.158, 16.925)],
}
CALIBRATION = {20: (5.361, 6.820, 8.104), 30: (5.579, 7.164, 8.585), 50: (5.747, 7.430, 8.955)}  # 95 %, A = 2, 3, 4


@pytest.mark.parametrize("n", NEW)
def test_limits_for_new_samples(n):
    found = [(t_squared_limit_new(n, a, 0.95), t_squared_limit_new(n, a, 0.99)) for a in range(1, 6)]
    assert np.array(found) == pytest.approx(np.array(NEW[n]), abs=5.1e-4)


@pytest.mark.parametrize("n", CALIBRATION)
def test_limits_for_calibration_samples(n):
    found = [t_squared_limit_calibration(n, a) for a in (2, 3, 4)]
    assert found == pytest.approx(CALIBRATION[n], abs=5.1e-4)


def test_t_squared_is_the_sum_of_squared_scores_over_variances():
    rng = np.random.default_rng(3)
    orthogonal = np.linalg.qr(rng.normal(size=(12, 4)) - rng.normal(size=4))[0]
    orthogonal = np.linalg.qr(np.column_stack([np.ones(12), orthogonal]))[0][:, 1:4] * [5.0, 2.0, 0.01]
    variances = orthogonal.var(axis=0, ddof=1)
    assert hotelling_t_squared(orthogonal, orthogonal) == pytest.approx(np.sum(orthogonal**2 / variances, axis=1))
    # Unit-normalised scores: T² = (n - 1)·h without the term 1/n (from memory).
    leverage = 1 / 12 + np.sum((orthogonal / np.linalg.norm(orthogonal, axis=0)) ** 2, axis=1)
    assert t_squared_from_leverage(leverage, 12) == pytest.approx(hotelling_t_squared(orthogonal, orthogonal))


def test_a_limit_for_calibration_samples_rejects_too_many_new_ones():
    rng = np.random.default_rng(4)
    inside = np.zeros(2)
    for _ in range(400):
        calibration, new = rng.normal(size=(15, 4)), rng.normal(size=(5, 4))
        t_squared = hotelling_t_squared(new, calibration)
        inside += [np.mean(t_squared <= limit(15, 4)) for limit in (t_squared_limit_new, t_squared_limit_calibration)]
    right, wrong = inside / 400
    assert 0.92 < right < 0.975
    assert wrong < 0.85


def test_the_flag_is_three_mean_leverages():
    # ASTM E1655 (from memory): 3k/n, mean-centred 3(k + 1)/n.
    assert leverage_flag(30, 4) == pytest.approx(0.5)
    assert leverage_flag(30, 4, mean_centred=False) == pytest.approx(0.4)


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="5 or more"):
        t_squared_limit_new(4, 4)
    with pytest.raises(NotEnoughDataError, match="6 or more"):
        t_squared_limit_calibration(5, 4)
    with pytest.raises(ParameterError, match="n_factors = 0"):
        t_squared_limit_new(10, 0)
    with pytest.raises(ParameterError, match="probability"):
        t_squared_limit_calibration(10, 2, 1.0)
    with pytest.raises(NotEnoughDataError, match="2 or more"):
        t_squared_from_leverage([0.5], 1)
    with pytest.raises(NotEnoughDataError, match="no calibration sample"):
        leverage_flag(0, 2)
