"""Van der Voet's test by enumeration, by chance, and as a rule for the number of factors."""

from itertools import product

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.statistics.factor_rules import RULES, randomisation
from quant.statistics.randomisation import randomisation_test


def test_the_exact_mini_case():
    # van der Voet 1994 (from memory): d = (4, 1, -2, 3); of all 16 sign patterns 3 have a sum of at least 6 (computed).
    found = randomisation_test([5.0, 2.0, 0.0, 4.0], [1.0, 1.0, 2.0, 1.0])
    assert found == (1.5, 3 / 16, True)


def test_enumeration_counts_every_pattern():
    rng = np.random.default_rng(1)
    one, other = rng.chisquare(1, 10), rng.chisquare(1, 10)
    d = one - other
    sums = [np.dot(signs, d) for signs in product((-1, 1), repeat=10)]
    assert randomisation_test(one, other).p == np.mean(np.array(sums) >= d.sum() - 1e-12)


def test_patterns_that_tie_with_the_observed_one_count():
    # d = (0.1, 0.2, 0.3), all positive: only the observed pattern reaches its sum, though summed in another order.
    assert randomisation_test([0.1, 0.2, 0.3], [0.0, 0.0, 0.0]).p == 1 / 8
    assert randomisation_test([0.0, 0.0, 0.3], [0.1, 0.2, 0.0]).p == 5 / 8  # a sum of zero: 4 above, 2 equal, less ...
    assert randomisation_test([1.0, 2.0], [1.0, 2.0]).p == 1.0


def test_random_patterns_come_close_to_all_patterns_and_repeat():
    rng = np.random.default_rng(2)
    one, other = rng.chisquare(1, 17), rng.chisquare(1, 17)
    found = randomisation_test(one, other)
    sums = np.zeros(1)
    for d in one - other:
        sums = np.concatenate([sums + d, sums - d])
    exact = np.mean(sums >= np.sum(one - other))
    assert not found.exact
    assert found.p == pytest.approx(exact, abs=3.3 * np.sqrt(exact * (1 - exact) / 1999))
    assert found == randomisation_test(one, other)
    assert randomisation_test(one + 10, other).p == 1 / 2000  # never zero


def test_the_rule_takes_the_fewest_factors_that_are_not_significantly_worse():
    best = np.array([1.0, 1.0, 2.0, 1.0])
    worse = best + np.array([4.0, 1.0, -2.0, 3.0])  # p = 3/16, not significant at 0.1
    bad = best + 9.0  # p = 1/16
    assert randomisation([bad, bad, worse, best, best]) == 2
    assert randomisation([bad, bad, worse, best, best], alpha=0.2) == 3
    assert randomisation([bad, bad, worse, best, best], alpha=3 / 16) == 3  # p at alpha is significant
    assert randomisation([bad, bad, worse, best, best], alpha=0.05) == 1
    assert RULES["randomisation"] is randomisation


def test_equal_models_are_told_apart_no_more_often_than_stated():
    rng = np.random.default_rng(3)
    p = [randomisation_test(*rng.chisquare(1, (2, 12))).p for _ in range(500)]
    assert 31 <= np.sum(np.array(p) <= 0.1) <= 73  # 99.9 % binomial bounds about 50
    different = [randomisation_test(4 * rng.chisquare(1, 12), rng.chisquare(1, 12)).p for _ in range(200)]
    assert np.mean(np.array(different) <= 0.1) > 0.5


def test_impossible_questions_are_refused():
    with pytest.raises(SampleMismatchError):
        randomisation_test([1.0], [1.0, 2.0])
    with pytest.raises(NotEnoughDataError):
        randomisation_test([], [])
    with pytest.raises(ParameterError, match="squares"):
        randomisation_test([-1.0], [1.0])
    with pytest.raises(ParameterError, match="n_random"):
        randomisation_test([1.0], [1.0], n_random=0)
    with pytest.raises(ParameterError, match="alpha"):
        randomisation(np.ones((2, 4)), alpha=1.0)
