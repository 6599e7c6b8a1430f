"""Noise of single spectra, from what bands cannot make."""

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.spectra.segments import segments

TO_SD = 1.4826  # of a normal distribution: standard deviation / median distance from the middle


def noise_of(rows: FloatArray, axis: FloatArray, used: BoolArray | None = None) -> FloatArray:
    """Return the noise of each spectrum from its third differences, shape (n,). [ordinate]

    Third differences of white noise of standard deviation s have s·√20; bands wider than some points hardly show in
    them, and their median leaves the others out.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Spectra.
    axis : array of shape (n_points,)
        [axis unit]
    used : array of bool, shape (n_points,), optional
        Only differences between such points.
    """
    chosen = np.ones(axis.size, dtype=bool) if used is None else used
    parts = []
    for run in segments(axis):
        good = np.convolve(chosen[run], np.ones(4), "valid") == 4 if run.stop - run.start > 3 else np.zeros(0, bool)
        if good.any():
            parts.append(np.abs(np.diff(rows[:, run], n=3, axis=1))[:, good])
    if not parts:
        return np.zeros(len(rows))
    return np.asarray(TO_SD * np.median(np.hstack(parts), axis=1) / np.sqrt(20.0))
