"""The best score when there is nothing to find."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.result import Result, documented
from quant.screening.problem import Candidate, Problem
from quant.screening.search import score_all
from quant.screening.work import Workers


@dataclass(frozen=True, kw_only=True, eq=False)
class ChanceResult(Result):
    """The lowest RMSECV of the search on reference values dealt out at random, beside the real one."""

    over: str = documented("Which part of the search was repeated: the winner's preprocessing (family), or all")
    observed: float = documented("Lowest RMSECV of that part on the real values", "unit of the analyte")
    lowest: FloatArray = documented("Lowest RMSECV of each permutation", "unit of the analyte")
    p: float = documented("(1 + permutations at least as good)/(1 + permutations)")


def chance_level(
    problem: Problem, winner: Candidate, candidates: Sequence[Candidate], workers: Workers
) -> tuple[ChanceResult | None, bool]:
    """Repeat the search on permuted values; None if interrupted before the first was done.

    Parameters
    ----------
    problem : Problem
    winner : Candidate
        Names the family.
    candidates : sequence of Candidate
        All of the search on the real values.
    workers : Workers

    Returns
    -------
    result, interrupted
    """
    over = problem.table.chance.over
    chains = [winner.chain] if over == "family" else None
    seeds = [(problem.table.seed, 4, number) for number in range(problem.table.chance.permutations)]
    found, interrupted = workers.run(partial(_one, problem, chains), seeds, "chance level, permutations")
    if not found:
        return None, interrupted
    lowest = np.array(found)
    observed = min(one.rmsecv for one in candidates if chains is None or one.chain in chains)
    p = (1 + int(np.count_nonzero(lowest <= observed))) / (1 + lowest.size)
    return ChanceResult(over=over, observed=observed, lowest=lowest, p=p), interrupted


def _one(problem: Problem, chains: list[int] | None, seed: tuple[int, ...]) -> float:
    rng = np.random.default_rng(seed)
    permuted = problem.with_values(problem.values[permutation(len(problem.samples), problem.groups, rng)])
    candidates, _, interrupted = score_all(permuted, Workers(), chains)
    if interrupted:
        raise KeyboardInterrupt  # again, for the search around this one: half a search is none
    return min(one.rmsecv for one in candidates)


def permutation(n: int, groups: IntArray | None, rng: np.random.Generator) -> IntArray:
    """Return whose value each sample gets, shape (n,); values of one group stay neighbours.

    Samples are lined up group by group, and the values of the groups, these in random order, are laid beside them:
    exact where groups are equally large, else a group's values may spread over two neighbouring groups.

    Parameters
    ----------
    n : int
        Number of samples.
    groups : array of shape (n,), optional
        Group of each sample, 0, 1, ...
    rng : Generator
    """
    if groups is None:
        return rng.permutation(n)
    place = np.empty(n, dtype=np.intp)
    shuffled = rng.permutation(int(groups.max()) + 1)
    place[np.argsort(groups, kind="stable")] = np.argsort(shuffled[groups], kind="stable")
    return place
