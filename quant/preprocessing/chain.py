"""Several steps, one after the other."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.estimator.base import Step, unfitted_copy
from quant.estimator.input import check_spectra
from quant.spectra.segments import axis_values


def place_on_axis(steps: Sequence[Step], axis: ArrayLike) -> list[Step]:
    """Return unfitted copies of the steps, each knowing the axis values of its own input.

    Parameters
    ----------
    steps : sequence of Step
        In the order they are applied.
    axis : array of shape (points,)
        Axis values of the spectra that enter the first step. [axis unit]
    """
    placed = [unfitted_copy(step) for step in steps]
    for step, before in zip(placed, chain_axes(steps, axis), strict=False):
        if "axis" in step.parameter_names():
            step.set_params(axis=before)
    return placed


def chain_axes(steps: Sequence[Step], axis: ArrayLike) -> list[FloatArray]:
    """Return the axis values before each step and after the last.

    Parameters
    ----------
    steps : sequence of Step
        In the order they are applied.
    axis : array of shape (points,)
        Axis values of the spectra that enter the first step. [axis unit]

    Returns
    -------
    list of arrays, one more than steps
        [axis unit]

    Raises
    ------
    ParameterError
        A step's ranges or positions do not fit the axis it meets.
    """
    axes = [axis_values(axis, np.size(axis))]
    for step in steps:
        axes.append(step.axis_after(axes[-1]))
    return axes


def fit_chain(
    steps: Sequence[Step], X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None
) -> tuple[list[Step], FloatArray]:
    """Fit copies of the steps in turn, each on what the one before delivers.

    Parameters
    ----------
    steps : sequence of Step
        Left as they are.
    X : array of shape (spectra, points)
        Training spectra. [any unit]
    y : array of shape (spectra,), optional
        Reference values. [unit of the analyte]
    sample_weight : array of shape (spectra,), optional
        Given to the steps that learn from other spectra; 1/m for each of m replicates. [1]

    Returns
    -------
    fitted : list of Step
    spectra : array of shape (spectra, points after the last step)
    """
    matrix, fitted = check_spectra(X, allow_nan=True), []  # each step refuses what it cannot take
    for step in steps:
        copy = unfitted_copy(step)
        matrix = copy.fit_transform(matrix, y, **({"sample_weight": sample_weight} if step.learns else {}))
        fitted.append(copy)
    return fitted, matrix


def apply_chain(steps: Sequence[Step], X: ArrayLike) -> FloatArray:
    """Apply fitted steps in turn to spectra of shape (spectra, points)."""
    matrix = check_spectra(X, allow_nan=True)
    for step in steps:
        matrix = step.transform(matrix)
    return matrix


def chain_learns(steps: Sequence[Step]) -> bool:
    """Tell whether any step learns from other spectra, so that cross-validation has to fit it again in every fold."""
    return any(step.learns for step in steps)
