"""The winner among leaders, and leaders among candidates."""

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.screening.problem import Candidate
from quant.screening.search import Leader, score_all, search, tasks_of, winner_of
from quant.screening.work import Workers

WINDOWS = '[screen.ranges]\nsearch = "windows"\nblock = 2\n'


def leader(factors, mean, n_ranges=1, n_steps=0):
    squared = mean + np.linspace(-0.5, 0.5, 21)  # standard error of the mean square 0.068
    one = Candidate(chain=0, kept=(), n_points=9, n_ranges=n_ranges, n_steps=n_steps, factors=factors,
                    rmsecv=float(np.sqrt(mean)), rmsecv_se=0.0)  # fmt: skip
    return Leader(one, squared, squared)


def test_simpler_wins_within_one_standard_error():
    leaders = [leader(5, 1.0), leader(3, 1.06), leader(2, 1.08)]
    assert winner_of(leaders, "lowest") is leaders[0]
    assert winner_of(leaders, "simpler") is leaders[1]  # 1.08 is beyond


def test_then_fewer_ranges_then_fewer_steps():
    leaders = [leader(3, 1.0, 3, 0), leader(3, 1.01, 2, 2), leader(3, 1.02, 2, 1)]
    assert winner_of(leaders, "simpler") is leaders[2]


def test_leaders_are_the_lowest_and_the_simplest_near_them(make_problem):
    problem = make_problem("leaders = 3\n" + WINDOWS)
    found = search(problem, Workers())
    keys = {tuple(one.candidate.kept) for one in found.leaders}
    assert {tuple(one.kept) for one in found.candidates[:3]} <= keys
    assert 3 <= len(keys) <= 6
    best = found.candidates[0]
    near = [one for one in found.candidates if one.rmsecv**2 <= best.rmsecv**2 + 2 * best.rmsecv * best.rmsecv_se]
    assert found.winner.candidate.factors == min(one.factors for one in near)
    assert found.candidates == sorted(found.candidates, key=lambda one: one.order)


def test_the_budget_is_kept(make_problem):
    problem = make_problem("budget = 50\n" + WINDOWS)
    candidates, possible, _ = score_all(problem, Workers())
    assert (len(candidates), possible) == (50, 21 * 22 // 2)
    few = make_problem('budget = 2\nchains = [[], [{ step = "snv" }], [{ step = "msc" }]]')
    assert (len(score_all(few, Workers())[0]), tasks_of(few)[1]) == (2, 3)


def test_no_candidate_carries_the_factors(make_problem):
    head = make_problem().recipe.text.partition("[regression]")[0] + "[regression]\nfactors = 7\n"
    own = '[[preprocessing]]\nstep = "keep_ranges"\nranges = [[1800, 1790]]\n'
    with pytest.raises(ParameterError, match="factors asked for"):
        search(make_problem(own, head=head), Workers())


def test_the_forward_backward_search_is_run(make_problem):
    problem = make_problem('[screen.ranges]\nsearch = "forward_backward"\nnumber = 10\nmost = 2\n')
    found = search(problem, Workers())
    assert {len(one.kept) for one in found.candidates} == {0, 1, 2}
    # acid's band, 1730 ± 15, lies in the intervals of points 12 to 16
    low, high = sorted(problem.ranges(found.winner.candidate)[0])
    assert low <= 1730 <= high + 20
