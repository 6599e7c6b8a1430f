"""The contract of a regression method: what cross-validation, the saved model and prediction rely on."""

from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.estimator.base import Regressor
from quant.estimator.input import check_target

if TYPE_CHECKING:
    from quant.statistics.straight_line import InverseInterval


class Method(Regressor):
    """A regression of one reference value on spectra that knows all its simpler selves.

    A method answers for every number of factors it was fitted with at once: row `i` of what `predict_each`,
    `leverage_each` and `residual_each` return belongs to `factor_counts_[i]`.

    Attributes
    ----------
    averages_replicates : bool
        True: whoever calls averages the processed spectra of one sample before `fit` and `predict`.
        False: replicates are trained one by one, each of the m spectra of a sample with weight 1/m.
    classical : bool
        True: spectra are a function of the values, read backwards, so that predictions scatter about the reference
        values. False (inverse): reference values scatter about the predictions.
    factor_counts_ : tuple of int
        Numbers of fitted terms besides the mean, rising; the last is the method as it was asked for.
    n_samples_ : float
        Sum of the training weights, that is the number of samples.
    """

    averages_replicates: ClassVar[bool] = False
    classical: ClassVar[bool] = False
    n_samples_: float

    @property
    def companions(self) -> tuple[str, ...]:
        """Names of what `fit` takes beside the reference values, one more column of y each."""
        return ()

    @property
    def factor_counts_(self) -> tuple[int, ...]:
        """Numbers of fitted terms besides the mean, rising."""
        raise NotImplementedError

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:
        """Learn from spectra of shape (n, k), reference values of shape (n,) and weights of shape (n,)."""
        raise NotImplementedError

    def predict_each(self, X: ArrayLike) -> FloatArray:
        """Predict with every number of factors, shape (len(factor_counts_), n). [unit of y]"""
        raise NotImplementedError

    def leverage_each(self, X: ArrayLike) -> FloatArray:
        """Leverage of each row, 1/n included (n = `n_samples_`), shape (len(factor_counts_), n)."""
        raise NotImplementedError

    def residual_each(self, X: ArrayLike) -> FloatArray:
        """Sum of squares of what the model leaves of each spectrum, shape (len(factor_counts_), n). [(unit of X)²]"""
        raise NotImplementedError

    def remarks_each(self, X: ArrayLike) -> tuple[str, ...]:
        """Say what should be known of each prediction, n texts, empty where nothing is to be said."""
        return ("",) * len(self.check_new(X))

    def with_factors(self, count: int) -> Self:
        """Return a fitted copy cut to `count` factors.

        Raises
        ------
        ParameterError
            `count` is not among `factor_counts_`.
        """
        raise NotImplementedError

    def predict(self, X: ArrayLike) -> FloatArray:
        """Predict with the largest number of factors, shape (n,). [unit of y]"""
        largest: FloatArray = self.predict_each(X)[-1]
        return largest

    def residual_degrees_of_freedom(self, n_samples: int, factors: int) -> int:
        """Return n − A − 1: the mean and each factor cost one (through the origin A = 0: the slope costs the one)."""
        return n_samples - factors - 1

    def check_fit_companions(self, X: ArrayLike, y: ArrayLike | None) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Check training spectra (n, k), reference values (n,) and their `companions` (n, len(companions)).

        Raises
        ------
        ParameterError
            y does not have one column for the reference values and one for each companion.
        """
        if y is None or not self.companions:
            matrix, values = self.check_fit_pair(X, y)
            return matrix, values, np.empty((values.size, 0))
        columns = np.asarray(y)
        if columns.ndim != 2 or columns.shape[1] != 1 + len(self.companions):
            raise ParameterError(
                f"y has shape {columns.shape}; expected {1 + len(self.companions)} columns: the reference values, then "
                f"{', '.join(self.companions)}."
            )
        matrix = self.check_fit(X)
        checked = [check_target(column, matrix.shape[0]) for column in columns.T]
        return matrix, checked[0], np.column_stack(checked[1:])

    def check_count(self, count: int) -> None:
        """Refuse a number of factors this fit does not have.

        Raises
        ------
        ParameterError
            `count` is not among `factor_counts_`.
        """
        self.check_fitted()
        counts = self.factor_counts_
        if count not in counts:
            raise ParameterError(
                f"{type(self).__name__} was asked for {count} factor(s); this fit has {counts[0]} to {counts[-1]}. "
                "Choose a number among these, or fit again with more factors."
            )


class LineMethod(Method):
    """A method that reads a calibration line of a signal backwards, and knows the interval of what it reads."""

    def signals(self, X: ArrayLike) -> FloatArray:
        """Signal of each spectrum, shape (n,)."""
        raise NotImplementedError

    def inverse_interval(self, signal: ArrayLike, t: float, readings: ArrayLike = 1) -> "InverseInterval":
        """Values, standard errors and intervals from signals of shape (n,)."""
        raise NotImplementedError
