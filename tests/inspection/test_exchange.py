"""Exchanged values among simulated straight-line data: found, and told from one wrong value."""

import numpy as np
import pytest

from quant.inspection.exchange import exchange_statistic, find_exchanges
from quant.inspection.left_out import make_smoothers


@pytest.fixture
def line():
    rng = np.random.default_rng(20260105)
    content = rng.uniform(0, 10, 30)
    spectra = np.outer(content, rng.normal(size=40)) + 0.1 * rng.normal(size=(30, 40))
    return make_smoothers(spectra, np.arange(30)), content + 0.1 * rng.normal(size=30)


def swapped(values, i, j):
    other = values.copy()
    other[[i, j]] = values[[j, i]]
    return other


def press(smoothers, values):
    return min(float(np.sum((each.errors @ values) ** 2)) for each in smoothers)


def test_the_statistic_is_that_of_trying_everything(line):
    smoothers, values = line
    values = swapped(values, 3, 8)
    tried = {(i, j): press(smoothers, swapped(values, i, j)) for i in range(30) for j in range(i + 1, 30)}
    best = min(tried, key=tried.get)
    mended = np.inf
    for smoother in smoothers:
        for i in range(30):  # PRESS is a parabola in one value: three points give its lowest
            at = []
            for step in (-1.0, 0.0, 1.0):
                moved = values.copy()
                moved[i] += step
                at.append(float(np.sum((smoother.errors @ moved) ** 2)))
            a, b = (at[0] + at[2]) / 2 - at[1], (at[2] - at[0]) / 2
            mended = min(mended, at[1] - b * b / (4 * a))
    statistic, pair = exchange_statistic(smoothers, values)
    assert pair == best == (3, 8)
    assert statistic == pytest.approx(np.log(mended / tried[best]), rel=1e-6)


def test_two_exchanged_pairs_are_found_and_undone(line):
    smoothers, clean = line
    far = np.argsort(clean)
    values = swapped(swapped(clean, far[0], far[-1]), far[5], far[-6])
    found, mended = find_exchanges(smoothers, values, 0.02)
    assert {frozenset((pair.first, pair.second)) for pair in found} == {
        frozenset((far[0], far[-1])),
        frozenset((far[5], far[-6])),
    }
    assert np.array_equal(mended, clean)
    assert all(pair.p <= 0.02 and pair.after < pair.before for pair in found)


def test_clean_values_and_one_wrong_value_name_no_pair(line):
    smoothers, clean = line
    assert find_exchanges(smoothers, clean, 0.02)[0] == []
    wrong = clean.copy()
    wrong[4] += 5
    assert find_exchanges(smoothers, wrong, 0.02)[0] == []


def test_the_same_seed_gives_the_same_answer(line):
    smoothers, clean = line
    values = swapped(clean, 0, 1)
    assert find_exchanges(smoothers, values, 0.02, seed=3)[0] == find_exchanges(smoothers, values, 0.02, seed=3)[0]


def test_equal_or_few_values_are_left_alone(line):
    smoothers, clean = line
    assert find_exchanges(smoothers, np.ones(30), 0.02)[0] == []
    assert find_exchanges((), clean, 0.02)[0] == []
