"""The Kennard-Stone choice: samples that cover a space evenly."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.checks import as_matrix
from quant.errors import ParameterError

_TIE = 1e-9  # relative; distances that differ by rounding only are tied, so that turning the axes changes no choice
_SAME_POINT = 1e-12  # of the largest distance: nearer than that, two points coincide


def kennard_stone(X: ArrayLike, n: int) -> IntArray:
    """Choose n samples that cover the space evenly, in the order of choice.

    First the two that are farthest apart (Euclidean distance), the lower position first; then always the one whose
    nearest chosen sample is farthest away. Ties, distances that differ by less than a part in 10⁹, go to the lowest
    position.

    Parameters
    ----------
    X : array of shape (n_samples, n_points)
        Spectra or scores, one row a sample.
    n : int
        How many to choose, 2 ... n_samples.

    Returns
    -------
    array of shape (n,)
        Positions in the order of choice.

    Raises
    ------
    ParameterError
        X is not a table of finite numbers, or n is below 2 or above the number of samples.

    References
    ----------
    .. [1] R.W. Kennard, L.A. Stone, Computer aided design of experiments, Technometrics 11 (1969) 137-148
       (from memory).
    """
    points = _fewer_columns(as_matrix("X", X))
    n_samples = points.shape[0]
    if not 2 <= n <= n_samples:
        raise ParameterError(
            f"{n} samples were asked of {n_samples}; Kennard-Stone chooses from two up to all of them."
        )
    farthest = np.array([_distances(points, i).max() for i in range(n_samples)])
    largest = farthest.max()
    first = _lowest_tied(farthest, largest)
    nearest = _distances(points, first)  # of each sample to the chosen ones
    chosen = [first, _lowest_tied(np.where(np.arange(n_samples) == first, -1.0, nearest), largest)]
    free: BoolArray = np.ones(n_samples, dtype=np.bool_)
    free[chosen] = False
    while len(chosen) < n:
        nearest = np.minimum(nearest, _distances(points, chosen[-1]))
        chosen.append(_lowest_tied(np.where(free, nearest, -np.inf), largest))
        free[chosen[-1]] = False
    return np.array(chosen, dtype=np.intp)


def _distances(points: FloatArray, i: int) -> FloatArray:
    difference = points - points[i]  # never from inner products: those lose the small distances
    distances: FloatArray = np.sqrt(np.einsum("ij,ij->i", difference, difference))
    return distances


def _lowest_tied(distances: FloatArray, largest: float) -> int:
    return int(np.argmax(distances >= distances.max() * (1 - _TIE) - _SAME_POINT * largest))


def _fewer_columns(points: FloatArray) -> FloatArray:
    """Turn the axes so that no more columns than samples remain; distances stay as they were."""
    if points.shape[1] <= points.shape[0]:
        return points
    triangle = np.linalg.qr((points - points.mean(axis=0)).T, mode="r")
    return np.asarray(triangle, dtype=np.float64).T
