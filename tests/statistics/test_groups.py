"""Samples that share a mark, directly or through others."""

from quant.statistics.groups import connected_groups


def test_numbers_follow_the_first_appearance():
    assert connected_groups([["b"], ["a"], ["b"], ["c"]]).tolist() == [0, 1, 0, 2]


def test_ties_hold_through_others():
    # 0-1 by x, 2-3 by y; the last one ties both pairs together.
    assert connected_groups([["x"], ["x"], ["y"], ["y"], ["z"]]).tolist() == [0, 0, 1, 1, 2]
    assert connected_groups([["x"], ["x"], ["y"], ["y"], ["y", "x"]]).tolist() == [0] * 5


def test_a_long_chain():
    n = 3000
    assert set(connected_groups([[i, i + 1] for i in reversed(range(n))]).tolist()) == {0}


def test_samples_without_a_mark_stand_alone():
    assert connected_groups([[], [], []]).tolist() == [0, 1, 2]
    assert connected_groups([]).tolist() == []
