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

from quant.arrays import FloatArray
from quant.inspection.left_out import Smoother, best_smoother, studentised

FEWEST = 8  # samples
SIMULATIONS = 499
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
    """Return S (see the module) and the best pair."""
    mended, exchanged = np.inf, np.inf
    pair = (0, 1)
    difference = values[None, :] - values[:, None]  # what is added to i and taken from j when they exchange
    for smoother in smoothers:
        diagonal = np.diagonal(smoother.gram)
        slope = smoother.gram @ values
        press = float(values @ slope)
        mended = min(mended, press - float(np.max(slope**2 / diagonal)))
        # |M(y + d(u_i − u_j))|² = PRESS + 2d(g_i − g_j) + d²(A_ii + A_jj − 2A_ij), g = M'M·y, A = M'M
        after = difference * (
            2 * (slope[:, None] - slope[None, :])
            + difference * (diagonal[:, None] + diagonal[None, :] - 2 * smoother.gram)
        )
        place = int(np.argmin(after))
        least = press + float(after.flat[place])
        if least < exchanged:
            exchanged = least
            i, j = divmod(place, values.size)
            pair = (min(i, j), max(i, j))
    tiny = np.finfo(float).tiny
    return float(np.log(max(mended, tiny)) - np.log(max(exchanged, tiny))), pair


def _chance(
    smoothers: Sequence[Smoother],
    mended: FloatArray,
    statistic: float,
    false_alarm: float,
    rng: np.random.Generator,
) -> float:
    """Share of simulated clean sets whose S is as large; stops when it is plainly above the false-alarm rate."""
    best = best_smoother(smoothers, mended)
    fitted = best.hat @ mended
    errors = studentised(best, mended)
    errors = (
        (errors - errors.mean())
        * np.sqrt(errors.size / max(errors.size - best.freedom, 1.0))
        * np.sqrt(np.mean(1.0 - np.diagonal(best.hat)))
    )
    enough = int(false_alarm * (SIMULATIONS + 1)) + 1
    as_large = 0
    for done in range(1, SIMULATIONS + 1):
        drawn = fitted + rng.choice(errors, errors.size)
        as_large += exchange_statistic(smoothers, drawn)[0] >= statistic
        if as_large >= enough:
            return as_large / done
    return (as_large + 1) / (SIMULATIONS + 1)


def _root(smoothers: Sequence[Smoother], values: FloatArray) -> float:
    return float(np.sqrt(min(np.mean((each.errors @ values) ** 2) for each in smoothers)))
