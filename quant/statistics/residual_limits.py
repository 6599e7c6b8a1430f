"""Limits for the residual of a spectrum: Q, the sum of squares of what a model leaves of it.

**Caution.** Factors bend towards the spectra they were fitted to, so calibration residuals are too small. Limits
computed from them flag good new samples far too often: at a nominal 5 % and 30 samples, 4 factors, `jackson_mudholkar`
flags 15 to 22 %, `chi_square_by_moments` 89 % (60 samples, 5 factors: 5 % and 76 %; found by simulation). Give these
functions residuals of *left-out* samples: `chi_square_by_moments` then flags 5 to 6 %.
"""

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector
from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.quantiles import chi_square_quantile


def residual_variances(residual_spectra: ArrayLike, degrees_of_freedom: float | None = None) -> FloatArray:
    """Variances λ of residual spectra along their principal axes, largest first.

    Parameters
    ----------
    residual_spectra : array of shape (n_samples, n_points)
        What the model leaves of each (centred) spectrum. [ordinate behind the preprocessing]
    degrees_of_freedom : float, optional
        Divisor of the sums of squares; n - 1 where it is not given.

    Returns
    -------
    array of shape (min(n_samples, n_points),)
        [ordinate, squared]

    Raises
    ------
    ParameterError
        Not a table of finite numbers, or a divisor that is not above zero.
    NotEnoughDataError
        Fewer than two spectra.
    """
    residual = as_matrix("residual_spectra", residual_spectra)
    if len(residual) < 2:
        raise NotEnoughDataError(f"{len(residual)} residual spectrum; variances need 2 or more.")
    divisor = len(residual) - 1 if degrees_of_freedom is None else degrees_of_freedom
    if not divisor > 0:
        raise ParameterError(f"degrees_of_freedom = {divisor}; expected a number above zero.")
    singular: FloatArray = np.linalg.svd(residual, compute_uv=False).astype(np.float64, copy=False)
    return singular**2 / divisor


def jackson_mudholkar(variances: ArrayLike, probability: float = 0.95) -> float:
    """Limit of Q from the variances of the residual space, after Jackson & Mudholkar.

    With θ_i = sum of λ^i and h0 = 1 - 2·θ1·θ3/(3·θ2²), (Q/θ1)^h0 is taken for normal with mean
    1 + θ2·h0·(h0 - 1)/θ1² and variance 2·θ2·h0²/θ1².

    Parameters
    ----------
    variances : array of shape (n,)
        λ of the axes beyond the model's factors, see `residual_variances`. [ordinate, squared]
    probability : float
        Share of the samples below the limit, inside (0, 1).

    Returns
    -------
    float
        [ordinate, squared]

    Raises
    ------
    ParameterError
        Negative or non-finite variances, a probability outside (0, 1), or variances for which the approximation has no
        solution (one large beside very many small ones).
    NotEnoughDataError
        No variance above zero.

    References
    ----------
    .. [1] J.E. Jackson, G.S. Mudholkar, Technometrics 21 (1979) 341-349 (from memory).
    """
    theta1, theta2, theta3 = _sums_of_powers(variances)
    quantile = float(special.ndtri(_checked(probability)))
    h0 = 1 - 2 * theta1 * theta3 / (3 * theta2**2)
    if abs(h0) < 1e-8:  # the power of h0 tends to the logarithm
        return theta1 * float(np.exp(quantile * np.sqrt(2 * theta2) / theta1 - theta2 / theta1**2))
    # h0 keeps its sign here: where it is negative, the upper end of Q is the lower end of Q^h0.
    base = 1 + quantile * h0 * np.sqrt(2 * theta2) / theta1 + theta2 * h0 * (h0 - 1) / theta1**2
    if base <= 0:
        raise ParameterError(
            f"the residual variances (h0 = {h0:.4g}) are too unequal for the limit of Jackson & Mudholkar; use `box`."
        )
    return theta1 * float(base ** (1 / h0))


def box(variances: ArrayLike, probability: float = 0.95) -> float:
    """Limit of Q from the variances of the residual space, after Box: g·χ²(p, h), g = θ2/θ1, h = θ1²/θ2.

    Parameters
    ----------
    variances : array of shape (n,)
        λ of the axes beyond the model's factors, see `residual_variances`. [ordinate, squared]
    probability : float
        Share of the samples below the limit, inside (0, 1).

    Returns
    -------
    float
        [ordinate, squared]

    Raises
    ------
    ParameterError
        Negative or non-finite variances, or a probability outside (0, 1).
    NotEnoughDataError
        No variance above zero.

    References
    ----------
    .. [1] G.E.P. Box, Ann. Math. Stat. 25 (1954) 290-302 (from memory).
    """
    theta1, theta2, _ = _sums_of_powers(variances)
    return theta2 / theta1 * chi_square_quantile(_checked(probability), theta1**2 / theta2)


def chi_square_by_moments(residuals: ArrayLike, probability: float = 0.95) -> float:
    """Limit of Q from residuals of left-out samples: g·χ²(p, h) with their mean g·h and variance 2·g²·h.

    Parameters
    ----------
    residuals : array of shape (n_samples,)
        Q of *left-out* samples; see the caution at the top. [ordinate, squared]
    probability : float
        Share of the samples below the limit, inside (0, 1).

    Returns
    -------
    float
        [ordinate, squared]

    Raises
    ------
    ParameterError
        Negative or non-finite residuals, or a probability outside (0, 1).
    NotEnoughDataError
        Fewer than two residuals, or residuals that do not differ.

    References
    ----------
    .. [1] P. Nomikos, J.F. MacGregor, Technometrics 37 (1995) 41-59 (from memory).
    """
    squares = as_vector("residuals", residuals)
    if (squares < 0).any():
        raise ParameterError("residuals holds negative numbers; pass sums of squares.")
    if squares.size < 2 or np.ptp(squares) == 0:
        raise NotEnoughDataError(f"{squares.size} residual(s); at least 2 that differ are needed for a limit.")
    mean, variance = float(squares.mean()), float(squares.var(ddof=1))
    return variance / (2 * mean) * chi_square_quantile(_checked(probability), 2 * mean**2 / variance)


def _sums_of_powers(variances: ArrayLike) -> tuple[float, float, float]:
    values = as_vector("variances", variances)
    if (values < 0).any():
        raise ParameterError("variances holds negative numbers; pass variances of the residual space.")
    if not (values > 0).any():
        raise NotEnoughDataError("no residual variance is above zero: the model leaves nothing of any spectrum.")
    return float(values.sum()), float((values**2).sum()), float((values**3).sum())


def _checked(probability: float) -> float:
    if not 0 < probability < 1:
        raise ParameterError(f"probability = {probability}; expected one inside (0, 1), such as 0.95.")
    return probability
