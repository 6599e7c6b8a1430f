"""Ranges to compare: pieces of the axis, and which of them are kept together."""

from collections.abc import Sequence
from itertools import combinations, pairwise
from math import comb
from typing import TypeAlias

import numpy as np

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.preprocessing.ranges import inside_ranges
from quant.recipe.screen_schema import RangesTable

Kept: TypeAlias = tuple[int, ...] | range
"""Numbers of the pieces that are kept, rising; a range for a window; empty: all points of the axis."""

EVERYTHING: Kept = ()


def pieces_of(table: RangesTable | None, axis: FloatArray) -> tuple[slice, ...]:
    """Return the pieces of an axis as points, in the order of points.

    Parameters
    ----------
    table : RangesTable, optional
    axis : array of shape (points,)
        Behind the preprocessing. [axis unit]

    Raises
    ------
    ParameterError
        Intervals that overlap or hold no point, or more pieces than points.
    """
    if table is None:
        return ()
    if table.block is not None:
        starts = range(0, axis.size, table.block)
        return tuple(slice(start, min(start + table.block, axis.size)) for start in starts)
    if table.number is not None:
        if table.number > axis.size:
            raise ParameterError(
                f"number = {table.number} intervals of {axis.size} points; expected no more than them."
            )
        ends = np.linspace(0, axis.size, table.number + 1).round().astype(int).tolist()
        return tuple(slice(start, stop) for start, stop in pairwise(ends))
    return _given(table.intervals or [], axis)


def _given(intervals: Sequence[Sequence[float]], axis: FloatArray) -> tuple[slice, ...]:
    slices = []
    for low, high in intervals:
        points = np.flatnonzero(inside_ranges(axis, [(low, high)]))
        slices.append(slice(int(points[0]), int(points[-1]) + 1))
    slices.sort(key=lambda piece: piece.start)
    for before, after in pairwise(slices):
        if after.start < before.stop:
            raise ParameterError(
                f"Two intervals share the point at {axis[after.start]:g}; expected intervals that do not overlap. "
                "Change their ends."
            )
    return tuple(slices)


def count_of(table: RangesTable | None, n_pieces: int) -> int:
    """Return how many selections there are, everything included; forward_backward: 1, as the others are to be found."""
    if table is None or table.search == "forward_backward":
        return 1
    if table.search == "windows":
        return n_pieces * (n_pieces + 1) // 2  # the widest is everything
    return 1 + sum(comb(n_pieces, size) for size in range(1, min(table.most, n_pieces) + 1))


def selections(table: RangesTable | None, n_pieces: int, most: int, seed: Sequence[int]) -> list[Kept]:
    """Return what to keep: everything first, then all other selections, or `most` in all drawn at random.

    Parameters
    ----------
    table : RangesTable, optional
    n_pieces : int
    most : int
        The most selections.
    seed : sequence of int
        Of the draw.
    """
    total = count_of(table, n_pieces)
    if table is None or total == 1:
        return [EVERYTHING]
    if total <= most:
        return [EVERYTHING, *_all(table, n_pieces)]
    rng = np.random.default_rng(seed)
    drawn: set[Kept] = set()
    while len(drawn) < most - 1:
        drawn.add(_draw(table, n_pieces, rng))
    return [EVERYTHING, *sorted(drawn, key=tuple)]


def _all(table: RangesTable, n: int) -> list[Kept]:
    if table.search == "windows":
        windows = (range(start, stop) for start in range(n) for stop in range(start + 1, n + 1))
        return [window for window in windows if len(window) < n]
    return [kept for size in range(1, min(table.most, n) + 1) for kept in combinations(range(n), size)]


def _draw(table: RangesTable, n: int, rng: np.random.Generator) -> Kept:
    """Draw one selection, all equally likely (but for the window of all points, which is drawn anew)."""
    if table.search == "windows":
        start, stop = sorted(rng.choice(n + 1, 2, replace=False).tolist())
        return range(start, stop) if stop - start < n else _draw(table, n, rng)
    sizes = np.array([comb(n, size) for size in range(1, min(table.most, n) + 1)], dtype=np.float64)
    size = 1 + int(rng.choice(sizes.size, p=sizes / sizes.sum()))
    return tuple(sorted(rng.choice(n, size, replace=False).tolist()))


def ranges_kept(pieces: Sequence[slice], kept: Kept, axis: FloatArray) -> tuple[tuple[float, float], ...]:
    """Return the ends of what is kept, neighbouring pieces joined; empty where everything is. [axis unit]"""
    runs: list[list[int]] = []
    for number in kept:
        piece = pieces[number]
        if runs and runs[-1][1] == piece.start:
            runs[-1][1] = piece.stop
        else:
            runs.append([piece.start, piece.stop])
    return tuple((float(axis[start]), float(axis[stop - 1])) for start, stop in runs)


def points_kept(pieces: Sequence[slice], kept: Kept, n_points: int) -> int:
    """Return how many points are kept."""
    return sum(pieces[number].stop - pieces[number].start for number in kept) or n_points
