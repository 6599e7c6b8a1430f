"""The chance level: permutations that respect groups, and p."""

import numpy as np
import pytest

from quant.screening.chance import chance_level, permutation
from quant.screening.search import run_task, search
from quant.screening.work import Workers

CHANCE = 'chains = [[], [{ step = "snv" }]]\n[screen.chance]\npermutations = 19\nover = "OVER"\n'


def test_a_permutation_without_groups():
    rng = np.random.default_rng(1)
    assert sorted(permutation(9, None, rng)) == list(range(9))


def test_values_of_equal_groups_stay_together():
    groups = np.array([0, 1, 2, 0, 1, 2, 3, 3])
    for seed in range(20):
        place = permutation(8, groups, np.random.default_rng(seed))
        assert sorted(place) == list(range(8))
        for group in range(4):
            assert np.unique(groups[place][groups == group]).size == 1


def test_each_place_gets_each_value_equally_often():
    found = np.array([permutation(4, np.array([0, 0, 1, 1]), np.random.default_rng(seed))[0] for seed in range(400)])
    assert set(found.tolist()) == {0, 2}
    assert abs(np.count_nonzero(found == 0) - 200) < 3.3 * 10  # standard deviation of the count is 10


@pytest.mark.parametrize("over", ["family", "all"])
def test_a_real_relation_is_beyond_chance(make_problem, over):
    problem = make_problem(CHANCE.replace("OVER", over))
    found = search(problem, Workers())
    chance, interrupted = chance_level(problem, found.winner.candidate, found.candidates, Workers())
    assert not interrupted
    assert chance.p == pytest.approx(1 / 20)
    assert chance.lowest.min() > chance.observed
    assert chance.observed == (
        found.candidates[0].rmsecv
        if over == "all"
        else min(one.rmsecv for one in found.candidates if one.chain == found.winner.candidate.chain)
    )


def test_the_same_seed_gives_the_same_and_another_other_values(make_problem):
    def lowest(seed):
        problem = make_problem(f"seed = {seed}\n" + CHANCE.replace("OVER", "all").replace("19", "3"))
        found = search(problem, Workers())
        return chance_level(problem, found.winner.candidate, found.candidates, Workers())[0].lowest.tolist()

    assert lowest(1) == lowest(1) != lowest(2)


def test_half_a_search_is_none(make_problem, monkeypatch):
    problem = make_problem(CHANCE.replace("OVER", "all"))
    found = search(problem, Workers())
    calls = []

    def task(problem, task):
        calls.append(task)
        if len(calls) == 4:  # the second chain of the second permutation
            raise KeyboardInterrupt
        return run_task(problem, task)

    monkeypatch.setattr("quant.screening.search.run_task", task)
    monkeypatch.setattr("quant.screening.search.CHAINS", 1)  # a task for each chain
    chance, interrupted = chance_level(problem, found.winner.candidate, found.candidates, Workers())
    assert interrupted
    assert chance.lowest.size == 1
