"""Purity by difference, its uncertainty with correlations, and what it says of itself."""

import json

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.purity import purity_by_difference


def test_by_hand():
    found = purity_by_difference([0.3, 0.5], [0.03, 0.04])
    assert found.value == pytest.approx(99.2)
    assert found.standard_uncertainty == pytest.approx(0.05)
    for r, u in ((1.0, 0.07), (-1.0, 0.01), (0.5, np.sqrt(0.0025 + 0.0012))):
        found = purity_by_difference([0.3, 0.5], [0.03, 0.04], [[1, r], [r, 1]])
        assert found.standard_uncertainty == pytest.approx(u)


def test_it_says_that_it_is_an_upper_bound():
    found = purity_by_difference([0.3], [0.03], total=1.0)
    assert found.value == pytest.approx(0.7)
    assert "upper bound" in str(found)
    assert "at most" in str(found)
    assert "upper bound" in json.loads(found.to_json())["statement"]


def test_a_content_below_zero_is_taken_as_it_is():
    assert purity_by_difference([-0.1, 0.3], [0.1, 0.1]).value == pytest.approx(99.8)


def test_the_uncertainty_is_the_scatter_of_repeated_results():
    rng = np.random.default_rng(1)
    u, r = np.array([0.1, 0.2, 0.05]), np.array([[1, 0.6, -0.3], [0.6, 1, 0.1], [-0.3, 0.1, 1]])
    draws = rng.multivariate_normal([0.5, 1.0, 0.2], r * np.outer(u, u), 20_000)
    found = purity_by_difference([0.5, 1.0, 0.2], u, r)
    assert np.std(100 - draws.sum(axis=1)) == pytest.approx(found.standard_uncertainty, rel=0.02)
    assert purity_by_difference([0.5, 1.0, 0.2], u).standard_uncertainty < found.standard_uncertainty / 1.15


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError):
        purity_by_difference([], [])
    with pytest.raises(SampleMismatchError):
        purity_by_difference([0.1], [0.1, 0.2])
    with pytest.raises(ParameterError, match="negative"):
        purity_by_difference([0.1], [-0.1])
    with pytest.raises(ParameterError, match="shape"):
        purity_by_difference([0.1, 0.2], [0.1, 0.1], [[1.0]])
    with pytest.raises(ParameterError, match="symmetric"):
        purity_by_difference([0.1, 0.2], [0.1, 0.1], [[1.0, 0.5], [0.4, 1.0]])
    with pytest.raises(ParameterError, match="contradict"):
        purity_by_difference([0.1] * 3, [0.1] * 3, [[1, 0.9, -0.9], [0.9, 1, 0.9], [-0.9, 0.9, 1]])
