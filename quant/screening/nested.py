"""The whole search repeated without the samples that it is then judged by."""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.result import Result, documented
from quant.screening.fitted import FittedCandidate
from quant.screening.problem import Problem
from quant.screening.search import search
from quant.screening.work import Workers
from quant.statistics.splits import random_folds


@dataclass(frozen=True, kw_only=True, eq=False)
class NestedResult(Result):
    """How candidates chosen by the search do on samples that took no part in choosing."""

    folds: int = documented("Outer folds")
    rmsep: FloatArray = documented("RMSEP of each repeat, over all outer folds", "unit of the analyte")
    mean: float = documented("Their mean", "unit of the analyte")
    spread: float = documented("Their standard deviation; not available for one repeat", "unit of the analyte")
    q2: float = documented("1 - PRESS/SST of the outer folds, mean over repeats")
    q2_se: float = documented("Its standard error over samples")
    chosen: dict[str, int] = documented("How often each preprocessing won in an outer fold")
    factors: dict[int, int] = documented("How often each number of factors did")


@dataclass(frozen=True, eq=False)
class _Outer:
    repeat: int
    out: IntArray
    predicted: FloatArray
    chain: str
    factors: int


def nested(problem: Problem, workers: Workers) -> tuple[NestedResult | None, bool]:
    """Repeat the search in outer folds; None if it was interrupted before one repeat was whole.

    Groups that the cross-validation holds together are held together here, too.

    Returns
    -------
    result, interrupted
    """
    table, groups = problem.table.nested, problem.groups
    n = len(problem.samples)
    units = n if groups is None else int(groups.max()) + 1
    k = min(table.folds, units)
    tasks = []
    for repeat in range(table.repeats):
        labels = random_folds(n, k, (problem.table.seed, 3, repeat), groups)
        tasks += [(repeat, labels == fold) for fold in range(k)]
    done, interrupted = workers.run(partial(_outer_fold, problem), tasks, "nested validation, outer folds")
    whole = [done[k * repeat : k * (repeat + 1)] for repeat in range(len(done) // k)]
    return (_result(problem, whole, k) if whole else None), interrupted


def _outer_fold(problem: Problem, task: tuple[int, BoolArray]) -> _Outer:
    repeat, out = task
    inner = problem.part(~out)
    found = search(inner, Workers())
    if found is None or found.interrupted:
        raise KeyboardInterrupt  # again, for the search around this one: half a search is none
    winner = found.winner.candidate
    left = problem.samples.subset(out)
    predicted = left.mean_by_sample(FittedCandidate(inner, winner).predict(left.spectra.values))
    return _Outer(repeat, np.flatnonzero(out), predicted, str(problem.chains[winner.chain]), winner.factors)


def _result(problem: Problem, repeats: Sequence[Sequence[_Outer]], folds: int) -> NestedResult:
    values = problem.values
    squared = np.empty((len(repeats), values.size))
    for number, parts in enumerate(repeats):
        for part in parts:
            squared[number, part.out] = (part.predicted - values[part.out]) ** 2
    rmsep = np.sqrt(squared.mean(axis=1))
    total = float(np.mean((values - values.mean()) ** 2))
    each = squared.mean(axis=0) / total
    every = [part for parts in repeats for part in parts]
    return NestedResult(
        folds=folds,
        rmsep=rmsep,
        mean=float(rmsep.mean()),
        spread=float(rmsep.std(ddof=1)) if rmsep.size > 1 else float("nan"),
        q2=float(1 - each.mean()),
        q2_se=float(each.std(ddof=1) / np.sqrt(values.size)),
        chosen=dict(Counter(part.chain for part in every).most_common()),
        factors=dict(sorted(Counter(part.factors for part in every).items())),
    )
