"""Adding and taking out, on scores that are known."""

import numpy as np

from quant.screening.forward_backward import forward_backward
from quant.screening.problem import Candidate


def scorer(worth, calls=None):
    """Score selections by a function of their pieces."""

    def score(selections):
        if calls is not None:
            calls.extend(selections)
        return [
            Candidate(chain=0, kept=kept, n_points=1, n_ranges=1, n_steps=0, factors=1, rmsecv=worth(kept), rmsecv_se=0)
            for kept in selections
        ]

    return score


def lowest(found):
    return min(found, key=lambda one: one.rmsecv).kept


def test_additive_worth_is_found_and_nothing_is_scored_twice():
    gain = np.array([0.1, 0.5, 0.0, 0.4, 0.2, -0.3])
    calls = []
    found = forward_backward(scorer(lambda kept: 2 - gain[list(kept)].sum(), calls), 6, 4, 10_000)
    assert lowest(found) == (0, 1, 3, 4)
    assert len(calls) == len(set(calls)) == len(found)
    assert found[0].kept == ()


def test_the_first_choice_is_taken_out_where_two_others_do_better():
    worth = {(0,): 1.0, (0, 1): 0.9, (0, 2): 0.95, (1, 2): 0.2, (0, 1, 2): 0.5}
    found = forward_backward(scorer(lambda kept: worth.get(kept, 2.0)), 4, 3, 10_000)
    # forward alone: 0, then 1, then 2, never (1, 2)
    assert lowest(found) == (1, 2)


def test_the_budget_ends_it():
    found = forward_backward(scorer(lambda kept: 1 / (1 + len(kept))), 10, 10, 12)
    assert len(found) == 1 + 10 + 9  # a step that was begun is done


def test_random_worths_end():
    for seed in range(30):
        worth = np.random.default_rng(seed).uniform(size=2**8)
        found = forward_backward(scorer(lambda kept, w=worth: w[sum(1 << piece for piece in kept)]), 8, 8, 10_000)
        assert len({one.kept for one in found}) == len(found) <= 2**8
