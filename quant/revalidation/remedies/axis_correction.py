"""Correction of the spectral axis: shift and stretch found from the mean spectra before and after."""

from dataclasses import replace

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.errors import NotEnoughDataError
from quant.model.calibration import Calibration
from quant.preprocessing.spectral_map import SpectralMap, banded_map
from quant.revalidation.change_pairs import used_points
from quant.revalidation.standards import Standards
from quant.spectra.resampling import interpolation_weights

ROUNDS = 4  # of linearising; shifts far below a band's width settle in two
FEWEST_POINTS = 12  # for seven unknowns


def correct_axis(standards: Standards, rows: IntArray) -> Calibration:
    """Return the model with a first step that moves spectra back onto the axis of before.

    Parameters
    ----------
    standards : Standards
        With spectra from before.
    rows : array of int
        The standards that the remedy may see.
    """
    model = standards.model
    before, after = (spectra[rows].mean(axis=0) for spectra in (standards.before_raw, standards.after_raw))
    shift, stretch = axis_error(before, after, model.axis.values, used_points(model))
    return replace(model, steps=(axis_map(model.axis.values, shift, stretch), *model.steps))


def axis_error(before: FloatArray, after: FloatArray, axis: FloatArray, used: BoolArray) -> tuple[float, float]:
    """Return by how much a band at ν appears displaced: shift + stretch·(ν - middle).

    Least squares on the difference of the spectra, linearised and repeated; gain, straight and curved baseline and line
    width are fitted beside them, so that they are not taken for a shift.

    Parameters
    ----------
    before, after : array of shape (n_points,)
        Spectra of the same samples. [ordinate]
    axis : array of shape (n_points,)
        [axis unit]
    used : array of bool, shape (n_points,)
        Points to look at.

    Returns
    -------
    shift, stretch : float
        [axis unit], [1]

    Raises
    ------
    NotEnoughDataError
        Too few points.
    """
    if np.count_nonzero(used) < FEWEST_POINTS:
        raise NotEnoughDataError(f"{np.count_nonzero(used)} points; a shift of the axis needs {FEWEST_POINTS} or more.")
    slope = np.gradient(before, axis)
    middle, half = _middle(axis), float(np.ptp(axis)) / 2
    u = (axis - middle) / half
    terms = np.column_stack([-slope, -u * slope, before, np.ones_like(u), u, u**2, np.gradient(slope, axis)])[used]
    size = np.sqrt(np.sum(terms**2, axis=0))
    size[size == 0] = 1.0
    shift = stretch = 0.0
    for _ in range(ROUNDS):
        moved = axis_map(axis, shift, stretch).transform(after[None, :])[0]
        found = np.linalg.lstsq(terms / size, (moved - before)[used], rcond=None)[0] / size
        shift, stretch = shift + float(found[0]), stretch + float(found[1]) / half
    return shift, stretch


def axis_map(axis: FloatArray, shift: float, stretch: float) -> SpectralMap:
    """Return the map that reads a displaced spectrum where its bands now are; beyond the ends, the end points.

    Parameters
    ----------
    axis : array of shape (n_points,)
        [axis unit]
    shift, stretch : float
        As `axis_error` finds them.
    """
    wanted = np.clip(axis + shift + stretch * (axis - _middle(axis)), axis.min(), axis.max())
    return banded_map(*interpolation_weights(axis, wanted), np.zeros(axis.size))


def _middle(axis: FloatArray) -> float:
    return float(axis.min() + axis.max()) / 2
