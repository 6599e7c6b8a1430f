"""Axis values of spectra: their check, their contiguous segments, their spacing."""

from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector, name_some
from quant.errors import ParameterError

CUT = 1.5  # a step longer than this many median steps is a cut: points have been left out there
UNEVEN = 0.01  # steps may differ from their median by this fraction of it (axes are often printed rounded)


def axis_values(axis: ArrayLike | None, points: int) -> FloatArray:
    """Return the axis values of spectra, checked.

    Parameters
    ----------
    axis : array of shape (points,) or None
        Strictly rising or falling; None numbers the points 0, 1, 2, ... [axis unit]
    points : int
        How many points the spectra have.

    Returns
    -------
    array of shape (points,)
        [axis unit]

    Raises
    ------
    ParameterError
        Another length, a value that is not finite, or values that neither rise nor fall throughout.
    """
    if axis is None:
        return np.arange(points, dtype=np.float64)
    values = as_vector("axis", axis)
    if values.size != points:
        raise ParameterError(
            f"axis has {values.size} value(s), but the spectra have {points} point(s); one value for each point is "
            "expected. Give the axis of exactly these spectra."
        )
    steps = np.diff(values)
    wrong = np.flatnonzero(steps * (1.0 if steps.sum() > 0 else -1.0) <= 0)
    if wrong.size:
        places = name_some(f"{values[i]:g} then {values[i + 1]:g}" for i in wrong)
        raise ParameterError(
            f"axis must rise or fall from point to point throughout, but it turns or stands still at {places}; sort "
            "the points by their axis values and drop repeated ones."
        )
    return values


def median_step(axis: FloatArray) -> float:
    """Return the median distance of neighbouring points, 0 for a single point. [axis unit]"""
    # By sorting: numpy.median would load numpy.ma, a tenth of the start-up time of everyday prediction.
    steps = np.sort(np.abs(np.diff(axis)))
    return float(steps[[(steps.size - 1) // 2, steps.size // 2]].mean()) if steps.size else 0.0


def segments(axis: ArrayLike) -> list[slice]:
    """Return the contiguous runs of points, in the order of the axis.

    A step longer than 1.5 times the median step is a cut, where points have been left out.

    Parameters
    ----------
    axis : array of shape (points,)
        Strictly rising or falling. [axis unit]

    Returns
    -------
    list of slice
        Together they hold every point once.
    """
    values = as_vector("axis", axis)
    steps = np.abs(np.diff(values))
    cuts = np.flatnonzero(steps > CUT * median_step(values)) + 1
    bounds = [0, *(int(cut) for cut in cuts), values.size]
    return [slice(first, last) for first, last in pairwise(bounds)]


def describe_segment(axis: FloatArray, run: slice) -> str:
    """Name a segment by its ends and its size: "4000 to 2800 (601 points)"."""
    return f"{axis[run.start]:g} to {axis[run.stop - 1]:g} ({run.stop - run.start} points)"


def equal_spacing(axis: ArrayLike) -> float:
    """Return the step between neighbouring points, cuts aside; negative on a falling axis.

    Parameters
    ----------
    axis : array of shape (points,)
        Strictly rising or falling. [axis unit]

    Returns
    -------
    float
        Mean step within the segments. [axis unit]

    Raises
    ------
    ParameterError
        Fewer than two points, or a step inside a segment that differs from the median step by more than 1 % of it.
    """
    values = as_vector("axis", axis)
    if values.size < 2:
        raise ParameterError(f"A spacing needs at least two points; the axis has {values.size}.")
    steps = np.diff(values)
    median = float(np.copysign(median_step(values), steps[0]))
    inside = np.abs(steps) <= CUT * abs(median)
    uneven = np.flatnonzero(inside & (np.abs(steps - median) > UNEVEN * abs(median)))
    if uneven.size:
        places = name_some(f"{abs(steps[i]):.6g} between {values[i]:.6g} and {values[i + 1]:.6g}" for i in uneven)
        raise ParameterError(
            f"The axis is not equally spaced: found steps of {places}; expected {abs(median):.6g} throughout, within "
            f"{UNEVEN:.0%}. Put the spectra on an equally spaced axis first (step resample)."
        )
    return float(steps[inside].mean())
