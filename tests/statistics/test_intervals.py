"""Uncertainty of one prediction, by hand, and its path free of slow imports."""

import subprocess
import sys

import numpy as np
import pytest
from scipy import stats

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.intervals import NOT_RESOLVABLE, base_variance, standard_error, true_value_share


def test_the_base_variance_by_hand_and_pooled_over_repeats():
    assert base_variance([1.0, -2.0], [0.0, 1.0]) == (1 + 4 / 2) / 2
    assert base_variance([[1.0, -2.0], [3.0, 0.0]], [[0.0, 1.0], [0.5, 0.5]]) == (1 + 2 + 6 + 0) / 4


def test_the_standard_error_by_hand():
    assert standard_error(0.2, 0.44) == pytest.approx(0.2 * 1.2)
    assert standard_error(0.2, np.array([0.44, 0.0]), np.array([0.0, 0.05])) == pytest.approx([0.24, 0.3])


def test_the_true_value_by_hand_and_where_it_cannot_be_told():
    assert true_value_share(0.5, 0.5, 0.3) == pytest.approx(0.8)  # 0.5² - 0.3² = 0.4²
    assert true_value_share(2.5, 2.0, 1.4) == pytest.approx(np.sqrt(6.25 - 1.96) / 2.5)  # 1.96 of 2 allowed
    assert true_value_share(2.5, 2.0, 1.42) is None  # 2.0164
    assert true_value_share(2.5, 2.0, 0.0) == 1.0
    assert true_value_share(0.0, 0.0, 0.0) == 1.0
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
        half_width = 2.228139 * standard_error(s0, row @ inverse @ row)
        covered += abs(1 + 2 * new + rng.normal(0, 0.5) - row @ inverse @ design.T @ y) <= half_width
    assert stats.binom.ppf(0.0005, 1000, 0.95) <= covered <= stats.binom.ppf(0.9995, 1000, 0.95)


def test_impossible_questions_are_refused():
    with pytest.raises(SampleMismatchError, match=r"errors have shape \(2,\), leverages \(1,\)"):
        base_variance([1.0, 2.0], [0.1])
    with pytest.raises(NotEnoughDataError):
        base_variance([], [])
    with pytest.raises(ParameterError, match="not finite"):
        base_variance([np.nan], [0.1])
    with pytest.raises(ParameterError, match="leverage is negative"):
        standard_error(0.1, -0.1)
    with pytest.raises(ParameterError, match="s0 = -1"):
        standard_error(-1.0, 0.1)
    with pytest.raises(ParameterError, match="laboratory = nan"):
        true_value_share(1.0, 0.1, float("nan"))


def test_the_prediction_path_loads_no_scipy():
    code = "import sys, quant.statistics.intervals, quant.statistics.splits; sys.exit('scipy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
