"""Mean-centring."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.estimator.base import Step
from quant.estimator.input import check_weights


def mean_spectrum(spectra: FloatArray, weight: FloatArray) -> FloatArray:
    """Return the weighted mean, Σ wᵢ xᵢ / Σ wᵢ, shape (points,), of spectra of shape (spectra, points).

    `weight` has shape (spectra,): 1/m for each of m replicates of a sample, so that each sample counts once.
    """
    mean: FloatArray = np.average(spectra, axis=0, weights=weight)
    return mean


class MeanCentre(Step):
    """Subtract the weighted mean of the training spectra."""

    name: ClassVar[str] = "mean_centre"
    learns = True
    fitted = ("mean_",)

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:  # noqa: ARG002
        """Learn the mean spectrum."""
        matrix = self.check_fit(X)
        self.mean_ = mean_spectrum(matrix, check_weights(sample_weight, matrix.shape[0]))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return centred spectra, shape (n, points)."""
        return self.check_new(X) - self.mean_
