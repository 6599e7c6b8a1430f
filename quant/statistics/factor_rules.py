"""How many factors: rules that read the squared errors of left-out samples.

Each rule takes squared errors of shape (n_counts, n_samples), row a holding those of the model with a factors, from
a = 0 (the mean of the training samples) to A. It chooses among 1 ... A; no rule answers with the mean. With repeated
cross-validation a sample's squared errors are averaged over the repeats first, so that n counts samples.
"""

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix
from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.quantiles import f_quantile
from quant.statistics.randomisation import randomisation_test


def minimum(squared_errors: ArrayLike) -> int:
    """Return the number of factors with the lowest mean squared error (the fewest, where several tie).

    Parameters
    ----------
    squared_errors : array of shape (n_counts, n_samples)
        Row a: squared left-out errors with a factors, a = 0 ... A. [unit of the analyte, squared]

    Raises
    ------
    ParameterError
        Not such an array: another shape, negative or non-finite numbers.
    NotEnoughDataError
        No row for one factor, or fewer than two samples.
    """
    return _lowest(_checked(squared_errors).mean(axis=1))


def one_standard_error(squared_errors: ArrayLike) -> int:
    """Return the fewest factors whose mean squared error is at most the lowest plus its standard error.

    The standard error is the standard deviation of the squared errors at the minimum, divided by n - 1, over sqrt(n).

    Parameters
    ----------
    squared_errors : array of shape (n_counts, n_samples)
        Row a: squared left-out errors with a factors, a = 0 ... A. [unit of the analyte, squared]

    Raises
    ------
    ParameterError
        Not such an array: another shape, negative or non-finite numbers.
    NotEnoughDataError
        No row for one factor, or fewer than two samples.

    References
    ----------
    .. [1] L. Breiman, J. Friedman, R. Olshen, C. Stone, Classification and Regression Trees (1984), section 3.4.3
       (from memory): the rule; its use for factors is common practice.
    """
    squares = _checked(squared_errors)
    means = squares.mean(axis=1)
    best = _lowest(means)
    standard_error = squares[best].std(ddof=1) / np.sqrt(squares.shape[1])
    return _first(means <= means[best] + standard_error)


def f_ratio(squared_errors: ArrayLike, alpha: float = 0.25) -> int:
    """Return the fewest factors whose PRESS is not significantly above the lowest.

    PRESS(a)/PRESS(lowest) < F(1 - alpha; m, m), m being the number of samples.

    Parameters
    ----------
    squared_errors : array of shape (n_counts, n_samples)
        Row a: squared left-out errors with a factors, a = 0 ... A. [unit of the analyte, squared]
    alpha : float
        Inside (0, 1); 0.25 is the value recommended in [1]_.

    Raises
    ------
    ParameterError
        Not such an array: another shape, negative or non-finite numbers; alpha outside (0, 1).
    NotEnoughDataError
        No row for one factor, or fewer than two samples.

    References
    ----------
    .. [1] D.M. Haaland, E.V. Thomas, Anal. Chem. 60 (1988) 1193-1202 (from memory).
    """
    squares = _checked(squared_errors)
    press = squares.sum(axis=1)
    best = _lowest(press)
    acceptable = press < press[best] * f_quantile(1 - alpha, squares.shape[1], squares.shape[1])
    acceptable[best] = True  # a lowest PRESS of zero is below no multiple of itself
    return _first(acceptable)


def randomisation(squared_errors: ArrayLike, alpha: float = 0.1) -> int:
    """Return the fewest factors whose squared errors are not significantly above those at the lowest mean.

    Van der Voet's one-sided test of each smaller number against the minimum; p above alpha is "not significantly".

    Parameters
    ----------
    squared_errors : array of shape (n_counts, n_samples)
        Row a: squared left-out errors with a factors, a = 0 ... A. [unit of the analyte, squared]
    alpha : float
        Inside (0, 1); 0.1 is customary. A smaller alpha takes fewer factors.

    Raises
    ------
    ParameterError
        Not such an array: another shape, negative or non-finite numbers; alpha outside (0, 1).
    NotEnoughDataError
        No row for one factor, or fewer than two samples.

    References
    ----------
    .. [1] H. van der Voet, Chemom. Intell. Lab. Syst. 25 (1994) 313-323 (from memory).
    """
    if not 0 < alpha < 1:
        raise ParameterError(f"alpha = {alpha}; expected a probability inside (0, 1), such as 0.1.")
    squares = _checked(squared_errors)
    best = _lowest(squares.mean(axis=1))
    fewer = (a for a in range(1, best) if randomisation_test(squares[a], squares[best]).p > alpha)
    return next(fewer, best)


RULES: Mapping[str, Callable[[ArrayLike], int]] = {
    "one_standard_error": one_standard_error,
    "minimum": minimum,
    "f_ratio": f_ratio,
    "randomisation": randomisation,
}


def _checked(squared_errors: ArrayLike) -> FloatArray:
    squares = as_matrix("squared_errors", squared_errors)
    n_counts, n_samples = squares.shape
    if n_counts < 2 or n_samples < 2:
        raise NotEnoughDataError(
            f"squared errors of {n_counts} factor count(s) and {n_samples} sample(s); at least the counts 0 and 1 and "
            "two samples are needed to choose the number of factors."
        )
    if (squares < 0).any():
        raise ParameterError("squared_errors holds negative numbers; pass the squares of predicted - reference.")
    return squares


def _lowest(totals: FloatArray) -> int:
    return 1 + int(np.argmin(totals[1:]))


def _first(acceptable: np.ndarray[tuple[int, ...], np.dtype[np.bool_]]) -> int:
    return 1 + int(np.argmax(acceptable[1:]))
