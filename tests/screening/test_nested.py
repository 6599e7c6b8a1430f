"""Nested validation: the same as doing it by hand."""

import numpy as np
import pytest

from quant.screening.fitted import FittedCandidate
from quant.screening.nested import nested
from quant.screening.search import run_task, search
from quant.screening.work import Workers
from quant.statistics.splits import random_folds

NESTED = 'chains = [[], [{ step = "msc" }]]\n[screen.nested]\nfolds = 4\nrepeats = 2\n'


@pytest.mark.parametrize("replicates", [1, 2])
def test_by_hand(make_problem, make_samples, replicates):
    problem = make_problem(NESTED, make_samples(replicates=replicates))
    result, interrupted = nested(problem, Workers())
    assert not interrupted
    by_hand = []
    for repeat in range(2):
        errors = np.empty(24)
        labels = random_folds(24, 4, (1, 3, repeat))
        for fold in range(4):
            inner = problem.part(labels != fold)
            left = problem.samples.subset(labels == fold)
            fitted = FittedCandidate(inner, search(inner, Workers()).winner.candidate)
            errors[labels == fold] = left.mean_by_sample(fitted.predict(left.spectra.values)) - left.values[:, 0]
        by_hand.append(np.sqrt(np.mean(errors**2)))
    assert result.rmsep == pytest.approx(by_hand, rel=1e-12)
    assert result.mean == pytest.approx(np.mean(by_hand))
    assert result.spread == pytest.approx(np.std(by_hand, ddof=1))
    assert sum(result.chosen.values()) == sum(result.factors.values()) == 8
    assert result.q2 == pytest.approx(1 - np.mean(np.square(by_hand)) / np.var(problem.values))


def test_groups_are_held_together(make_problem, make_samples, monkeypatch):
    folds = '[cross_validation]\nscheme = "random_folds"\nfolds = 4\nrepeats = 1\nduplicates_together = true\n'
    twins = [(0, 5), (1, 9), (2, 20)]
    problem = make_problem(NESTED, make_samples(twins=twins), folds=folds)
    parts = []
    own = type(problem).part
    monkeypatch.setattr(type(problem), "part", lambda self, kept: parts.append(kept) or own(self, kept))
    nested(problem, Workers())
    assert len(parts) == 8
    assert all(kept[one] == kept[other] for kept in parts for one, other in twins)


def test_only_whole_repeats_count(make_problem, monkeypatch):
    problem = make_problem(NESTED)
    whole = nested(problem, Workers())[0]
    own, calls = type(problem).part, []

    def part(self, kept):
        calls.append(kept)
        if len(calls) == 7:
            raise KeyboardInterrupt
        return own(self, kept)

    monkeypatch.setattr(type(problem), "part", part)
    result, interrupted = nested(problem, Workers())
    assert interrupted
    assert result.rmsep.tolist() == whole.rmsep[:1].tolist()
    assert np.isnan(result.spread)
    calls[:] = [None] * 5
    assert nested(problem, Workers()) == (None, True)


def test_half_a_search_is_none(make_problem, monkeypatch):
    problem = make_problem(NESTED)
    calls = []

    def task(problem, task):
        calls.append(task)
        if len(calls) == 4:  # the second chain of the second fold
            raise KeyboardInterrupt
        return run_task(problem, task)

    monkeypatch.setattr("quant.screening.search.run_task", task)
    assert nested(problem, Workers()) == (None, True)
    assert len(calls) == 4
