"""Local polynomial interpolation of spectra onto other axis values."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray, IntArray
from quant.checks import as_matrix, as_vector, name_some
from quant.errors import ParameterError
from quant.spectra.segments import axis_values, describe_segment, median_step, segments

SLACK = 1e-9  # of the median step: a position this far beyond an end is that end (rounding of grids)


def interpolate(values: ArrayLike, axis: ArrayLike, onto: ArrayLike, points: int = 4) -> FloatArray:
    """Interpolate spectra by the polynomial through the nearest points on either side.

    With four points (two left, two right; at the ends of a segment its outermost four) it is exact for cubics, and
    always exact at the points themselves. Nothing is interpolated across a cut, nothing extrapolated.

    Parameters
    ----------
    values : array of shape (spectra, points)
        Spectra. [any unit]
    axis : array of shape (points,)
        Strictly rising or falling, equally spaced or not. [axis unit]
    onto : array of shape (positions,)
        Where values are wanted, in any order. [axis unit]
    points : int
        How many points each polynomial goes through: 4 cubic, 2 linear.

    Returns
    -------
    array of shape (spectra, positions)
        [unit of `values`]

    Raises
    ------
    ParameterError
        A position outside the axis or inside a gap, or an axis that does not fit the values.

    References
    ----------
    .. [1] Lagrange's interpolation formula, any textbook of numerical analysis; from memory.
    """
    spectra = as_matrix("values", values)
    return apply_weights(spectra, *interpolation_weights(axis_values(axis, spectra.shape[1]), onto, points))


def interpolation_weights(axis: FloatArray, onto: ArrayLike, points: int = 4) -> tuple[IntArray, FloatArray]:
    """Return which points each position draws on, and with what weight.

    Parameters
    ----------
    axis : array of shape (points,)
        Strictly rising or falling. [axis unit]
    onto : array of shape (positions,)
        Where values are wanted. [axis unit]
    points : int
        How many points each polynomial goes through; a shorter segment uses all it has.

    Returns
    -------
    sources, weights : arrays of shape (positions, points)
        The value at position i is the sum of ``weights[i] * values[sources[i]]``.

    Raises
    ------
    ParameterError
        A position outside the axis or inside a gap.
    """
    targets = as_vector("onto", onto)
    runs = segments(axis)
    home = _segment_of_each(axis, targets, runs)
    sources = np.zeros((targets.size, points), dtype=np.intp)
    weights = np.zeros((targets.size, points))
    for number, run in enumerate(runs):
        here = np.flatnonzero(home == number)
        used = min(points, run.stop - run.start)
        sources[np.ix_(here, np.arange(used))] = nearest = _nearest(axis, targets[here], run, used)
        weights[np.ix_(here, np.arange(used))] = _lagrange(axis[nearest], targets[here])
    return sources, weights


def apply_weights(spectra: FloatArray, sources: IntArray, weights: FloatArray) -> FloatArray:
    """Return weighted sums of points, shape (spectra, positions), of spectra of shape (spectra, points)."""
    result = np.zeros((spectra.shape[0], sources.shape[0]))
    for source, weight in zip(sources.T, weights.T, strict=True):
        result += spectra[:, source] * weight
    return result


def _segment_of_each(axis: FloatArray, targets: FloatArray, runs: list[slice]) -> IntArray:
    """Number of the segment that each position lies in, shape (positions,)."""
    slack = SLACK * (median_step(axis) or 1.0)
    home = np.full(targets.size, -1, dtype=np.intp)
    for number, run in enumerate(runs):
        low, high = sorted((axis[run.start], axis[run.stop - 1]))
        home[(targets >= low - slack) & (targets <= high + slack)] = number
    homeless = targets[home < 0]
    if homeless.size:
        outside = (homeless < axis.min()) | (homeless > axis.max())
        where = "outside the axis" if outside.all() else "in a gap of the axis" if not outside.any() else "off the axis"
        raise ParameterError(
            f"{homeless.size} position(s) lie {where}: {name_some(f'{t:g}' for t in homeless)}; the axis holds "
            f"{name_some(describe_segment(axis, run) for run in runs)}. Nothing is extrapolated or interpolated "
            "across a cut: choose positions inside, or measure the missing range."
        )
    return home


def _nearest(axis: FloatArray, targets: FloatArray, run: slice, used: int) -> IntArray:
    """Points each polynomial goes through, shape (positions, used): half on either side, all in the segment."""
    values = axis[run]
    sign = 1.0 if values[-1] >= values[0] else -1.0
    left = np.searchsorted(sign * values, sign * targets, side="right") - 1
    first = np.clip(left - (used // 2 - 1), 0, values.size - used)
    nearest: IntArray = run.start + first[:, np.newaxis] + np.arange(used)
    return nearest


def _lagrange(nodes: FloatArray, targets: FloatArray) -> FloatArray:
    """Lagrange weights, shape (positions, used), of nodes of that shape."""
    weights = np.ones_like(nodes)
    for i in range(nodes.shape[1]):
        for j in range(nodes.shape[1]):
            if i != j:
                weights[:, i] *= (targets - nodes[:, j]) / (nodes[:, i] - nodes[:, j])
    return weights
