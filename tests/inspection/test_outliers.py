"""Left-out distances, and replicates that lie apart."""

import numpy as np
import pytest

from quant.inspection.outliers import disagreeing, distances


def test_distances_are_those_of_leaving_out_by_hand():
    rng = np.random.default_rng(20260105)
    rows = rng.normal(size=(14, 2)) @ rng.normal(size=(2, 30)) + 0.01 * rng.normal(size=(14, 30))
    others = rows[:2] + 0.5
    within, beyond = distances(rows, others)
    for i in range(16):
        training = np.delete(rows, i, axis=0) if i < 14 else rows
        centre = training.mean(axis=0)
        _, s, axes = np.linalg.svd(training - centre, full_matrices=False)
        x = (rows[i] if i < 14 else others[i - 14]) - centre
        along = axes[:2] @ x  # two components: a sixth of 14 samples
        assert within[i] == pytest.approx(np.sum((along / s[:2]) ** 2) * (len(training) - 1), rel=1e-6)
        assert beyond[i] == pytest.approx(np.sum((x - along @ axes[:2]) ** 2), rel=1e-6)
    assert beyond[14:].min() > 50 * np.median(beyond[:14])


def test_replicates_that_lie_apart_are_told_even_two_of_them():
    rng = np.random.default_rng(20260105)
    index = np.repeat(np.arange(30), 2)
    scores = rng.normal(size=(60, 3)) * [1.0, 5.0, 0.1]
    scores -= np.repeat((scores[::2] + scores[1::2]) / 2, 2, axis=0)
    assert disagreeing(scores, index, np.arange(30), 0.01) == {}
    scores[8] += [0, 0, 1.5]  # small beside the others, large along the third
    scores[9] -= [0, 0, 1.5]
    scores[20] += [15, 0, 0]
    scores[21] -= [15, 0, 0]
    assert set(disagreeing(scores, index, np.arange(30), 0.01)) == {4, 10}
