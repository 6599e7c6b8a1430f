"""Candidates that cannot be told from the winner, and whether it matters which one is taken."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.result import Result, documented
from quant.screening.fitted import FittedCandidate
from quant.screening.problem import Problem
from quant.screening.search import Leader
from quant.spectra.sample_set import mean_by_sample
from quant.spectra.spectra_set import SpectraSet
from quant.statistics.randomisation import randomisation_test

ALPHA = 0.05  # p above it: not distinguishable


@dataclass(frozen=True, kw_only=True, eq=False)
class NearTie(Result):
    """A leading candidate whose left-out errors are not significantly larger than the winner's."""

    rank: int = documented("Its place among the leaders, from 1")
    p: float = documented("Randomisation test (van der Voet): its squared errors against the winner's, one-sided")
    rms_difference: float = documented(
        "Root mean square difference of its predictions to the winner's", "unit of the analyte"
    )
    largest_difference: float = documented("Largest of these differences", "unit of the analyte")


def near_ties(
    problem: Problem, leaders: Sequence[Leader], winner: Leader, new: SpectraSet | None
) -> tuple[NearTie, ...]:
    """Return the leaders that cannot be told from the winner.

    Parameters
    ----------
    problem : Problem
    leaders : sequence of Leader
        In the order of ranks, the winner among them.
    winner : Leader
    new : SpectraSet, optional
        Spectra that took no part, on the calibration's axis; without them left-out predictions are compared.
    """
    found = []
    own = _predicted(problem, winner, new)
    for rank, leader in enumerate(leaders, 1):
        if leader is winner:
            continue
        p = randomisation_test(leader.squared, winner.squared).p
        if p > ALPHA:
            difference = _predicted(problem, leader, new) - own
            found.append(
                NearTie(
                    rank=rank,
                    p=p,
                    rms_difference=float(np.sqrt(np.mean(difference**2))),
                    largest_difference=float(np.abs(difference).max()),
                )
            )
    return tuple(found)


def _predicted(problem: Problem, leader: Leader, new: SpectraSet | None) -> FloatArray:
    if new is None:
        return leader.predicted
    names = list(dict.fromkeys(new.sample_ids))
    index = np.array([names.index(name) for name in new.sample_ids])
    return mean_by_sample(FittedCandidate(problem, leader.candidate).predict(new.values), index, len(names))
