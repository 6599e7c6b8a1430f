"""Quantiles of Student's t, F and chi-square, and limits built on them: found in calibrating, stored to predict."""

import math

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from quant.checks import as_vector, name_some, one_of
from quant.errors import NotEnoughDataError, ParameterError


def t_quantile(p: float, dof: float) -> float:
    """Quantile of Student's t.

    Parameters
    ----------
    p : float
        Cumulative probability, inside (0, 1); 0.975 for a two-sided interval of 95 %.
    dof : float
        Degrees of freedom, above 0.

    Raises
    ------
    ParameterError
        `p` is outside (0, 1).
    NotEnoughDataError
        No degree of freedom is left.
    """
    _check_probability(p)
    _check_dof(dof)
    return float(special.stdtrit(dof, p))


def f_quantile(p: float, dof_above: float, dof_below: float) -> float:
    """Quantile of F, `dof_above` belonging to the numerator.

    Raises
    ------
    ParameterError
        `p` is outside (0, 1).
    NotEnoughDataError
        No degree of freedom is left above or below.
    """
    _check_probability(p)
    _check_dof(dof_above)
    _check_dof(dof_below)
    return float(special.fdtri(dof_above, dof_below, p))


def chi_square_quantile(p: float, dof: float) -> float:
    """Quantile of chi-square.

    Raises
    ------
    ParameterError
        `p` is outside (0, 1).
    NotEnoughDataError
        No degree of freedom is left.
    """
    _check_probability(p)
    _check_dof(dof)
    return 2.0 * float(special.gammaincinv(dof / 2, p))


def t_two_sided_p(t: float, dof: float) -> float:
    """Probability that Student's t is at least |t| away from zero.

    Raises
    ------
    NotEnoughDataError
        No degree of freedom is left.
    """
    _check_dof(dof)
    return 2.0 * float(special.stdtr(dof, -abs(t)))


def rmse_confidence_interval(value: float, n_samples: int, probability: float = 0.95) -> tuple[float, float]:
    """Interval for the true root mean square error behind an RMSEP.

    Assumes independent, normal errors of mean zero, so that n·RMSEP²/σ² is chi-square with n degrees of freedom. A bias
    makes the interval too wide; errors of cross-validation are not independent, and make it too narrow.

    Parameters
    ----------
    value : float
        RMSEP. [unit of the analyte]
    n_samples : int
        Number of samples behind it, at least 1.
    probability : float
        Two-sided, inside (0, 1).

    Returns
    -------
    tuple of float
        value·sqrt(n/χ²(1 - α/2, n)) and value·sqrt(n/χ²(α/2, n)). [unit of the analyte]

    Raises
    ------
    NotEnoughDataError
        No sample.
    ParameterError
        A negative or non-finite value, or a probability outside (0, 1).
    """
    if not (math.isfinite(value) and value >= 0):
        raise ParameterError(f"a root mean square error of {value} was given; expected a finite number, 0 or more.")
    tail = (1 - probability) / 2
    below, above = (chi_square_quantile(p, n_samples) for p in (1 - tail, tail))
    return value * math.sqrt(n_samples / below), value * math.sqrt(n_samples / above)


def upper_limit(values: ArrayLike, n_units: int, probability: float, scale: str = "cube_root") -> float:
    """Limit that a new value of a skewed, non-negative quantity stays under with the given probability.

    On a scale where the values are nearly normal the limit is the one-sided prediction limit
    m + t(probability, n_units - 1)·s·sqrt(1 + 1/n_units), with m and s mean and standard deviation (divided by the
    number of values less one). The cube root makes a chi-square-like quantity nearly normal [1]_; the logarithm is for
    sums of a few effects of very different size, whose upper tail is longer (common practice).

    Parameters
    ----------
    values : array of shape (n_values,)
        Leverages or spectral residuals of left-out samples, not negative.
    n_units : int
        Number of independent units behind the values (samples, or batches of samples that are alike), at least 2.
    probability : float
        Inside (0, 1), such as 0.95.
    scale : {"cube_root", "logarithm"}

    Raises
    ------
    ParameterError
        A negative value (or zero, for the logarithm), another scale, or a probability outside (0, 1).
    NotEnoughDataError
        Fewer than two values or units.

    References
    ----------
    .. [1] E.B. Wilson, M.M. Hilferty, The distribution of chi-square, PNAS 17 (1931) 684-688 (from memory).
    """
    vector = as_vector("values", values)
    logarithm = one_of("scale", scale, ("cube_root", "logarithm")) == "logarithm"
    wrong = np.flatnonzero(vector <= 0 if logarithm else vector < 0)
    if wrong.size:
        raise ParameterError(
            f"{wrong.size} value(s) are {'not above' if logarithm else 'below'} zero, at position(s) "
            f"{name_some(wrong)}; the limit is for leverages, squared residuals and the like."
        )
    if min(vector.size, n_units) < 2:
        raise NotEnoughDataError(
            f"{vector.size} value(s) of {n_units} unit(s); at least 2 independent units are needed for a limit."
        )
    scaled = np.log(vector) if logarithm else np.cbrt(vector)
    reach = t_quantile(probability, n_units - 1) * np.sqrt(1 + 1 / n_units)
    limit = float(scaled.mean() + reach * scaled.std(ddof=1))
    return float(np.exp(limit)) if logarithm else limit**3


def _check_probability(p: float) -> None:
    if not 0 < p < 1:
        raise ParameterError(f"a probability of {p} was asked for; expected one inside (0, 1), such as 0.975.")


def _check_dof(dof: float) -> None:
    if not dof > 0:
        raise NotEnoughDataError(f"{dof} degrees of freedom are left; more samples or fewer factors are needed.")
