"""The search for a good design: local exchanges from many random starts, the same for the same seed.

Where any value of one component goes with any of the others, a start is a Latin hypercube [1]_ (each component takes
equally spaced values once each, or its levels equally often), and two standards exchange their values of one component,
as in [2]_; ranges and spacing can never be lost. Where mixtures have to obey inequalities, a start is chosen far apart
from random mixtures, and one value of one standard moves inside what the others allow. Every position is visited in
random order; the best of all its exchanges is taken if the score falls; a start ends when a whole round brings nothing.

References
----------
.. [1] M.D. McKay, R.J. Beckman, W.J. Conover, Technometrics 21 (1979) 239-245 (from memory).
.. [2] M.D. Morris, T.J. Mitchell, J. Stat. Plan. Inference 43 (1995) 381-402 (from memory).
"""

from collections.abc import Callable

import numpy as np

from quant.arrays import FloatArray
from quant.planning.criterion import WEIGHT, State, squared_distances
from quant.planning.region import Region, extreme_points

_BUDGET = 8e5  # microseconds or so, counted in work and not in time, so that results do not depend on the machine
_MOST_PARTNERS = 100
_VALUES = 12  # values tried for one component of one mixture
_CANDIDATES = 20  # random mixtures for each one wanted; a start looks at a quarter of them
_SWEEPS = 30  # over all components until a random mixture has forgotten where it began
_GAIN = 1e-7  # smaller gains of the score are rounding

Start = Callable[[], FloatArray]
Move = Callable[[State, int, int], bool]


def latin_design(
    n: int, counts: tuple[int | None, ...], margin: float, fixed: FloatArray, rng: np.random.Generator
) -> FloatArray:
    """Search among Latin hypercubes.

    Parameters
    ----------
    n : int
        Number of mixtures, at least 2.
    counts : tuple of int or None
        Levels of each of the k components; None: n equally spaced values.
    margin : float
        Share of each range left free at both ends.
    fixed : array of shape (m, k)
        Mixtures to keep away from.
    rng : Generator

    Returns
    -------
    array of shape (n, k)
        Scaled points.
    """
    columns = [equal_shares(n, n if count is None else count) * (1 - 2 * margin) + margin for count in counts]

    def start() -> FloatArray:
        return np.column_stack([rng.permutation(column) for column in columns])

    def move(state: State, i: int, c: int) -> bool:
        partners = np.flatnonzero(state.points[:, c] != state.points[i, c])
        if partners.size > _MOST_PARTNERS:
            partners = rng.choice(partners, _MOST_PARTNERS, replace=False)
        if not partners.size:
            return False
        total, penalty = state.swap_changes(i, c, partners)
        best = _best(state, c, total, penalty)
        if best is None:
            return False
        j = int(partners[best])
        state.points[[i, j], c] = state.points[[j, i], c]
        state.update([i, j])
        return True

    return _search(start, move, fixed, None, 130.0 + 0.04 * min(n, _MOST_PARTNERS) * (n + len(fixed)), rng)


def inner_design(region: Region, n: int, margin: float, fixed: FloatArray, rng: np.random.Generator) -> FloatArray:
    """Search among mixtures that obey a region's inequalities and levels.

    Parameters
    ----------
    region : Region
    n : int
        Number of mixtures.
    margin : float
        Share of each reachable range that need not be spanned at either end.
    fixed : array of shape (m, k)
        Mixtures to keep away from.
    rng : Generator

    Returns
    -------
    array of shape (n, k)
        Scaled points.
    """
    corners = extreme_points(region)
    middle = corners.mean(axis=0)
    corners = np.unique(_rounded(region, middle + (1 - 2 * margin) * (corners - middle)), axis=0)
    width = (1 - 2 * margin) * (region.reach[1] - region.reach[0])
    shares = np.column_stack([equal_shares(n, n if count is None else count) for count in region.levels])
    targets = shares * width + region.reach[0] + margin * (region.reach[1] - region.reach[0])

    pool = random_mixtures(region, n * _CANDIDATES, rng)

    def start() -> FloatArray:
        return _far_apart(pool[rng.random(len(pool)) < 0.25], n, corners, fixed)

    def move(state: State, i: int, c: int) -> bool:
        values = region.values_between(c, *region.segment(state.points[i], c), _VALUES)
        values = values[np.abs(values - state.points[i, c]) > 1e-12]
        if not values.size:
            return False
        total, penalty = state.value_changes(i, c, values)
        best = _best(state, c, total, penalty)
        if best is None:
            return False
        state.points[i, c] = values[best]
        state.update([i])
        return True

    return _search(start, move, fixed, targets, 150.0, rng)


def random_mixtures(region: Region, n: int, rng: np.random.Generator) -> FloatArray:
    """Draw mixtures all over a region, shape (n, k): one component after the other, given the others (Gibbs)."""
    if any(count is not None for count in region.levels):
        return _random_on_levels(region, n, rng)
    if region.is_box:
        return rng.random((n, len(region.names)))
    corners = extreme_points(region)
    points = corners[np.arange(n) % len(corners)]
    for _ in range(_SWEEPS):
        for c in range(points.shape[1]):
            low, high = region.segments(points, c)
            points[:, c] = low + rng.random(n) * np.maximum(high - low, 0.0)
    return points


def _random_on_levels(region: Region, n: int, rng: np.random.Generator) -> FloatArray:
    chains = _rounded(region, extreme_points(region))
    drawn: list[FloatArray] = []
    while sum(map(len, drawn)) < n:
        for point in chains:
            for c in rng.permutation(point.size).tolist():
                values = region.values_between(c, *region.segment(point, c), _VALUES)
                if values.size:
                    point[c] = rng.choice(values)
        drawn.append(chains.copy())
    return np.concatenate(drawn)[:n]


def _search(
    start: Start, move: Move, fixed: FloatArray, targets: FloatArray | None, cost: float, rng: np.random.Generator
) -> FloatArray:
    """Return the best of as many starts as the budget allows; `cost` is the work of one visit to one position."""
    best, lowest, spent = np.empty(0), np.inf, 0.0
    while spent < _BUDGET:
        state = State(start(), fixed, targets)
        n, k = state.points.shape
        improving = True
        while improving and spent < 2 * _BUDGET:
            improving = False
            for place in rng.permutation(n * k).tolist():
                improving |= move(state, place // k, place % k)
            spent += cost * n * k
        if state.score < lowest - _GAIN:
            best, lowest = state.points, state.score
    return best


def _best(state: State, c: int, total: FloatArray, penalty: FloatArray) -> int | None:
    """Return which exchange lowers the score most, None if none does."""
    change = np.log(total / state.total) / 10 + WEIGHT * (penalty - state.column_penalty(c))
    best = int(np.argmin(change))
    return best if change[best] < -_GAIN else None


def equal_shares(n: int, count: int) -> FloatArray:
    """Return n values on `count` levels from 0 to 1, sorted, each as often as can be; what is over goes to the ends.

    >>> equal_shares(5, 3).tolist()
    [0.0, 0.0, 0.5, 1.0, 1.0]
    """
    often = np.full(count, n // count)
    outside_in = np.argsort(-np.abs(np.arange(count) - (count - 1) / 2), kind="stable")
    often[outside_in[: n % count]] += 1
    return np.repeat(np.arange(count) / (count - 1), often)


def _rounded(region: Region, points: FloatArray) -> FloatArray:
    """Move each value of each point to the nearest round number that the others allow."""
    moved = points.copy()
    for point in moved:
        for c in range(point.size):
            values = region.values_between(c, *region.segment(point, c), 10_001)
            if values.size:
                point[c] = values[np.argmin(np.abs(values - point[c]))]
    return moved


def _far_apart(candidates: FloatArray, n: int, corners: FloatArray, fixed: FloatArray) -> FloatArray:
    """Take the corners, as many as fit, and add candidates, each as far as can be from all before and from `fixed`."""
    chosen = list(corners[:n])
    nearest = squared_distances(candidates, np.concatenate([corners, fixed])).min(axis=1)
    while len(chosen) < n:
        chosen.append(candidates[int(np.argmax(nearest))])
        nearest = np.minimum(nearest, squared_distances(candidates, chosen[-1][None, :])[:, 0])
    return np.array(chosen)
