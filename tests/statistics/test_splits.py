"""Folds and splits by hand, and what is refused."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.splits import (
    contiguous_blocks,
    interleaved,
    kennard_stone_split,
    leave_one_group_out,
    leave_one_out,
    random_folds,
    random_split,
)

BATCHES = ["b", "a", "b", "c", "a", "d"]  # numbered 0, 1, 0, 2, 1, 3 in order of first appearance


def test_folds_of_samples_by_hand():
    assert leave_one_out(4).tolist() == [0, 1, 2, 3]
    assert contiguous_blocks(7, 3).tolist() == [0, 0, 0, 1, 1, 2, 2]
    assert interleaved(7, 3).tolist() == [0, 1, 2, 0, 1, 2, 0]


def test_folds_of_groups_by_hand():
    assert leave_one_out(6, BATCHES).tolist() == [0, 1, 0, 2, 1, 3]
    assert leave_one_group_out(BATCHES).tolist() == [0, 1, 0, 2, 1, 3]
    assert leave_one_group_out(np.array(BATCHES)).tolist() == [0, 1, 0, 2, 1, 3]
    assert contiguous_blocks(6, 2, BATCHES).tolist() == [0, 0, 0, 1, 0, 1]
    assert interleaved(6, 2, BATCHES).tolist() == [0, 1, 0, 0, 1, 1]


def test_random_folds_have_sizes_that_differ_by_one_at_most_and_depend_on_the_seed():
    folds = random_folds(23, 5, 1)
    assert sorted(np.bincount(folds)) == [4, 4, 5, 5, 5]
    assert not np.array_equal(folds, random_folds(23, 5, 2))
    assert not np.array_equal(random_folds(23, 5, (1, 0)), random_folds(23, 5, (1, 1)))


def test_every_fold_layout_of_published_cross_validations():
    # Tecator, 172 samples: "18,18,17,17,... consecutive samples", "(i-1) mod 10" counted from 1.
    assert np.bincount(contiguous_blocks(172, 10)).tolist() == [18, 18] + [17] * 8
    assert interleaved(172, 10)[[0, 9, 10, 171]].tolist() == [0, 9, 0, 1]


@pytest.mark.parametrize(("n", "fraction", "n_out"), [(10, 0.25, 3), (10, 0.01, 1), (10, 0.99, 9), (9, 1 / 3, 3)])
def test_a_random_split_leaves_out_the_rounded_fraction(n, fraction, n_out):
    kept, left_out = random_split(n, fraction, 3)
    assert (kept.size, left_out.size) == (n - n_out, n_out)
    assert sorted([*kept, *left_out]) == list(range(n))
    assert kept.tolist() == sorted(kept)


def test_a_random_split_draws_every_sample_alike():
    drawn = np.bincount(np.concatenate([random_split(8, 0.25, (5, i))[1] for i in range(2000)]), minlength=8)
    assert np.all(np.abs(drawn - 500) < 5 * np.sqrt(500 * 0.75))  # five binomial standard deviations


def test_kennard_stone_keeps_the_extremes():
    # Points 0, 1, 2.5, 6, 8.5, 10: chosen in the order 0, 10, 6, 2.5, 8.5, 1 (computed).
    X = np.array([0, 1, 2.5, 6, 8.5, 10])[:, np.newaxis]
    kept, left_out = kennard_stone_split(X, 1 / 3)
    assert kept.tolist() == [0, 2, 3, 5]
    assert left_out.tolist() == [1, 4]


def test_kennard_stone_takes_groups_by_their_means():
    X = np.array([0, 20, 1, 4, 4, 4, 4, 4, 4.0])[:, np.newaxis]  # means of a, b, c: 10, 1, 4; c has the largest sum
    kept, left_out = kennard_stone_split(X, 0.4, ["a", "a", "b", "c", "c", "c", "c", "c", "c"])
    assert (kept.tolist(), left_out.tolist()) == ([0, 1, 2], [3, 4, 5, 6, 7, 8])


def test_kennard_stone_keeps_two_at_least():
    kept, left_out = kennard_stone_split(np.arange(5.0)[:, np.newaxis], 0.95)
    assert (kept.tolist(), left_out.tolist()) == ([0, 4], [1, 2, 3])


def test_more_folds_than_there_are_samples_or_groups_are_refused():
    for maker in (contiguous_blocks, interleaved):
        with pytest.raises(ParameterError, match="5 folds of 4 samples or groups"):
            maker(6, 5, BATCHES)
        with pytest.raises(ParameterError, match="1 folds of 6"):
            maker(6, 1)
    with pytest.raises(ParameterError, match="7 folds of 6"):
        random_folds(6, 7, 0)


def test_one_group_or_one_sample_cannot_be_divided():
    for divide in (leave_one_group_out, lambda groups: leave_one_out(3, groups), lambda g: random_split(3, 0.5, 0, g)):
        with pytest.raises(NotEnoughDataError, match=r"3 sample\(s\) in one group cannot be divided"):
            divide(["x", "x", "x"])
    for n in (0, 1):
        with pytest.raises(NotEnoughDataError, match="at least two samples"):
            leave_one_out(n)
    with pytest.raises(NotEnoughDataError, match="needs three"):
        kennard_stone_split(np.ones((2, 3)), 0.5)


@pytest.mark.parametrize("fraction", [0.0, 1.0, -0.5, float("nan"), 25])
def test_fractions_outside_their_bounds_are_refused(fraction):
    with pytest.raises(ParameterError, match="fraction_out"):
        random_split(10, fraction, 0)
    with pytest.raises(ParameterError, match="fraction_out"):
        kennard_stone_split(np.arange(20.0).reshape(10, 2), fraction)


def test_samples_without_a_group_are_named():
    for nothing in (None, "", float("nan")):
        with pytest.raises(ParameterError, match=r"2 sample\(s\) have no group, at position\(s\) 1, 3"):
            leave_one_group_out(["a", nothing, "b", nothing])


def test_groups_of_another_number_than_samples_are_refused():
    with pytest.raises(SampleMismatchError, match="6 group names for 5 samples"):
        interleaved(5, 2, BATCHES)
