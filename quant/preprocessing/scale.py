"""Scaling of columns to unit standard deviation."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import NotEnoughDataError, QuantityError
from quant.estimator.base import Step
from quant.estimator.input import check_weights
from quant.preprocessing.centre import mean_spectrum
from quant.preprocessing.rounding import vanishes


def column_spread(spectra: FloatArray, weight: FloatArray) -> FloatArray:
    """Standard deviation of each column.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    weight : array of shape (spectra,)
        1/m for each of m replicates of a sample, so that Σ w counts samples. [1]

    Returns
    -------
    array of shape (points,)
        Square root of Σ wᵢ (xᵢ − mean)² / (Σ wᵢ − 1), the mean being Σ wᵢ xᵢ / Σ wᵢ; with weights of one that is the
        usual n − 1. [unit of `spectra`]

    Raises
    ------
    NotEnoughDataError
        Not more than one sample.
    QuantityError
        Columns in which all spectra have the same value; the message names their positions.
    """
    if weight.sum() <= 1 or np.count_nonzero(weight) < 2:
        raise NotEnoughDataError(
            "Scaling needs more than one sample (n_samples = 1 has no standard deviation); found "
            f"{np.count_nonzero(weight)} spectra with weights that add up to {weight.sum():g} sample(s). Add samples."
        )
    deviation = spectra - mean_spectrum(spectra, weight)
    spread: FloatArray = np.sqrt(weight @ deviation**2 / (weight.sum() - 1))
    constant = np.flatnonzero(vanishes(spread, np.abs(spectra).max(axis=0)))
    if constant.size:
        raise QuantityError(
            f"{constant.size} column(s) have the same value in all training spectra, at position(s) "
            f"{name_some(constant)} (counted from 0); expected columns that vary. Leave those points out before "
            "scaling."
        )
    return spread


class ScaleColumns(Step):
    """Divide each column by its standard deviation over the training spectra; the mean stays where it is.

    The standard deviation has n − 1, with weights Σ w − 1, in the denominator: see `column_spread`.
    """

    name: ClassVar[str] = "scale_columns"
    learns = True
    fitted = ("scale_",)

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:  # noqa: ARG002
        """Learn the standard deviation of each column."""
        matrix = self.check_fit(X)
        self.scale_ = column_spread(matrix, check_weights(sample_weight, matrix.shape[0]))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return scaled spectra, shape (n, points)."""
        return self.check_new(X) / self.scale_
