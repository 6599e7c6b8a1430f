"""What a number of standards could show: answered from earlier scatter, never from the data judged.

Two questions are kept apart: how small a bias the tests would find, and how likely "holds" is said of an instrument
that did not change.
"""

import math
from functools import lru_cache
from typing import Any

import numpy as np
from scipy import optimize, stats

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.revalidation.equivalence import FAMILY, FAMILY_RISK, LEAST_STANDARDS, RISK, upper_factor
from quant.revalidation.judgements import Power

CHANCE = 0.90  # that statements of power are made for
MOST_STANDARDS = 200  # more are not proposed
QUADRATURE = 2000  # equally likely values of s


def power_of(
    n_samples: int,
    *,
    sd: float,
    sd_source: str,
    sep: float,
    allowed_bias: float,
    allowed_sep: float,
    paired: bool,
) -> Power:
    """State what so many standards can show.

    Parameters
    ----------
    n_samples : int
        Standards, two at least.
    sd : float
        Standard deviation of one difference (paired), else of one error, from earlier data. [unit of the analyte]
    sd_source : str
        Which earlier data.
    sep : float
        Validated SEP. [unit of the analyte]
    allowed_bias, allowed_sep : float
        [unit of the analyte]
    paired : bool
        Whether bias is judged by differences of the same standards, whose scatter is not that of the errors.
    """
    known: dict[str, Any] = {"sd": sd, "sep": sep, "allowed_bias": allowed_bias, "allowed_sep": allowed_sep}
    known["paired"] = paired
    return Power(
        n_samples=n_samples,
        sd=sd,
        sd_source=sd_source,
        chance=CHANCE,
        smallest_bias=smallest_bias(n_samples, sd),
        chance_of_holds=chance_of_holds(n_samples, **known),
        needed=standards_needed(**known),
    )


def smallest_bias(n_samples: int, sd: float, chance: float = CHANCE) -> float:
    """Return the smallest bias that the family of tests finds with a chance (or better: Holm's first step is counted).

    Parameters
    ----------
    n_samples : int
    sd : float
        Of one difference. [unit of the analyte]
    chance : float

    References
    ----------
    .. [1] Power of Student's test by the noncentral t distribution; any textbook.
    """
    freedom = n_samples - 1
    critical = float(stats.t.isf(FAMILY_RISK / len(FAMILY) / 2, freedom))

    def lacking(noncentrality: float) -> float:
        return float(stats.nct.sf(critical, freedom, noncentrality)) - chance

    return float(optimize.brentq(lacking, 0.0, 10 * critical + 10)) * sd / math.sqrt(n_samples)


def chance_of_holds(
    n_samples: int,
    *,
    sd: float,
    sep: float,
    allowed_bias: float,
    allowed_sep: float,
    paired: bool,
    bias: float = 0.0,
) -> float:
    """Return the chance that bias and scatter are both shown to be smaller than allowed.

    Paired, the two are counted as independent; otherwise they share the scatter found, which is integrated over.

    Parameters
    ----------
    n_samples : int
    sd, sep, allowed_bias, allowed_sep : float
        As `power_of` takes them. [unit of the analyte]
    paired : bool
    bias : float
        The true one. [unit of the analyte]
    """
    ratio = _scatter(n_samples)
    found = sd * ratio  # equally likely values of the standard deviation found
    half = float(stats.t.ppf(1 - RISK, n_samples - 1)) * found / math.sqrt(n_samples)
    error = sd / math.sqrt(n_samples)
    room = np.maximum(allowed_bias - half, 0.0)
    inside = np.where(room > 0, stats.norm.cdf((room - bias) / error) - stats.norm.cdf((-room - bias) / error), 0.0)
    enough = sep * ratio * upper_factor(n_samples) < allowed_sep
    if paired:
        return float(inside.mean() * enough.mean())
    return float((inside * enough).mean())


def standards_needed(
    *, sd: float, sep: float, allowed_bias: float, allowed_sep: float, paired: bool, chance: float = CHANCE
) -> int | None:
    """Return how many standards let "holds" be said of an unchanged instrument with a chance; None beyond 200.

    Parameters
    ----------
    sd, sep, allowed_bias, allowed_sep, paired
        As `power_of` takes them.
    chance : float

    Raises
    ------
    ParameterError
        A chance outside (0, 1).
    """
    if not 0 < chance < 1:
        raise ParameterError(f"chance = {chance}; expected a probability inside (0, 1).")

    def too_few(n: int) -> bool:
        found = chance_of_holds(n, sd=sd, sep=sep, allowed_bias=allowed_bias, allowed_sep=allowed_sep, paired=paired)
        return found < chance

    low, high = LEAST_STANDARDS - 1, MOST_STANDARDS
    if too_few(high):
        return None
    while high - low > 1:  # the chance grows with the number of standards
        middle = (low + high) // 2
        low, high = (middle, high) if too_few(middle) else (low, middle)
    return high


@lru_cache(maxsize=256)
def _scatter(n_samples: int) -> FloatArray:
    """Equally likely values of s/σ, shape (QUADRATURE,)."""
    share = (np.arange(QUADRATURE) + 0.5) / QUADRATURE
    return np.asarray(np.sqrt(stats.chi2.ppf(share, n_samples - 1) / (n_samples - 1)))
