"""Partial least squares with one response.

Spectra and reference values are always mean-centred and **never scaled column by column**: a point of the spectrum
counts by how much it varies. Beware when comparing: scikit-learn's `PLSRegression` scales by default; ours equals
`PLSRegression(scale=False)`.
"""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.estimator import check_weights
from quant.regression.bidiagonal import pls_bidiagonal, running_sum
from quant.regression.method import Method


class PLS(Method):
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

    averages_replicates: ClassVar[bool] = False
    fitted: ClassVar[tuple[str, ...]] = (
        *("n_factors_", "guard_note_", "n_samples_", "x_mean_", "y_mean_", "weights_", "rotations_", "loadings_"),
        *("y_loadings_", "coefficients_", "intercepts_", "explained_x_", "explained_y_"),
    )

    def __init__(self, n_factors: int = 2) -> None:
        self.n_factors = n_factors

    @property
    def factor_counts_(self) -> tuple[int, ...]:
        """0, 1, ... n_factors_."""
        return tuple(range(self.n_factors_ + 1))

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
        n_factors = _check_n_factors(self.n_factors, int(np.count_nonzero(weight)), matrix.shape[1])
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

    def predict_each(self, X: ArrayLike) -> FloatArray:
        """Predict with 0, 1, ... n_factors_ factors, shape (n_factors_ + 1, n). [unit of y]"""
        # Centred first: intercepts_ + coefficients_·X would lose digits where spectra are much larger than they vary.
        centred = self._centred(X)
        predicted: FloatArray = self.y_mean_ + self.coefficients_ @ centred.T
        return predicted

    def predict(self, X: ArrayLike) -> FloatArray:
        """Predict with n_factors_ factors, shape (n,). [unit of y]"""
        centred = self._centred(X)
        predicted: FloatArray = self.y_mean_ + centred @ self.coefficients_[-1]
        return predicted

    def leverage_each(self, X: ArrayLike) -> FloatArray:
        """Leverage 1/n + sum of t² with 0, 1, ... n_factors_ factors, shape (n_factors_ + 1, n)."""
        scores = (self._centred(X) @ self.rotations_).T
        return 1.0 / self.n_samples_ + running_sum(scores**2)

    def residual_each(self, X: ArrayLike) -> FloatArray:
        """Sum of squares of x − T·P' with 0, 1, ... n_factors_ factors, shape (n_factors_ + 1, n). [(unit of X)²]"""
        rest = self._centred(X)
        scores = rest @ self.rotations_
        squares = np.empty((self.n_factors_ + 1, rest.shape[0]))
        squares[0] = np.einsum("nk,nk->n", rest, rest)
        for a in range(self.n_factors_):  # never by a difference of large sums
            rest = rest - np.outer(scores[:, a], self.loadings_[:, a])
            squares[a + 1] = np.einsum("nk,nk->n", rest, rest)
        return squares

    def with_factors(self, count: int) -> Self:
        """Return a fitted copy cut to `count` factors; its `guard_note_` stays only if nothing was cut.

        Raises
        ------
        ParameterError
            `count` is not among `factor_counts_`.
        """
        self.check_count(count)
        cut = type(self)(n_factors=count)
        cut.__dict__.update({**self.__dict__, "n_factors": count, "n_factors_": count})
        cut.guard_note_ = self.guard_note_ if count == self.n_factors_ else ""
        for name in ("weights_", "rotations_", "loadings_", "y_loadings_", "explained_x_", "explained_y_"):
            setattr(cut, name, getattr(self, name)[..., :count].copy())
        for name in ("coefficients_", "intercepts_"):
            setattr(cut, name, getattr(self, name)[: count + 1].copy())
        if hasattr(self, "scores_"):  # a model that was saved and loaded has none
            cut.scores_ = self.scores_[:, :count].copy()
        return cut

    def _centred(self, X: ArrayLike) -> FloatArray:
        return self.check_new(X) - self.x_mean_


def _check_n_factors(n_factors: object, n_rows: int, n_points: int) -> int:
    if isinstance(n_factors, bool) or not isinstance(n_factors, int | np.integer) or n_factors < 0:
        raise ParameterError(f"n_factors = {n_factors!r}; expected a whole number, 0 or more.")
    bound = min(n_rows - 1, n_points)
    if n_factors > bound:
        raise ParameterError(
            f"n_factors upper bound is {bound}, the lesser of n_samples - 1 and n_features "
            f"(n_samples={n_rows}, n_features={n_points}). Got {n_factors} instead. Reduce n_factors."
        )
    return int(n_factors)
