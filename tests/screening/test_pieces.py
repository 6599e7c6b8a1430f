"""Pieces of the axis and selections of them."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.recipe.screen_schema import RangesTable
from quant.screening.pieces import EVERYTHING, count_of, pieces_of, points_kept, ranges_kept, selections

AXIS = np.arange(10.0)
WINDOWS = RangesTable(search="windows", block=3)
PAIRS = RangesTable(search="intervals", number=5, most=2)


def test_blocks_and_equal_parts_cover_the_axis():
    assert pieces_of(WINDOWS, AXIS) == (slice(0, 3), slice(3, 6), slice(6, 9), slice(9, 10))
    assert pieces_of(PAIRS, AXIS) == tuple(slice(i, i + 2) for i in range(0, 10, 2))
    assert pieces_of(None, AXIS) == ()


def test_given_intervals_on_a_falling_axis():
    table = RangesTable(search="intervals", intervals=[[2.0, 3.0], [9.0, 6.0]])
    assert pieces_of(table, AXIS[::-1]) == (slice(0, 4), slice(6, 8))
    assert ranges_kept(pieces_of(table, AXIS[::-1]), (0, 1), AXIS[::-1]) == ((9.0, 6.0), (3.0, 2.0))


@pytest.mark.parametrize(
    ("table", "message"),
    [
        (RangesTable(search="intervals", intervals=[[0.0, 3.0], [3.0, 5.0]]), "share the point at 3"),
        (RangesTable(search="intervals", number=11), "11 intervals of 10 points"),
        (RangesTable(search="intervals", intervals=[[20.0, 30.0]]), "without a single point"),
    ],
)
def test_intervals_that_do_not_fit(table, message):
    with pytest.raises(ParameterError, match=message):
        pieces_of(table, AXIS)


def test_every_window_once_and_everything_first():
    found = selections(WINDOWS, 4, 100, (1,))
    assert len(found) == count_of(WINDOWS, 4) == 10
    assert found[0] == EVERYTHING
    assert {(kept[0], kept[-1]) for kept in found[1:]} == {(i, j) for i in range(4) for j in range(i, 4)} - {(0, 3)}


def test_every_combination_once():
    found = selections(PAIRS, 5, 100, (1,))
    assert len(found) == len(set(found)) == count_of(PAIRS, 5) == 1 + 5 + 10


@pytest.mark.parametrize("table", [WINDOWS, PAIRS])
def test_a_draw_within_the_budget_is_the_same_each_time(table):
    one, same, other = (selections(table, 30, 40, (seed,)) for seed in (1, 1, 2))
    assert one == same != other
    assert len(one) == len(set(one)) == 40
    assert one[0] == EVERYTHING


def test_draws_are_equally_likely():
    # 9 of 10 windows beside everything, 8 drawn: each is left out in a ninth of the draws.
    counts = np.zeros((4, 5))
    for seed in range(900):
        for kept in selections(WINDOWS, 4, 9, (seed,))[1:]:
            counts[kept[0], kept[-1] + 1] += 1
    seen = counts[counts > 0]
    assert seen.size == 9
    assert np.abs(seen - 800).max() < 3.5 * np.sqrt(900 * 8 / 81)  # standard deviation of a binomial count


def test_neighbours_are_joined():
    pieces = pieces_of(PAIRS, AXIS)
    assert ranges_kept(pieces, (0, 1, 3), AXIS) == ((0.0, 3.0), (6.0, 7.0))
    assert ranges_kept(pieces, EVERYTHING, AXIS) == ()
    assert points_kept(pieces, (0, 1, 3), 10) == 6
    assert points_kept(pieces, EVERYTHING, 10) == 10
