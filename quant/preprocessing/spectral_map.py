"""A linear map from spectra of one instrument state to those of another, held as plain arrays.

It is no step of a recipe: revalidation fits it to spectra of the same standards before and after a change, and a
corrected model carries it among its steps. Applying it takes NumPy only.
"""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray, IntArray
from quant.errors import ParameterError
from quant.estimator.base import Step


class SpectralMap(Step):
    """x ↦ offset + Σ weights·x[sources] + (x·left)·right; fitted to nothing, it changes nothing.

    A band of neighbours (axis correction, piecewise standardisation) and a product of two thin matrices (direct
    standardisation, orthogonal removal) hold every correction without a matrix of points by points.
    """

    name: ClassVar[str] = "spectral_map"
    fitted = ("sources_", "weights_", "offset_", "left_", "right_")

    sources_: IntArray  # (points, neighbours): the points each new point draws on ...
    weights_: FloatArray  # ... and with what weight
    offset_: FloatArray  # (points,)
    left_: FloatArray  # (points, directions)
    right_: FloatArray  # (directions, points)

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Become the map that changes nothing, for spectra as wide as these."""
        self.__dict__.update(identity_map(self.check_fit(X).shape[1]).__dict__)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return mapped spectra, shape (n, points)."""
        spectra = self.check_new(X)
        result = np.tile(self.offset_, (len(spectra), 1))
        for source, weight in zip(self.sources_.T, self.weights_.T, strict=True):
            result += spectra[:, source] * weight
        if self.left_.shape[1]:
            result += (spectra @ self.left_) @ self.right_
        return result


def identity_map(points: int) -> SpectralMap:
    """Return the map that changes nothing, for spectra of so many points."""
    return banded_map(np.arange(points)[:, None], np.ones((points, 1)), np.zeros(points))


def banded_map(sources: IntArray, weights: FloatArray, offset: FloatArray) -> SpectralMap:
    """Return the map whose every point is a weighted sum of some points of the spectrum.

    Parameters
    ----------
    sources : array of int, shape (points, neighbours)
        Which points.
    weights : array of shape (points, neighbours)
        With what weight.
    offset : array of shape (points,)
        What is added. [ordinate]

    Raises
    ------
    ParameterError
        Arrays that do not fit each other, or draw on points that are not there.
    """
    points = offset.size
    if sources.shape != weights.shape or len(sources) != points or not 0 <= sources.min() <= sources.max() < points:
        raise ParameterError(
            f"A map of {points} points with sources of shape {sources.shape} and weights of shape {weights.shape}; "
            "expected one row a point, each drawing on points that are there."
        )
    made = SpectralMap()
    made.n_features_in_ = points
    made.sources_, made.weights_, made.offset_ = sources.astype(np.intp), weights, offset
    made.left_, made.right_ = np.zeros((points, 0)), np.zeros((0, points))
    return made


def low_rank_map(left: FloatArray, right: FloatArray, offset: FloatArray) -> SpectralMap:
    """Return the map x ↦ x + offset + (x·left)·right.

    Parameters
    ----------
    left : array of shape (points, directions)
    right : array of shape (directions, points)
    offset : array of shape (points,)
        [ordinate]

    Raises
    ------
    ParameterError
        Arrays that do not fit each other.
    """
    if left.shape != right.T.shape or len(left) != offset.size:
        raise ParameterError(
            f"A map of {offset.size} points by matrices of shapes {left.shape} and {right.shape}; expected (points, "
            "directions) and (directions, points)."
        )
    made = identity_map(offset.size)
    made.left_, made.right_, made.offset_ = left, right, offset
    return made
