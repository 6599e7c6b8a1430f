"""Exchanged labels: the pair of samples whose values, exchanged, fit the spectra far better.

For each pair the two values are exchanged and PRESS (the sum of squared left-out errors) is computed again, with the
best strength of the ridge before and after. The statistic is ::

    S = log( smallest PRESS after mending any one value / smallest PRESS after exchanging any one pair )

Mending one value (replacing it by what suits the spectra best) is the rival explanation: one wrong value also improves
by an exchange with a sample half-way, but better by mending. A true exchange leaves two wrong values, of which mending
helps one only.

What S is by chance is simulated: values as the spectra explain them, plus errors drawn from those found. It stops as
soon as it is plain that chance reaches the observed S too often (Besag & Clifford 1991, from memory).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.inspection.left_out import Smoother, best_smoother, studentised

FEWEST = 8  # samples
SIMULATIONS = 499
MOST_NUMBERS = 500_000  # in one array of pairs: stays in the cache
MOST_PAIRS = 5  # exchanged pairs looked for, one after the other


@dataclass(frozen=True)
class Exchange:
    """A pair of samples whose labels are probably exchanged.

    Attributes
    ----------
    first, second : int
        Positions of the samples.
    p : float
        Share of simulated clean sets that look as bad.
    before, after : float
        Root mean square left-out error as the values are, and with the pair exchanged. [unit of the analyte]
    """

    first: int
    second: int
    p: float
    before: float
    after: float


def find_exchanges(
    smoothers: Sequence[Smoother], values: FloatArray, false_alarm: float, seed: int = 0
) -> tuple[list[Exchange], FloatArray]:
    """Return pairs that are probably exchanged, the plainest first, and the values with these exchanges undone.

    Parameters
    ----------
    smoothers : sequence of Smoother
        Of the samples' spectra.
    values : array of shape (n,)
        Reference values. [unit of the analyte]
    false_alarm : float
        Share of clean sets in which a pair may be named.
    seed : int
        Of the simulation.
    """
    found: list[Exchange] = []
    current = values
    if values.size < FEWEST or not smoothers or np.ptp(values) == 0:
        return found, current
    rng = np.random.default_rng(seed)
    while len(found) < MOST_PAIRS:
        statistic, (i, j) = exchange_statistic(smoothers, current)
        swapped = current.copy()
        swapped[[i, j]] = current[[j, i]]
        if statistic <= 0:
            break
        p = _chance(smoothers, swapped, statistic, false_alarm, rng)
        if p > false_alarm:
            break
        found.append(Exchange(i, j, p, _root(smoothers, current), _root(smoothers, swapped)))
        current = swapped
    return found, current


def exchange_statistic(smoothers: Sequence[Smoother], values: FloatArray) -> tuple[float, tuple[int, int]]:
    """Return S (see the module) and the best pair, for values of shape (n,)."""
    statistics, places = _statistics(smoothers, values[None, :])
    i, j = divmod(int(places[0]), values.size)
    return float(statistics[0]), (min(i, j), max(i, j))


def _statistics(smoothers: Sequence[Smoother], rows: FloatArray) -> tuple[FloatArray, IntArray]:
    """Return S and the place i·n + j of the best pair for each row of values, shape (m, n)."""
    m = len(rows)
    mended, exchanged = np.full(m, np.inf), np.full(m, np.inf)
    places = np.zeros(m, dtype=np.intp)
    difference = rows[:, None, :] - rows[:, :, None]  # what is added to i and taken from j when they exchange
    for smoother in smoothers:
        diagonal = np.diagonal(smoother.gram)
        slope = rows @ smoother.gram
        press = np.einsum("mn,mn->m", rows, slope)
        mended = np.minimum(mended, press - np.max(slope**2 / diagonal, axis=1))
        # |M(y + d(u_i − u_j))|² = PRESS + 2d(g_i − g_j) + d²(A_ii + A_jj − 2A_ij), g = M'M·y, A = M'M
        after = difference * (diagonal[:, None] + diagonal[None, :] - 2 * smoother.gram)
        after += 2 * (slope[:, :, None] - slope[:, None, :])
        after *= difference
        flat = after.reshape(m, -1)
        place = np.argmin(flat, axis=1)
        least = press + flat[np.arange(m), place]
        places = np.where(least < exchanged, place, places)
        exchanged = np.minimum(least, exchanged)
    tiny = np.finfo(float).tiny
    return np.log(np.maximum(mended, tiny)) - np.log(np.maximum(exchanged, tiny)), places


def _chance(
    smoothers: Sequence[Smoother],
    mended: FloatArray,
    statistic: float,
    false_alarm: float,
    rng: np.random.Generator,
) -> float:
    """Share of simulated clean sets whose S is as large; stops when it is plainly above the false-alarm rate."""
    best = best_smoother(smoothers, mended)
    fitted, errors = best.hat @ mended, studentised(best, mended)
    # Drawn errors have the variance Σr²/(n − freedom) of the fit's residuals r.
    variance = float(np.sum((mended - fitted) ** 2)) / max(mended.size - best.freedom, 1.0)
    errors = errors - errors.mean()
    errors *= np.sqrt(variance / max(float(np.mean(errors**2)), np.finfo(float).tiny))
    enough = int(false_alarm * (SIMULATIONS + 1)) + 1
    together = max(1, min(25, MOST_NUMBERS // mended.size**2))
    as_large = done = 0
    while done < SIMULATIONS:
        count = min(together, SIMULATIONS - done)
        drawn = fitted + rng.choice(errors, (count, errors.size))
        as_large += int(np.sum(_statistics(smoothers, drawn)[0] >= statistic))
        done += count
        if as_large >= enough:
            return as_large / done
    return (as_large + 1) / (SIMULATIONS + 1)


def _root(smoothers: Sequence[Smoother], values: FloatArray) -> float:
    return float(np.sqrt(min(np.mean((each.errors @ values) ** 2) for each in smoothers)))
