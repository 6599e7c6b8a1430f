"""Gram matrices of windows from running sums."""

from functools import partial

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.regression.fast_cross_validation import fast_left_out
from quant.regression.fast_cross_validation_many import cross_validate_many
from quant.regression.fast_cross_validation_windows import WindowGrams


@pytest.fixture
def X():
    return 5 + np.random.default_rng(31).standard_normal((20, 53)).cumsum(axis=1)


def test_every_window_has_the_gram_matrix_of_its_points(X):
    windows = WindowGrams(X, 10)
    assert len(windows) == 6
    places = list(windows.every())
    assert len(places) == len(set(places)) == 21
    for start, stop in places:
        part = X[:, windows.points(start, stop)]
        part = part - part.mean(axis=0)
        assert windows.gram(start, stop).values == pytest.approx(part @ part.T, abs=1e-10)
    assert windows.points(4, 6) == slice(40, 53)


def test_a_weak_window_after_a_strong_one_stops_before_it_follows_noise():
    rng = np.random.default_rng(32)
    X = rng.standard_normal((30, 40))
    X[:, 20:] *= 1e-4
    y, fold = X[:, 25] * 1e4 + 0.1 * rng.standard_normal(30), np.arange(30) % 3
    windows = WindowGrams(X, 20)
    found = cross_validate_many([partial(windows.gram, 1, 2)], y, [fold], 8, accuracy=1e-8, keep_predicted=True)
    alone = WindowGrams(X[:, 20:], 20)
    fair = cross_validate_many([partial(alone.gram, 0, 1)], y, [fold], 8)
    expected = fast_left_out(X[:, 20:], y, [fold], 8).predicted[0]
    last = found.stopped.min()
    assert last < fair.stopped.min() == 8
    assert found.predicted[0, 0, 0, : last + 1] == pytest.approx(expected[: last + 1], abs=1e-8 * np.ptp(y))


@pytest.mark.parametrize("block", [0, 54, 2.5, True])
def test_refuses_blocks_that_are_none(X, block):
    with pytest.raises(ParameterError, match="from 1 to 53"):
        WindowGrams(X, block)


@pytest.mark.parametrize(("start", "stop"), [(2, 2), (-1, 2), (0, 7)])
def test_refuses_windows_that_are_none(X, start, stop):
    with pytest.raises(ParameterError, match="0 ≤ start < stop ≤ 6"):
        WindowGrams(X, 10).gram(start, stop)
