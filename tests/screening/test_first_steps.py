"""First steps of preprocessings: what neighbours share is worked out once, and results are those of the whole chain."""

import numpy as np
import pytest

from quant.errors import QuantityError
from quant.preprocessing.chain import fit_chain
from quant.preprocessing.snv import SNV
from quant.screening.first_steps import FirstSteps

CHAINS = """chains = [
[], [{ step = "snv" }],
[{ step = "snv" }, { step = "savitzky_golay", window = 5, polynomial = 2, derivative = 1 }],
[{ step = "snv" }, { step = "savitzky_golay", window = 7, polynomial = 2, derivative = 1 }],
[{ step = "savitzky_golay", window = 5, polynomial = 2 }, { step = "msc" }, { step = "snv" }]]
"""


def test_results_are_those_of_the_whole_chain(make_problem):
    problem = make_problem(CHAINS)
    first = FirstSteps(problem)
    for chain in (0, 1, 2, 3, 4, 2, 0):  # in any order
        steps = problem.layout(chain).steps[: first.count(chain)]
        expected = fit_chain(steps, problem.samples.spectra.values)[1]
        found = first.behind(chain)
        np.testing.assert_array_equal(found, expected)
        found[:] = np.nan  # whoever asked may write to it


def test_a_chain_ends_before_the_first_step_that_learns(make_problem):
    first = FirstSteps(make_problem(CHAINS))
    assert [first.count(chain) for chain in range(5)] == [0, 1, 2, 2, 1]


def test_what_neighbours_share_is_worked_out_once(make_problem, monkeypatch):
    once, calls = SNV.transform, []
    monkeypatch.setattr(SNV, "transform", lambda step, X: calls.append(1) or once(step, X))
    first = FirstSteps(make_problem(CHAINS))
    first.behind(2)
    first.behind(3)
    assert len(calls) == 1


def test_missing_points_are_refused_unless_left_out_first(make_problem, make_samples):
    samples = make_samples()
    samples.spectra.values.flags.writeable = True
    samples.spectra.values[3, 5] = np.nan  # at 1775 cm-1
    kept = 'chains = [[{ step = "keep_ranges", ranges = [[1750, 1600]] }, { step = "snv" }]]'
    assert np.isfinite(FirstSteps(make_problem(kept, samples)).behind(0)).all()
    with pytest.raises(QuantityError, match="1 of 24 spectra have missing points: S04"):
        FirstSteps(make_problem(CHAINS, samples)).behind(2)
