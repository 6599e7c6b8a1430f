"""The search itself: every candidate scored from Gram matrices, the leaders again by refitting."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation import cross_validate
from quant.errors import ParameterError
from quant.screening.first_steps import FirstSteps
from quant.screening.forward_backward import forward_backward
from quant.screening.pieces import Kept, count_of, selections
from quant.screening.problem import Candidate, Problem
from quant.screening.scores import ChainScores, score_whole
from quant.screening.work import Workers

CHUNK = 512  # selections a task: long enough that forming running sums anew costs little
CHAINS = 16  # preprocessings a task where all points are kept: enough for a batch, and for workers to share them out


@dataclass(frozen=True)
class Task:
    """All points behind some preprocessings; else, behind one, selections to score, or a search with a budget."""

    chains: tuple[int, ...]
    selections: tuple[Kept, ...]
    budget: int


@dataclass(frozen=True, eq=False)
class Leader:
    """A candidate scored by refitting: its left-out squared errors, averaged over repeats, and its predictions."""

    candidate: Candidate  # factors and RMSECV are those of refitting
    squared: FloatArray  # (n_samples,)
    predicted: FloatArray  # (n_samples,), averaged over repeats


@dataclass(frozen=True, eq=False)
class Search:
    """What a search found: all candidates by rising RMSECV, leaders by theirs, and whether it was interrupted."""

    candidates: list[Candidate]
    leaders: list[Leader]
    winner: Leader
    possible: int
    interrupted: bool


def tasks_of(problem: Problem, chains: Sequence[int] | None = None) -> tuple[list[Task], int]:
    """Return the pieces of work of a search within its budget, and how many candidates there are in all.

    Parameters
    ----------
    problem : Problem
    chains : sequence of int, optional
        Only these preprocessings.
    """
    table, wanted = problem.table, range(len(problem.chains)) if chains is None else chains
    ranges = table.ranges
    pieces = {chain: len(problem.layout(chain).pieces) for chain in wanted}
    possible = sum(count_of(ranges, pieces[chain]) for chain in wanted)
    share = max(1, table.budget // max(len(problem.chains), 1))
    if len(wanted) > table.budget:  # even all points are too many candidates
        rng = np.random.default_rng([table.seed, 1])
        wanted = sorted(rng.choice(list(wanted), table.budget, replace=False).tolist())
    if ranges is None:
        return [Task(tuple(wanted[i : i + CHAINS]), (), 0) for i in range(0, len(wanted), CHAINS)], possible
    tasks = []
    for chain in wanted:
        if ranges.search == "forward_backward":
            tasks.append(Task((chain,), (), share))
            continue
        most = possible if possible <= table.budget else share
        kept = selections(ranges, pieces[chain], most, (table.seed, 2, chain))
        tasks += [Task((chain,), tuple(kept[first : first + CHUNK]), 0) for first in range(0, len(kept), CHUNK)]
    return tasks, possible


def run_task(problem: Problem, task: Task) -> list[Candidate]:
    """Score the candidates of one piece of work."""
    ranges, first = problem.table.ranges, FirstSteps(problem)
    if ranges is None:
        return score_whole(problem, task.chains, first)
    scores = ChainScores(problem, task.chains[0], first)
    if task.selections:
        return scores.candidates(task.selections)
    return forward_backward(scores.candidates, len(scores.pieces), ranges.most, task.budget)


def score_all(
    problem: Problem, workers: Workers, chains: Sequence[int] | None = None, label: str = "candidates"
) -> tuple[list[Candidate], int, bool]:
    """Score every candidate: those found by rising RMSECV, how many there could be, whether the user interrupted.

    Raises
    ------
    ParameterError
        No candidate can carry the number of factors asked for.
    """
    tasks, possible = tasks_of(problem, chains)
    found, interrupted = workers.run(partial(run_task, problem), tasks, label)
    candidates = sorted((one for part in found for one in part), key=lambda one: one.order)
    if not candidates and not interrupted:
        raise ParameterError(
            f"No candidate keeps the {problem.recipe.regression.factors} points that so many factors need; expected "
            "wider ranges or fewer factors. Change [screen.ranges] or factors."
        )
    return candidates, possible if possible > len(candidates) else len(candidates), interrupted


def search(problem: Problem, workers: Workers) -> Search | None:
    """Score all candidates, refit the leaders, and name the winner; None if interrupted before anything was found."""
    candidates, possible, interrupted = score_all(problem, workers)
    if not candidates:
        return None
    leading = _leading(candidates, problem.table.leaders)
    refitted, stopped = workers.run(partial(refit, problem), leading, "leaders, by refitting")
    if not refitted:
        return None
    leaders = sorted(refitted, key=lambda one: one.candidate.order)
    winner = winner_of(leaders, problem.table.prefer)
    return Search(candidates, leaders, winner, possible, interrupted or stopped)


def _leading(candidates: Sequence[Candidate], most: int) -> list[Candidate]:
    """The lowest RMSECV, and as many of the simplest within one standard error of the lowest."""
    best = candidates[0]
    limit = best.rmsecv**2 + 2 * best.rmsecv * best.rmsecv_se
    near = sorted((one for one in candidates if one.rmsecv**2 <= limit), key=simplicity)
    return list({(one.chain, tuple(one.kept)): one for one in [*candidates[:most], *near[:most]]}.values())


def simplicity(one: Candidate) -> tuple[int, int, int, float]:
    """Key that puts simpler candidates first: factors, then ranges, then steps, then RMSECV."""
    return one.factors, one.n_ranges, one.n_steps, one.rmsecv


def refit(problem: Problem, candidate: Candidate) -> Leader:
    """Score a candidate by fitting its whole pipeline anew in every fold."""
    recipe = problem.candidate_recipe(candidate)
    crossed = cross_validate(problem.samples, recipe, problem.analyte)
    asked = recipe.regression.factors
    factors = asked if isinstance(asked, int) else crossed.choices[asked]
    place = crossed.factor_counts.index(factors)
    rmsecv, se = float(crossed.rmsecv[place]), float(crossed.rmsecv_se[place])
    scored = replace(candidate, factors=factors, rmsecv=rmsecv, rmsecv_se=se)
    return Leader(scored, crossed.squared_errors()[place], crossed.left_out_predictions(factors))


def winner_of(leaders: Sequence[Leader], prefer: str) -> Leader:
    """Return the lowest RMSECV, or the simplest within one standard error of it."""
    lowest = min(leaders, key=lambda one: one.candidate.order)
    if prefer == "lowest":
        return lowest
    limit = lowest.squared.mean() + lowest.squared.std(ddof=1) / np.sqrt(lowest.squared.size)
    near = [one for one in leaders if one.squared.mean() <= limit]
    return min(near, key=lambda one: (simplicity(one.candidate), one.candidate.order))
