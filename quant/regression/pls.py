"""Partial least squares with one response.

Spectra and reference values are always mean-centred and **never scaled column by column**: a point of the spectrum
counts by how much it varies. Beware when comparing: scikit-learn's `PLSRegression` scales by default; ours equals
`PLSRegression(scale=False)`.
"""

from typing import Self

import numpy as np
from numpy.typing import ArrayLike

from quant.estimator.input import check_weights
from quant.regression.bidiagonal import pls_bidiagonal
from quant.regression.factor_regression import FactorRegression, check_n_factors


class PLS(FactorRegression):
    """Partial least squares regression of one response, mean-centred, **never column-scaled**.

    Mind the difference: scikit-learn's `PLSRegression` scales every column to unit standard deviation unless told
    `scale=False`. In a spectrum that raises the noise of empty regions to the rank of the bands.

    Parameters
    ----------
    n_factors : int
        Number of factors, from 0 (the mean) to the lesser of n_samples − 1 and n_features.

    Attributes
    ----------
    n_factors_ : int
        Factors found; fewer than asked for if the next one would be rounding error, see `guard_note_`.
    guard_note_ : str
        At which factor the fit stopped early and why; '' if it did not.
    x_mean_, y_mean_ : array of shape (k,), float
        Weighted means of the training data.
    weights_, rotations_, loadings_ : arrays of shape (k, n_factors_)
        W, R and P: scores are (X − x_mean_)·R, spectra are rebuilt by T·P'.
    y_loadings_ : array of shape (n_factors_,)
        Never negative: that fixes the signs of the factors.
    scores_ : array of shape (n, n_factors_)
        Scores of the training rows, scaled to sum(weight·t²) = 1. Not part of `state()`.
    coefficients_, intercepts_ : arrays of shape (n_factors_ + 1, k) and (n_factors_ + 1,)
        Regression vector and intercept for 0, 1, ... n_factors_ factors. [unit of y / unit of X], [unit of y]
    explained_x_, explained_y_ : arrays of shape (n_factors_,)
        Fraction of the centred sum of squares that each factor explains.
    """

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:
        """Fit all factor counts up to `n_factors`.

        Parameters
        ----------
        X : array of shape (n, k)
            Spectra.
        y : array of shape (n,)
            Reference values. Equal values give no factor, and their mean as prediction.
        sample_weight : array of shape (n,), optional
            Weights; zero means that the row is absent. The m replicates of one sample weigh 1/m each.

        Returns
        -------
        PLS
            Itself, fitted.

        Raises
        ------
        ParameterError
            `n_factors` is no whole number from 0 to min(rows − 1, k), or X, y or the weights cannot be used.
        """
        matrix, values = self.check_fit_pair(X, y)
        weight = check_weights(sample_weight, values.size)
        n_factors = check_n_factors(self.n_factors, int(np.count_nonzero(weight)), matrix.shape[1])
        found = pls_bidiagonal(matrix, values, weight, n_factors)
        self.n_samples_ = float(weight.sum())
        self.n_factors_ = found.y_loadings.size
        self.guard_note_ = found.guard_note
        self.x_mean_, self.y_mean_ = found.x_mean, found.y_mean
        self.weights_, self.rotations_, self.loadings_ = found.weights, found.rotations, found.loadings
        self.y_loadings_ = found.y_loadings
        self.coefficients_ = found.coefficients
        self.intercepts_ = found.y_mean - found.coefficients @ found.x_mean
        self.explained_x_, self.explained_y_ = found.explained_x, found.explained_y
        self.scores_ = (matrix - found.x_mean) @ found.rotations
        return self
