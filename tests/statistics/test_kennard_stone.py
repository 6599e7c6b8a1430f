"""The Kennard-Stone choice on points one can see through."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.statistics.kennard_stone import kennard_stone


def column(*points):
    return np.array(points, dtype=float)[:, np.newaxis]


def test_the_case_on_a_line():
    # Points 0, 1, 2.5, 6, 8.5, 10: 0 & 10, then 6, 2.5, 8.5, 1 (method from memory: Kennard & Stone 1969; computed).
    assert kennard_stone(column(0, 1, 2.5, 6, 8.5, 10), 6).tolist() == [0, 5, 3, 2, 4, 1]


def test_ties_go_to_the_lowest_position():
    # Points 0, 1, 2, 5, 9, 10: 0 & 10, 5, 2, then 1 and 9 tie (computed).
    assert kennard_stone(column(0, 1, 2, 5, 9, 10), 6).tolist() == [0, 5, 3, 2, 1, 4]
    assert kennard_stone(column(0, 9, 2, 5, 1, 10), 6).tolist() == [0, 5, 3, 2, 1, 4]


def test_ties_are_seen_through_rounding_where_points_are_more_than_samples():
    square = np.array([[0, 0], [0, 1], [1, 0], [1, 1], [0.5, 0.5]]) / 3
    turned, _ = np.linalg.qr(np.random.default_rng(7).normal(size=(40, 2)))
    assert kennard_stone(square @ turned.T + 0.1, 5).tolist() == [0, 3, 1, 2, 4]


def test_a_shorter_choice_is_the_beginning_of_a_longer_one():
    X = np.random.default_rng(8).normal(size=(15, 4))
    assert kennard_stone(X, 6).tolist() == kennard_stone(X, 15).tolist()[:6]


def test_points_that_coincide_are_taken_in_order():
    X = np.random.default_rng(9).normal(size=(2, 30))[[0, 0, 1, 1, 0]]
    assert kennard_stone(X, 5).tolist() == [0, 2, 1, 3, 4]
    assert kennard_stone(np.ones((4, 3)), 4).tolist() == [0, 1, 2, 3]


def test_points_that_coincide_but_for_rounding_are_taken_in_order():
    different = 1000 + np.random.default_rng(10).normal(size=(40, 300))
    order = kennard_stone(np.vstack([different, different * (1 + 2e-16), different]), 120)
    assert sorted(order[:40] % 40) == list(range(40))
    assert order[40:].tolist() == sorted(order[40:])


def test_small_differences_count_beside_a_far_point():
    X = column(0, 1e-6, 3e-6, 1e6)
    assert kennard_stone(X, 4).tolist() == [0, 3, 2, 1]


@pytest.mark.parametrize("n", [1, 4])
def test_a_number_that_cannot_be_chosen_is_refused(n):
    with pytest.raises(ParameterError, match=f"{n} samples were asked of 3"):
        kennard_stone(column(0, 1, 2), n)
