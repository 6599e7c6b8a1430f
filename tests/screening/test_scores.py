"""Scores from Gram matrices equal the refitting of every fold, whether steps learn or not."""

import numpy as np
import pytest

from quant.screening.first_steps import FirstSteps
from quant.screening.scores import ChainScores, PieceGrams, choose
from quant.screening.search import refit, run_task, tasks_of
from quant.statistics.factor_rules import RULES

RANGES = {
    "all": "",
    "windows": '[screen.ranges]\nsearch = "windows"\nblock = 8\n',
    "intervals": '[screen.ranges]\nsearch = "intervals"\nintervals = [[1800, 1740], [1735, 1700], [1690, 1650]]\n',
}
CHAINS = """chains = [[], [{ step = "msc" }, { step = "savitzky_golay", window = 5, polynomial = 2, derivative = 1 }],
[{ step = "snv" }]]
"""


@pytest.mark.parametrize("ranges", RANGES)
@pytest.mark.parametrize("replicates", [1, 2])
def test_gram_scores_equal_refitting(make_problem, make_samples, ranges, replicates):
    problem = make_problem(CHAINS + RANGES[ranges], make_samples(replicates=replicates))
    found = [one for task in tasks_of(problem)[0] for one in run_task(problem, task)]
    assert len(found) == 3 * {"all": 1, "windows": 21, "intervals": 8}[ranges]
    for one in found[:: max(1, len(found) // 9)]:
        again = refit(problem, one).candidate
        assert again.factors == one.factors
        assert one.rmsecv == pytest.approx(again.rmsecv, rel=1e-8)
        assert one.rmsecv_se == pytest.approx(again.rmsecv_se, rel=1e-7)


def test_a_learning_step_applied_once_would_score_otherwise(make_problem):
    # Known-bad control of the test above: MSC fitted to all samples is another, too good, method.
    problem = make_problem('chains = [[{ step = "msc" }]]')
    scores = ChainScores(problem, 0, FirstSteps(problem))
    honest = scores.errors([()])[0]
    processed = scores.learning[0].fit_transform(problem.samples.spectra.values)
    scores.learning = []
    scores.grams = PieceGrams(processed, [], None)
    assert np.abs(scores.errors([()])[0] - honest).max() > 1e-6


@pytest.mark.parametrize("rule", ["one_standard_error", "minimum", "f_ratio"])
def test_rules_from_rmsecv_alone_choose_as_those_from_squared_errors(rule):
    rng = np.random.default_rng(20261201)
    for _ in range(200):
        squared = rng.chisquare(1, (8, 20)) * rng.uniform(0.5, 2, (8, 1))
        rmsecv = np.sqrt(squared.mean(axis=1))
        se = squared.std(axis=1, ddof=1) / np.sqrt(20) / (2 * rmsecv)
        assert choose(rmsecv, se, rule, 20) == RULES[rule](squared)


def test_a_number_of_factors_that_a_range_cannot_carry(make_problem):
    head = make_problem().recipe.text.partition("[regression]")[0] + "[regression]\nfactors = 3\n"
    problem = make_problem('[screen.ranges]\nsearch = "windows"\nblock = 2\n', head=head)
    found = [one for task in tasks_of(problem)[0] for one in run_task(problem, task)]
    # Windows of one block are left out: 20 of 2 points and the last one, of 1.
    assert len(found) == 21 * 22 // 2 - 21
    assert min(one.n_points for one in found) == 3
    assert {one.factors for one in found} == {3}
