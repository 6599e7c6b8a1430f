"""Distances in score space: gaps that leverage does not see."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.nearest_neighbour import (
    gap_limit,
    nearest_neighbour_distance,
    neighbour_distances,
    whitened_scores,
)


def test_one_factor_by_hand():
    # Scores -3, -2, 2, 3: S'S = 26. Nearest neighbours are 1 apart; a sample at 0 is 2 away from two of them.
    calibration = np.array([[-3.0], [-2.0], [2.0], [3.0]])
    assert neighbour_distances(calibration) == pytest.approx(np.full(4, 1 / 26))
    assert gap_limit(calibration) == pytest.approx(1 / 26)
    assert neighbour_distances([[0.0], [1.0], [3.0]]) == pytest.approx(np.array([1, 1, 4]) * 3 / 14)  # S'S = 14/3
    assert gap_limit([[0.0], [1.0], [3.0]]) == pytest.approx(12 / 14)
    assert nearest_neighbour_distance([[0.0], [2.5], [5.0]], calibration) == pytest.approx([4 / 26, 0.25 / 26, 4 / 26])


def test_a_gap_in_the_middle_has_the_smallest_leverage_and_is_seen():
    # ASTM E1655 (from memory): the unknown is in a gap where its distance exceeds every calibration sample's own.
    rng, spread = np.random.default_rng(1), np.linspace(-1, 1, 30)
    clusters = np.vstack([np.column_stack([rng.normal(at, 0.1, 30), spread]) for at in (-5, 5)])
    middle = clusters.mean(axis=0, keepdims=True)
    assert np.sum(whitened_scores(middle, clusters) ** 2) == pytest.approx(0, abs=1e-20)
    assert nearest_neighbour_distance(middle, clusters)[0] > gap_limit(clusters)
    assert nearest_neighbour_distance(clusters[:3] + 1e-3, clusters).max() < gap_limit(clusters)


def test_impossible_questions_are_refused():
    with pytest.raises(ParameterError, match="1 factor"):
        whitened_scores([[1.0]], np.eye(3)[:, :2])
    with pytest.raises(NotEnoughDataError, match="more samples than factors"):
        gap_limit(np.eye(2))
    with pytest.raises(NotEnoughDataError, match="fewer factors"):
        gap_limit([[1.0, 2.0], [2.0, 4.0], [3.0, 6.0], [5.0, 10.0]])
