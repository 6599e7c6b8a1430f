"""Hotelling's T²: how far a sample's scores are from the calibration's middle, and which distances chance explains.

A calibration sample took part in fixing the middle and the spread, a new one did not: their limits differ, and the
one for calibration samples would reject too many new samples.
"""

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from quant.arrays import FloatArray
from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.nearest_neighbour import whitened_scores
from quant.statistics.quantiles import f_quantile


def hotelling_t_squared(scores: ArrayLike, calibration_scores: ArrayLike) -> FloatArray:
    """Hotelling's T² of scores, with mean and covariance (divided by n - 1) of the calibration's.

    For orthogonal scores it is the sum of t_a²/λ_a, λ_a being the variance of score a.

    Parameters
    ----------
    scores : array of shape (n_new, n_factors)
        Scores to judge; the calibration's own for its samples.
    calibration_scores : array of shape (n_samples, n_factors)
        Scores of the calibration samples, one row a sample.

    Returns
    -------
    array of shape (n_new,)
        Without unit.

    Raises
    ------
    ParameterError
        The two differ in the number of factors, or hold numbers that are not finite.
    NotEnoughDataError
        No more samples than factors, or scores of one factor that follow from the others'.
    """
    turned = whitened_scores(scores, calibration_scores)
    squares: FloatArray = (len(np.asarray(calibration_scores)) - 1) * np.einsum("na,na->n", turned, turned)
    return squares


def t_squared_from_leverage(leverage: ArrayLike, n_samples: int) -> FloatArray:
    """Hotelling's T² = (n - 1)(h - 1/n) of a leverage with 1/n included, in its shape.

    Parameters
    ----------
    leverage : array of any shape
        Leverages in a mean-centred model, 1/n included.
    n_samples : int
        Number n of calibration samples, 2 at least.

    Raises
    ------
    NotEnoughDataError
        Fewer than two samples.
    """
    if n_samples < 2:
        raise NotEnoughDataError(f"{n_samples} sample(s); a spread of scores needs 2 or more.")
    return np.asarray((n_samples - 1) * (np.asarray(leverage, dtype=np.float64) - 1.0 / n_samples))


def t_squared_limit_new(n_samples: int, n_factors: int, probability: float = 0.95) -> float:
    """Limit that T² of a *new* sample stays under: A(n² - 1)/(n(n - A)) · F(p; A, n - A).

    Parameters
    ----------
    n_samples, n_factors : int
        Calibration samples n and factors A, 1 at least and below n.
    probability : float
        Share of good new samples below the limit, inside (0, 1).

    Raises
    ------
    ParameterError
        Fewer than one factor, or a probability outside (0, 1).
    NotEnoughDataError
        No more samples than factors.

    References
    ----------
    .. [1] N.D. Tracy, J.C. Young, R.L. Mason, J. Qual. Technol. 24 (1992) 88-95 (from memory).
    """
    n, a = n_samples, _checked_factors(n_factors)
    _check_samples(n, a, least=a + 1)
    return a * (n**2 - 1) / (n * (n - a)) * f_quantile(probability, a, n - a)


def t_squared_limit_calibration(n_samples: int, n_factors: int, probability: float = 0.95) -> float:
    """Limit that T² of a *calibration* sample stays under: (n - 1)²/n · Beta(p; A/2, (n - A - 1)/2).

    Parameters
    ----------
    n_samples, n_factors : int
        Calibration samples n and factors A, 1 at least and below n - 1.
    probability : float
        Share of the calibration samples below the limit, inside (0, 1).

    Raises
    ------
    ParameterError
        Fewer than one factor, or a probability outside (0, 1).
    NotEnoughDataError
        n - A - 1 is below one.

    References
    ----------
    .. [1] N.D. Tracy, J.C. Young, R.L. Mason, J. Qual. Technol. 24 (1992) 88-95 (from memory).
    """
    n, a = n_samples, _checked_factors(n_factors)
    if not 0 < probability < 1:
        raise ParameterError(f"probability = {probability}; expected one inside (0, 1), such as 0.95.")
    _check_samples(n, a, least=a + 2)
    return (n - 1) ** 2 / n * float(special.betaincinv(a / 2, (n - a - 1) / 2, probability))


def leverage_flag(n_samples: int, n_factors: int, *, mean_centred: bool = True) -> float:
    """Leverage beyond which a calibration sample is looked at: three times the mean leverage.

    3(k + 1)/n for a mean-centred model, whose leverages include 1/n; else 3k/n.

    Parameters
    ----------
    n_samples, n_factors : int
        Calibration samples n, 1 at least, and factors k.
    mean_centred : bool
        Whether the mean is one of the model's terms.

    Raises
    ------
    ParameterError
        Fewer than one factor.
    NotEnoughDataError
        No sample.

    References
    ----------
    .. [1] ASTM E1655-05(2012), outliers among calibration samples (from memory). A new sample is an extrapolation where
       its leverage exceeds the largest of the calibration.
    """
    if n_samples < 1:
        raise NotEnoughDataError("there is no calibration sample; a mean leverage needs one.")
    return 3 * (_checked_factors(n_factors) + int(mean_centred)) / n_samples


def _checked_factors(n_factors: int) -> int:
    if n_factors < 1:
        raise ParameterError(f"n_factors = {n_factors}; expected 1 or more.")
    return n_factors


def _check_samples(n: int, n_factors: int, least: int) -> None:
    if n < least:
        raise NotEnoughDataError(f"{n} samples with {n_factors} factor(s); a limit of T² needs {least} or more.")
