"""Least squares without negative coefficients, for a handful of columns."""

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.regression.bidiagonal import EPS


def non_negative_least_squares(A: FloatArray, b: FloatArray) -> FloatArray:
    """Minimise ||A·c − b|| over c ≥ 0 by the active-set method.

    Parameters
    ----------
    A : array of shape (m, p)
        Of full column rank.
    b : array of shape (m,)

    Returns
    -------
    array of shape (p,)
        The minimum, which is unique.

    References
    ----------
    .. [1] C. L. Lawson, R. J. Hanson, Solving Least Squares Problems (1974), chapter 23 (from memory).
    """
    p = A.shape[1]
    c, free = np.zeros(p), np.zeros(p, dtype=bool)
    tolerance = 10 * max(A.shape) * EPS * np.linalg.norm(A, axis=0) * np.linalg.norm(b)
    for _ in range(3 * p):  # each round lowers the sum of squares; in practice p are enough
        gradient = A.T @ (b - A @ c) - tolerance
        if free.all() or gradient[~free].max() <= 0:
            break
        free[np.argmax(np.where(free, -np.inf, gradient))] = True
        c = _inside(A, b, c, free)
    return c


def _inside(A: FloatArray, b: FloatArray, c: FloatArray, free: BoolArray) -> FloatArray:
    """Step to the least squares of the free columns, setting one after the other to zero where they turn negative."""
    while True:
        goal = np.zeros_like(c)
        goal[free] = np.linalg.lstsq(A[:, free], b, rcond=None)[0]
        blocked = np.flatnonzero(free & (goal <= 0))
        if not blocked.size:
            return goal
        way = c[blocked] - goal[blocked]
        steps = np.divide(c[blocked], way, out=np.zeros_like(way), where=way > 0)
        c = c + steps.min() * (goal - c)
        free[blocked[steps == steps.min()]] = False
        c[~free] = 0.0
