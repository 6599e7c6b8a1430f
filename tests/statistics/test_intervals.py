"""Uncertainty of one prediction, by hand, and its path free of slow imports."""

import subprocess
import sys

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.intervals import NOT_RESOLVABLE, base_variance, prediction_interval, true_value_variance


def test_the_base_variance_by_hand_and_pooled_over_repeats():
    assert base_variance([1.0, -2.0], [0.0, 1.0]) == (1 + 4 / 2) / 2
    assert base_variance([[1.0, -2.0], [3.0, 0.0]], [[0.0, 1.0], [0.5, 0.5]]) == (1 + 2 + 6 + 0) / 4


def test_the_interval_by_hand():
    low, high = prediction_interval(5.0, 0.2, 0.44, 2.0)  # sqrt(1.44) = 1.2
    assert (low, high) == pytest.approx((5.0 - 0.48, 5.0 + 0.48))


def test_intervals_of_many_samples_are_those_of_each_and_may_reach_below_zero():
    values, leverages = np.array([0.1, 4.0, 9.0]), np.array([0.05, 0.2, 1.5])
    low, high = prediction_interval(values, 0.3, leverages, 2.1)
    assert low[0] < 0
    for i in range(3):
        assert (low[i], high[i]) == prediction_interval(values[i], 0.3, leverages[i], 2.1)


def test_the_true_value_by_hand_and_where_it_cannot_be_told():
    assert true_value_variance(0.2, 0.5, 0.1) == pytest.approx(0.04 * 1.5 - 0.01)
    assert true_value_variance(2.0, 0.5, 1.4) == pytest.approx(6.0 - 1.96)  # 1.96 of 2 allowed
    assert true_value_variance(2.0, 0.5, 1.42) is None  # 2.0164
    assert true_value_variance(2.0, np.array([0.0, 0.5]), 1.0) == pytest.approx([3.0, 5.0])
    assert true_value_variance(2.0, 0.5, 0.0) == 6.0
    assert NOT_RESOLVABLE == "not resolvable from laboratory error"


def test_intervals_of_left_out_straight_lines_cover_new_reference_results():
    # Straight lines through 12 samples, noise 0.5: dof n - A - 1 = 10; 99.9 % binomial bounds about 95 %.
    rng = np.random.default_rng(22)
    covered = 0
    for _ in range(1000):
        x, new = rng.uniform(0, 10, 12), rng.uniform(0, 10)
        design = np.column_stack([np.ones(12), x])
        y = 1 + 2 * x + rng.normal(0, 0.5, 12)
        inverse = np.linalg.inv(design.T @ design)
        h = np.einsum("ij,jk,ik->i", design, inverse, design)
        left_out = (design @ inverse @ design.T @ y - y) / (1 - h)
        s0 = np.sqrt(base_variance(left_out, h / (1 - h)))  # leverage in the line through the other eleven
        row = np.array([1.0, new])
        low, high = prediction_interval(row @ inverse @ design.T @ y, s0, row @ inverse @ row, 2.228139)
        covered += low <= 1 + 2 * new + rng.normal(0, 0.5) <= high
    assert stats.binom.ppf(0.0005, 1000, 0.95) <= covered <= stats.binom.ppf(0.9995, 1000, 0.95)


def test_impossible_questions_are_refused():
    with pytest.raises(SampleMismatchError, match=r"errors have shape \(2,\), leverages \(1,\)"):
        base_variance([1.0, 2.0], [0.1])
    with pytest.raises(NotEnoughDataError):
        base_variance([], [])
    with pytest.raises(ParameterError, match="not finite"):
        base_variance([np.nan], [0.1])
    with pytest.raises(ParameterError, match="leverage is negative"):
        prediction_interval(1.0, 0.1, -0.1, 2.0)
    with pytest.raises(ParameterError, match="s0 = -1"):
        prediction_interval(1.0, -1.0, 0.1, 2.0)
    with pytest.raises(ParameterError, match="s_ref = nan"):
        true_value_variance(1.0, 0.1, float("nan"))


def test_the_prediction_path_loads_no_scipy():
    code = "import sys, quant.statistics.intervals, quant.statistics.splits; sys.exit('scipy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
