"""What cannot be told from the winner, and how far apart the predictions are."""

import numpy as np
import pytest

from quant.screening.fitted import FittedCandidate
from quant.screening.near_ties import near_ties
from quant.screening.search import search
from quant.screening.work import Workers

CHAINS = """prefer = "lowest"
chains = [[], [{ step = "keep_ranges", ranges = [[1790, 1600]] }], [{ step = "keep_ranges", ranges = [[1690, 1600]] }]]
"""


@pytest.fixture(scope="module")
def found(make_problem):
    problem = make_problem(CHAINS)
    return problem, search(problem, Workers())


def test_the_equal_is_listed_and_the_blind_is_not(found):
    problem, search = found
    blind = max(search.leaders, key=lambda one: one.candidate.rmsecv)
    assert blind.candidate.chain == 2
    ties = near_ties(problem, search.leaders, search.winner, None)
    assert [tie.rank for tie in ties] == [2]
    assert ties[0].p > 0.05
    difference = search.leaders[1].predicted - search.winner.predicted
    assert ties[0].rms_difference == pytest.approx(np.sqrt(np.mean(difference**2)))


def test_new_spectra_replicates_averaged(found, make_samples):
    problem, search = found
    new = make_samples(6, replicates=2, seed=5)
    (tie,) = near_ties(problem, search.leaders, search.winner, new.spectra)
    one, other = (
        new.mean_by_sample(FittedCandidate(problem, leader.candidate).predict(new.spectra.values))
        for leader in search.leaders[:2]
    )
    assert tie.largest_difference == pytest.approx(np.abs(one - other).max())
    assert 0 < tie.rms_difference <= tie.largest_difference < 0.5
