"""Candidates as recipes of their own, and parts of the problem."""

import numpy as np

from quant.calibration.cross_validation import cross_validate
from quant.screening.problem import Candidate, capped, measure


def candidate(problem, chain, kept):
    n_points, n_ranges, n_steps = measure(problem, chain, kept)
    return Candidate(chain=chain, kept=kept, n_points=n_points, n_ranges=n_ranges, n_steps=n_steps, factors=1,
                     rmsecv=1.0, rmsecv_se=0.1)  # fmt: skip


RANGES = '[screen.ranges]\nsearch = "intervals"\nnumber = 20\nmost = 3\n'


def test_a_candidate_is_a_recipe_of_its_own(make_problem):
    problem = make_problem('chains = [[{ step = "snv" }]]\n' + RANGES)
    one = candidate(problem, 0, (3, 4, 7))
    assert (one.n_points, one.n_ranges, one.n_steps) == (6, 3, 1)
    recipe = problem.candidate_recipe(one)
    assert recipe.preprocessing == [{"step": "snv"}, {"step": "keep_ranges", "ranges": [[1770, 1755], [1730, 1725]]}]
    assert recipe.screen is None
    assert cross_validate(problem.samples, recipe).factor_counts == (0, 1, 2, 3, 4, 5)


def test_no_more_factors_than_points(make_problem):
    problem = make_problem(RANGES)
    assert problem.candidate_recipe(candidate(problem, 0, (3,))).regression.max_factors == 2
    assert capped(problem.recipe, 99) is problem.recipe
    assert problem.recipe.regression.max_factors == 5


def test_a_part_has_no_more_factors_than_it_can_carry(make_problem, make_samples):
    problem = make_problem(samples=make_samples(12))
    part = problem.part(np.arange(12) < 5)
    assert len(part.samples) == 5
    assert part.recipe.regression.max_factors == 2  # 4 folds of 5 leave 3 to learn from, one is the mean's
    assert part.values.tolist() == problem.values[:5].tolist()


def test_other_values(make_problem):
    problem = make_problem()
    assert problem.with_values(problem.values[::-1]).values.tolist() == problem.values[::-1].tolist()
    assert problem.values[0] < problem.values[-1]


def test_groups_are_those_of_the_cross_validation(make_problem, make_samples):
    twins = make_samples(twins=[(0, 5), (1, 9)])
    assert make_problem(samples=twins).groups is None
    folds = '[cross_validation]\nscheme = "random_folds"\nduplicates_together = true\n'
    groups = make_problem(samples=twins, folds=folds).groups
    assert groups[0] == groups[5]
    assert groups[1] == groups[9]
    assert groups.max() + 1 == 22
