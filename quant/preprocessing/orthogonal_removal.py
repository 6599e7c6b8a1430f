"""Orthogonal removal of known interferents or differences."""

from operator import index
from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix
from quant.errors import ParameterError
from quant.estimator.base import Step
from quant.preprocessing.known_spectra import known_spectra

RANK = 1e-10  # a singular value below this share of the first is rounding


def orthogonal_directions(differences: ArrayLike, components: int = 1) -> FloatArray:
    """Return the directions in which the differences are largest.

    Parameters
    ----------
    differences : array of shape (n, points)
        Spectra of interferents, or differences between spectra of the same sample at two temperatures, moistures,
        instruments ... They are not centred: their mean is unwanted, too. [any unit]
    components : int
        How many directions, from 1 to as many as the differences span.

    Returns
    -------
    array of shape (components, points)
        Orthonormal rows: the first right singular vectors. [1]

    Raises
    ------
    ParameterError
        A number of components that is not a whole number, or more of them than the differences span.

    References
    ----------
    .. [1] J.-M. Roger, F. Chauchard, V. Bellon-Maurel, Chemometrics and Intelligent Laboratory Systems 66 (2003)
       191-204 (external parameter orthogonalisation); from memory.
    """
    D = as_matrix("differences", differences)
    try:
        wanted = index(components)
    except TypeError:
        wanted = -1
    _, sizes, directions = np.linalg.svd(D, full_matrices=False)
    rank = int(np.count_nonzero(sizes > RANK * sizes.max(initial=0.0)))
    if not 0 <= wanted <= rank:
        raise ParameterError(
            f"orthogonal_removal: components = {components!r}, but {D.shape[0]} difference spectra span {rank} "
            "direction(s); expected a whole number up to that. Ask for fewer, or give more difference spectra."
        )
    return np.asarray(directions[:wanted], dtype=np.float64)


def remove_directions(spectra: ArrayLike, directions: FloatArray) -> FloatArray:
    """Return spectra of shape (n, points) without their parts along orthonormal directions, shape (k, points)."""
    X = as_matrix("spectra", spectra)
    return X - (X @ directions.T) @ directions


class OrthogonalRemoval(Step):
    """Remove what known interferents, or differences between spectra of the same sample, look like.

    Every spectrum is projected at right angles to the main directions of the differences (external parameter
    orthogonalisation). What the analyte shares with them is lost, too.

    Parameters
    ----------
    differences : array of shape (n, points), optional
        Spectra of interferents, or of one condition minus another for the same sample (temperature, moisture,
        instrument). Not centred. [any unit]
    components : int
        How many directions are removed; 0 removes nothing.
    """

    name: ClassVar[str] = "orthogonal_removal"
    linear = True
    required = ("differences",)
    fitted = ("directions_",)

    def __init__(self, differences: ArrayLike | None = None, components: int = 1) -> None:
        self.differences = differences
        self.components = components

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Find the directions; nothing is learnt from the training spectra.

        Raises
        ------
        ParameterError
            No difference spectra.
        """
        points = self.check_fit(X).shape[1]
        if self.differences is None and self.components != 0:
            raise ParameterError(
                f"orthogonal_removal: no difference spectra for {self.components} component(s); expected spectra "
                "of what is to be removed. Name their file as difference_file in the recipe, or give differences in "
                "Python."
            )
        self.directions_ = orthogonal_directions(
            known_spectra("differences", self.differences, points), self.components
        )
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra at right angles to the directions, shape (n, points)."""
        return remove_directions(self.check_new(X), self.directions_)
