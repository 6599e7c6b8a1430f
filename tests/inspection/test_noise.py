"""Noise from differences, and what is a spike."""

import numpy as np
import pytest

from quant.inspection.noise import noise_levels, signal_levels


def test_white_noise_is_measured_under_bands():
    rng = np.random.default_rng(20260105)
    axis = np.arange(2000.0)
    bands = sum(np.exp(-(((axis - centre) / 12) ** 2)) for centre in range(100, 2000, 150))
    rows = bands + np.array([[1e-3], [5e-3]]) * rng.standard_normal((2, 2000))
    assert noise_levels(rows) == pytest.approx([1e-3, 5e-3], rel=0.1)


def test_differences_never_step_over_a_cut():
    rows = np.zeros((1, 40))
    rows[0, 20:] = 7.0
    rows[0] += 1e-6 * np.random.default_rng(1).standard_normal(40)
    used = np.ones(40, dtype=bool)
    used[18:22] = False
    assert noise_levels(rows, used)[0] < 5e-6


def test_no_points_no_noise():
    assert noise_levels(np.ones((2, 10)), np.zeros(10, dtype=bool)).tolist() == [0, 0]


def test_signal_leaves_out_the_extreme_hundredths():
    row = np.arange(101.0)
    row[-1] = 1e6
    assert signal_levels(row[None], np.ones(101, dtype=bool))[0] == pytest.approx(98.0)
