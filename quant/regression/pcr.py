"""Principal component regression with one response.

The factors are the directions in which the spectra vary most, whatever the reference values say; PLS looks at both. The
same as scikit-learn's `PCA` followed by `LinearRegression`.
"""

from typing import Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.estimator.input import check_weights
from quant.regression.bidiagonal import EPS, running_sum
from quant.regression.factor_regression import FactorRegression, check_n_factors


class PCR(FactorRegression):
    """Principal component regression of one response, mean-centred, **never column-scaled**.

    Parameters
    ----------
    n_factors : int
        Number of principal components, from 0 (the mean) to the lesser of n_samples − 1 and n_features.

    Attributes
    ----------
    n_factors_ : int
        Components found; fewer than asked for if the next one would be rounding error, see `guard_note_`.
    guard_note_ : str
        At which component the fit stopped early and why; '' if it did not.
    x_mean_, y_mean_ : array of shape (k,), float
        Weighted means of the training data.
    weights_, rotations_, loadings_ : arrays of shape (k, n_factors_)
        V, V/s and V·s, of the centred spectra U·s·V': scores are (X − x_mean_)·R, spectra are rebuilt by T·P'.
    y_loadings_ : array of shape (n_factors_,)
        Never negative: that fixes the signs of the components.
    scores_ : array of shape (n, n_factors_)
        Scores of the training rows, scaled to sum(weight·t²) = 1. Not part of `state()`.
    coefficients_, intercepts_ : arrays of shape (n_factors_ + 1, k) and (n_factors_ + 1,)
        Regression vector and intercept for 0, 1, ... n_factors_ components. [unit of y / unit of X], [unit of y]
    explained_x_, explained_y_ : arrays of shape (n_factors_,)
        Fraction of the centred sum of squares that each component explains.

    References
    ----------
    .. [1] W. F. Massy, Principal components regression in exploratory statistical research, J. Am. Stat. Assoc. 60
       (1965) 234 (from memory).
    """

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:
        """Fit all numbers of components up to `n_factors`.

        Parameters
        ----------
        X : array of shape (n, k)
            Spectra.
        y : array of shape (n,)
            Reference values. Equal values are predicted by their mean.
        sample_weight : array of shape (n,), optional
            Weights; zero means that the row is absent. The m replicates of one sample weigh 1/m each.

        Returns
        -------
        PCR
            Itself, fitted.

        Raises
        ------
        ParameterError
            `n_factors` is no whole number from 0 to min(rows − 1, k), or X, y or the weights cannot be used.
        """
        matrix, values = self.check_fit_pair(X, y)
        weight = check_weights(sample_weight, values.size)
        n_factors = check_n_factors(self.n_factors, int(np.count_nonzero(weight)), matrix.shape[1])
        self.n_samples_ = total = float(weight.sum())
        self.x_mean_, self.y_mean_ = weight @ matrix / total, float(weight @ values / total)
        root = np.sqrt(weight)
        yc = (values - self.y_mean_) * root
        if np.linalg.norm(yc) <= 10 * values.size * EPS * np.linalg.norm(values * root):
            yc = np.zeros_like(yc)  # equal values: what is left of them is rounding error
        scores, sizes, directions, x_size = self._decompose((matrix - self.x_mean_) * root[:, None], n_factors)
        q = scores.T @ yc
        sign = np.where(q < 0, -1.0, 1.0)  # the sign of a component is free: ours makes its y-loading positive
        self.y_loadings_, self.weights_ = np.abs(q), directions.T * sign
        self.rotations_, self.loadings_ = self.weights_ / sizes, self.weights_ * sizes
        self.coefficients_ = running_sum(self.y_loadings_[:, None] * self.rotations_.T)
        self.intercepts_ = self.y_mean_ - self.coefficients_ @ self.x_mean_
        y_square = float(yc @ yc)
        self.explained_x_ = (sizes / x_size) ** 2 if sizes.size else np.empty(0)
        self.explained_y_ = q**2 / y_square if y_square > 0 else np.zeros_like(q)
        self.scores_ = (matrix - self.x_mean_) @ self.rotations_
        return self

    def _decompose(self, Xc: FloatArray, n_factors: int) -> tuple[FloatArray, FloatArray, FloatArray, float]:
        """Return scores (n, A), singular values (A,) and directions (A, k) above rounding error, and the size of Xc."""
        scores, sizes, directions = np.linalg.svd(Xc, full_matrices=False)
        x_size = float(np.linalg.norm(sizes))
        noise = 10 * max(Xc.shape) * EPS * x_size
        found = min(n_factors, int(np.count_nonzero(sizes > noise)))
        self.n_factors_, self.guard_note_ = found, ""
        if found < n_factors:
            self.guard_note_ = (
                f"factor {found + 1} would be numerical noise: its singular value is {sizes[found]:.1e}, rounding "
                f"alone makes up to {noise:.1e}; stopped at {found}"
            )
        return scores[:, :found], sizes[:found], directions[:found], x_size
