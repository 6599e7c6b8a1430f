"""Which of many numbers stand out, at a false-alarm rate stated for all of them together."""

from functools import lru_cache

import numpy as np

from quant.arrays import FloatArray, IntArray

FALSE_ALARM = 0.02
"""Share of clean sets in which a check that compares samples with each other may name any of them."""

TO_SD = 1.4826  # standard deviation of a normal distribution over its median absolute deviation
FEWEST = 8  # fewer numbers do not tell what is usual
_SIMULATED = 4000


def robust_sd(values: FloatArray) -> float:
    """Return 1.4826 times the median absolute deviation from the median."""
    return float(TO_SD * np.median(np.abs(values - np.median(values))))


def robust_z(values: FloatArray) -> FloatArray:
    """Return (value − median)/(1.4826 MAD); zeros where more than half of the values are equal, shape (n,)."""
    spread = robust_sd(values)
    return (values - np.median(values)) / spread if spread > 0 else np.zeros_like(values)


@lru_cache(maxsize=64)
def largest_z(n: int, false_alarm: float = FALSE_ALARM, *, both_sides: bool = False) -> float:
    """Return what the largest `robust_z` of n normal numbers exceeds at a rate of `false_alarm`.

    Found by simulation (4000 sets, fixed seed), because median and MAD of few numbers are uncertain themselves.

    Parameters
    ----------
    n : int
        How many numbers are compared.
    false_alarm : float
        Share of sets of n normal numbers in which the largest may exceed the limit.
    both_sides : bool
        Judge absolute values.
    """
    drawn = np.random.default_rng(n).standard_normal((_SIMULATED, n))
    drawn -= np.median(drawn, axis=1, keepdims=True)
    drawn /= TO_SD * np.median(np.abs(drawn), axis=1, keepdims=True)
    largest = (np.abs(drawn) if both_sides else drawn).max(axis=1)
    return float(np.quantile(largest, 1 - false_alarm))


def standing_out(
    values: FloatArray, false_alarm: float = FALSE_ALARM, *, least_ratio: float = 1.0, usual: int | None = None
) -> IntArray:
    """Return the positions of positive numbers that are too large to belong to the others, the largest first.

    Logarithms of sums of squares are close to normal; the limit is that of `largest_z` for them. A number has to be
    `least_ratio` times the median, too: what is rare may still be small.

    Parameters
    ----------
    values : array of shape (n,)
        Sums of squares, noise levels and the like.
    false_alarm : float
        For all n together.
    least_ratio : float
        Smallest multiple of the median that is worth naming.
    usual : int, optional
        The first so many numbers say what is usual; default: all.
    """
    n = values.size
    first = values[:usual]
    middle = float(np.median(first)) if first.size else 0.0
    if first.size < FEWEST or middle <= 0:
        return np.zeros(0, dtype=np.intp)
    logs = np.log(np.maximum(values, 1e-9 * middle))
    spread = robust_sd(logs[:usual])
    # New numbers are judged as the first are: each with its share of the false alarms.
    limit = largest_z(first.size, false_alarm * first.size / n)
    out = np.flatnonzero((logs - np.log(middle) > limit * spread) & (values > least_ratio * middle) & (spread > 0))
    return out[np.argsort(-values[out], kind="stable")]
