"""Left-out errors of a linear smoother: exact for every change of the reference values, without fitting again.

Ridge regression on the processed spectra predicts by ŷ = H·y with a matrix H that does not depend on y. The left-out
errors are then e = M·y, M = (I − H) with each row divided by 1 − h_ii (blocks where samples leave together), and what
exchanging two values does to the sum of squares PRESS = |M·y|² is a matter of a few products. As many strengths of the
ridge are kept as PLS would have numbers of factors.

References
----------
.. [1] G.H. Golub, M. Heath, G. Wahba, Technometrics 21 (1979) 215-223: leaving one out of a ridge (from memory).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from quant.arrays import FloatArray, IntArray

FREEDOM = (2, 3, 4, 5, 6, 8, 10, 13, 16, 20)  # effective numbers of parameters, the mean included
_KEPT = 1e-10  # singular values below this share of the largest are rounding


@dataclass(frozen=True, eq=False)
class Smoother:
    """One strength of the ridge.

    Attributes
    ----------
    hat : array of shape (n, n)
        H: fitted values are H·y.
    errors : array of shape (n, n)
        M: left-out errors are −M·y (predicted − reference), M·y their negative.
    gram : array of shape (n, n)
        M'·M.
    freedom : float
        Trace of H.
    """

    hat: FloatArray
    errors: FloatArray
    gram: FloatArray
    freedom: float


def make_smoothers(spectra: FloatArray, groups: Sequence[int] | IntArray) -> tuple[Smoother, ...]:
    """Return smoothers of several strengths.

    Parameters
    ----------
    spectra : array of shape (n, k)
        One row a sample.
    groups : sequence of int, length n
        Samples of one group are left out together.
    """
    n = len(spectra)
    centred = spectra - spectra.mean(axis=0)
    u, s, _ = np.linalg.svd(centred, full_matrices=False)
    keep = s > _KEPT * max(float(s[0]), 1e-300)
    if not keep.any():
        return ()
    u, squares = u[:, keep], s[keep] ** 2
    most = min(1 + squares.size, (n + 1) // 2)
    wanted = [f for f in FREEDOM if f <= most and f - 1 < squares.size]
    shrinks = [squares / (squares + _strength(squares, f - 1)) for f in wanted]
    if not wanted or 1 + squares.size <= min(most, 3):
        shrinks.append(np.ones(squares.size))  # few columns: plain least squares
    labels = np.asarray(groups)
    return tuple(_smoother(u, shrink, n, labels) for shrink in shrinks)


def _strength(squares: FloatArray, freedom: float) -> float:
    """Return the ridge λ with Σ s²/(s² + λ) = freedom."""

    def excess(log_strength: float) -> float:
        return float(np.sum(squares / (squares + np.exp(log_strength)))) - freedom

    low, high = np.log(squares[-1]) - 30.0, np.log(squares[0]) + 30.0
    return float(np.exp(brentq(excess, low, high, xtol=1e-6)))


def _smoother(u: FloatArray, shrink: FloatArray, n: int, labels: IntArray) -> Smoother:
    hat = (u * shrink) @ u.T + 1.0 / n
    rest = np.eye(n) - hat
    errors = rest / np.maximum(np.diagonal(rest), 1e-9)[:, None]
    count = np.bincount(np.unique(labels, return_inverse=True)[1])
    for label in np.unique(labels)[count > 1]:
        together = np.flatnonzero(labels == label)
        block = rest[np.ix_(together, together)]
        errors[together] = np.linalg.lstsq(block, rest[together], rcond=1e-9)[0]
    return Smoother(hat, errors, errors.T @ errors, float(np.trace(hat)))


def best_smoother(smoothers: Sequence[Smoother], values: FloatArray) -> Smoother:
    """Return the smoother with the smallest sum of squared left-out errors."""
    return min(smoothers, key=lambda each: float(np.sum((each.errors @ values) ** 2)))


def studentised(smoother: Smoother, values: FloatArray) -> FloatArray:
    """Return left-out errors (predicted − reference) over √(1 + h_cv) where a group is one sample, shape (n,).

    The fit's residual over √(1 − h): for least squares it has one variance for all samples.
    """
    residual = values - smoother.hat @ values
    return np.asarray(-residual / np.sqrt(np.maximum(1.0 - np.diagonal(smoother.hat), 1e-6)))
