"""What the search computes from differences equals what the definition gives for the changed design."""

import numpy as np
import pytest

from quant.planning.criterion import GOAL, State, correlations, energy, largest_correlation, squared_distances


@pytest.fixture
def state() -> State:
    rng = np.random.default_rng(3)
    targets = np.repeat(np.linspace(0, 1, 9)[:, None], 3, axis=1)
    return State(rng.random((9, 3)), rng.random((4, 3)), targets)


def test_energy_by_hand():
    # d² = 0.99 and ε = 0.001: 1/0.991⁵
    assert energy(np.array([0.99, np.inf])) == pytest.approx([0.991**-5, 0.0])


def test_correlations_equal_numpy():
    points = np.random.default_rng(1).random((10, 4))
    assert correlations(points) == pytest.approx(np.corrcoef(points, rowvar=False))
    still = np.column_stack([points, np.ones(10)])
    assert correlations(still)[4] == pytest.approx([0, 0, 0, 0, 1])
    expected = np.abs(np.corrcoef(points, rowvar=False) - np.eye(4)).max()
    assert largest_correlation(points) == pytest.approx(expected)


def test_score_by_hand():
    points = np.array([[0.0, 0.0], [1.0, 1.0], [0.5, 0.0]])
    found = State(points, np.empty((0, 2)), np.array([[0.0, 0.0], [0.5, 0.5], [1.0, 1.5]])).score
    pairs = 1 / np.array([2.001, 0.251, 1.251]) ** 5
    r = 0.5 / np.sqrt(0.5 * 2 / 3)
    # Column 2 misses 0.5 at the top; sorted 0, 0, 1 is off by 0, 0.5, 0.5.
    assert found == pytest.approx(np.log(pairs.sum()) / 10 + 10 * (r - GOAL + 0.5) + 2 * (1.0 / 3))


def test_swaps_equal_their_definition(state):
    i, c = 2, 1
    partners = np.array([0, 1, 3, 4, 5, 6, 7, 8])
    total, penalty = state.swap_changes(i, c, partners)
    for place, j in enumerate(partners):
        points = state.points.copy()
        points[[i, j], c] = points[[j, i], c]
        after = State(points, state.fixed)
        assert total[place] == pytest.approx(after.total, rel=1e-9)
        assert penalty[place] == pytest.approx(after.column_penalty(c), abs=1e-12)


def test_moves_equal_their_definition(state):
    i, c = 4, 2
    values = np.linspace(0, 1, 7)
    total, penalty = state.value_changes(i, c, values)
    for place, value in enumerate(values):
        points = state.points.copy()
        points[i, c] = value
        after = State(points, state.fixed, state.targets)
        assert total[place] == pytest.approx(after.total, rel=1e-9)
        assert penalty[place] == pytest.approx(after.column_penalty(c), abs=1e-12)


def test_an_update_leaves_what_a_fresh_state_has(state):
    state.points[3, 1] = 0.123
    state.update([3])
    fresh = State(state.points.copy(), state.fixed, state.targets)
    assert state.score == pytest.approx(fresh.score, rel=1e-12)
    assert np.array_equal(state.squared, fresh.squared)


def test_squared_distances():
    found = squared_distances(np.array([[0.0, 0.0]]), np.array([[3.0, 4.0], [0.0, 1.0]]))
    assert found.tolist() == [[25.0, 1.0]]
