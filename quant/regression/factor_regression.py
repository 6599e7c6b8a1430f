"""What regressions on the scores of factors share: all numbers of factors at once, whatever way they were found."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.regression.bidiagonal import running_sum
from quant.regression.method import Method


class FactorRegression(Method):
    """Regression of one response on scores T = (X − x_mean_)·R of unit length; a subclass finds the factors.

    Parameters
    ----------
    n_factors : int
        Number of factors, from 0 (the mean) to the lesser of n_samples − 1 and n_features.
    """

    averages_replicates: ClassVar[bool] = False
    fitted: ClassVar[tuple[str, ...]] = (
        *("n_factors_", "guard_note_", "n_samples_", "x_mean_", "y_mean_", "weights_", "rotations_", "loadings_"),
        *("y_loadings_", "coefficients_", "intercepts_", "explained_x_", "explained_y_"),
    )

    n_factors_: int
    guard_note_: str
    x_mean_: FloatArray
    y_mean_: float
    weights_: FloatArray
    rotations_: FloatArray
    loadings_: FloatArray
    y_loadings_: FloatArray
    coefficients_: FloatArray
    intercepts_: FloatArray
    explained_x_: FloatArray
    explained_y_: FloatArray
    scores_: FloatArray

    def __init__(self, n_factors: int = 2) -> None:
        self.n_factors = n_factors

    @property
    def factor_counts_(self) -> tuple[int, ...]:
        """0, 1, ... n_factors_."""
        return tuple(range(self.n_factors_ + 1))

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


def check_n_factors(n_factors: object, n_rows: int, n_points: int) -> int:
    """Return the number of factors asked for, if so many rows of so many points can carry it.

    Raises
    ------
    ParameterError
        No whole number from 0 to min(n_rows − 1, n_points).
    """
    if isinstance(n_factors, bool) or not isinstance(n_factors, int | np.integer) or n_factors < 0:
        raise ParameterError(f"n_factors = {n_factors!r}; expected a whole number, 0 or more.")
    bound = min(n_rows - 1, n_points)
    if n_factors > bound:
        raise ParameterError(
            f"n_factors upper bound is {bound}, the lesser of n_samples - 1 and n_features "
            f"(n_samples={n_rows}, n_features={n_points}). Got {n_factors} instead. Reduce n_factors."
        )
    return int(n_factors)
