"""The check sample over the months: individuals chart, EWMA, and when a drift began.

Limits come from the precision that the validation found, never from the values judged: a chart whose limits are taken
from a drifting instrument drifts along.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector
from quant.errors import NotEnoughDataError, ParameterError, SampleMismatchError
from quant.result import Result, documented
from quant.text_table import Row, format_rows

SIGMAS = 3.0  # of the individuals chart; the one rule there is by default
LAMBDA, EWMA_WIDTH = 0.2, 2.86  # of the EWMA; together an in-control run length of about 370 [from memory: Montgomery]
DATED_AT = 0.01  # risk of dating a change that is none
LIKELIHOOD_95 = 7.35  # 95 % set of a change point: -2 ln(1 - √0.95) [from memory: Bai 1997, Hansen 2000]
SIMULATIONS, SEED = 4000, 20260301
FEWEST_FOR_A_DATE = 6


@dataclass(frozen=True, kw_only=True)
class DatedChange(Result):
    """When the mean moved, and by how much."""

    first: int = documented("Position of the first value after the change, counted from 0")
    label: str = documented("Its label: the date, where labels are dates")
    earliest: int = documented("Earliest position of the 95 % set")
    latest: int = documented("Latest position of it")
    earliest_label: str = documented("Label of the earliest position")
    latest_label: str = documented("Label of the latest position")
    size: float = documented("Mean after minus mean before", "unit of the values")
    p: float = documented("Probability of so clear a change by chance, over all positions")


@dataclass(frozen=True, kw_only=True, eq=False)
class ControlChart(Result):
    """Individuals chart and EWMA of one check sample."""

    labels: tuple[str, ...] = documented("One a value, such as its date")
    values: FloatArray = documented("Values in the order of time", "unit of the values")
    target: float = documented("Where they belong", "unit of the values")
    sd: float = documented("Standard deviation from the validation", "unit of the values")
    sd_source: str = documented("Where that comes from")
    low: float = documented("Lower limit of a single value", "unit of the values")
    high: float = documented("Upper limit of it", "unit of the values")
    ewma: FloatArray = documented("Exponentially weighted mean, lambda 0.2, begun at the target", "unit of the values")
    ewma_half: FloatArray = documented("Half width of its limits, L 2.86", "unit of the values")
    beyond: tuple[int, ...] = documented("Positions beyond the limits of a single value")
    ewma_beyond: tuple[int, ...] = documented("Positions where the EWMA is beyond its limits")
    change: DatedChange | None = documented("When the mean moved; none where no change is significant")

    @property
    def in_control(self) -> bool:
        """Whether neither chart shows anything."""
        return not self.beyond and not self.ewma_beyond

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        found: list[Row] = [
            ("values", self.values.size, ""),
            ("target", self.target, ""),
            (f"standard deviation ({self.sd_source})", self.sd, ""),
            ("beyond 3 standard deviations", len(self.beyond), ""),
            ("EWMA beyond its limits", len(self.ewma_beyond), ""),
        ]
        if self.change is not None:
            found += [
                ("the mean moved by", self.change.size, ""),
                ("first seen at", self.change.label, ""),
                ("95 % interval", f"{self.change.earliest_label} to {self.change.latest_label}", ""),
            ]
        return found

    def __str__(self) -> str:
        """Whether in control, then the rows."""
        return f"Control chart: {'in control' if self.in_control else 'out of control'}\n{format_rows(self.rows())}"


def control_chart(
    values: ArrayLike,
    sd: float,
    *,
    target: float = 0.0,
    labels: Sequence[str] | None = None,
    sd_source: str = "validation",
) -> ControlChart:
    """Chart the values of a check sample, such as predicted - reference at each check.

    Parameters
    ----------
    values : array of shape (n,)
        In the order of time. [any unit]
    sd : float
        Standard deviation of one value by intermediate precision, from the validation. [unit of the values]
    target : float
        Where the values belong. [unit of the values]
    labels : sequence of str, optional
        One a value, such as its date; default: 1, 2, 3 ...
    sd_source : str
        Where `sd` comes from.

    Raises
    ------
    ParameterError
        A standard deviation that is not above zero.
    SampleMismatchError
        Another number of labels than of values.
    NotEnoughDataError
        No value.

    References
    ----------
    .. [1] S.W. Roberts, Technometrics 1 (1959) 239; J.M. Lucas, M.S. Saccucci, Technometrics 32 (1990) 1; from memory.
    """
    x = as_vector("values", values)
    if not x.size:
        raise NotEnoughDataError("No value to chart; expected one or more.")
    if not (math.isfinite(sd) and sd > 0):
        raise ParameterError(f"sd = {sd}; expected the standard deviation of one value, above zero.")
    names = tuple(map(str, range(1, x.size + 1))) if labels is None else tuple(map(str, labels))
    if len(names) != x.size:
        raise SampleMismatchError(f"{len(names)} labels for {x.size} values; expected one each.")
    smoothed, half = _ewma(x, target, sd)
    return ControlChart(
        labels=names,
        values=x,
        target=target,
        sd=sd,
        sd_source=sd_source,
        low=target - SIGMAS * sd,
        high=target + SIGMAS * sd,
        ewma=smoothed,
        ewma_half=half,
        beyond=tuple(np.flatnonzero(np.abs(x - target) > SIGMAS * sd).tolist()),
        ewma_beyond=tuple(np.flatnonzero(np.abs(smoothed - target) > half).tolist()),
        change=_change(x, sd, names),
    )


def _ewma(x: FloatArray, target: float, sd: float) -> tuple[FloatArray, FloatArray]:
    smoothed, last = np.empty_like(x), target
    for i, value in enumerate(x.tolist()):
        last = smoothed[i] = LAMBDA * value + (1 - LAMBDA) * last
    share = LAMBDA / (2 - LAMBDA) * (1 - (1 - LAMBDA) ** (2 * np.arange(1, x.size + 1)))
    return smoothed, EWMA_WIDTH * sd * np.sqrt(share)


def _change(x: FloatArray, sd: float, labels: tuple[str, ...]) -> DatedChange | None:
    if x.size < FEWEST_FOR_A_DATE:
        return None
    statistic = _gains(x[None, :] / sd)[0]
    best = int(np.argmax(statistic))
    p = (1 + np.count_nonzero(_by_chance(x.size) >= statistic[best])) / (1 + SIMULATIONS)
    if p > DATED_AT:
        return None
    near = np.flatnonzero(statistic[best] - statistic <= LIKELIHOOD_95)
    first, earliest, latest = best + 1, int(near[0]) + 1, int(near[-1]) + 1
    return DatedChange(
        first=first,
        label=labels[first],
        earliest=earliest,
        latest=latest,
        earliest_label=labels[earliest],
        latest_label=labels[latest],
        size=float(x[first:].mean() - x[:first].mean()),
        p=float(p),
    )


def _gains(rows: FloatArray) -> FloatArray:
    """Twice the gain of log likelihood by a step behind each position, shape (n_rows, n - 1)."""
    n = rows.shape[1]
    k = np.arange(1, n)
    left = np.cumsum(rows, axis=1)
    before, after = left[:, :-1] / k, (left[:, -1:] - left[:, :-1]) / (n - k)
    gains: FloatArray = (after - before) ** 2 * k * (n - k) / n
    return gains


@lru_cache(maxsize=32)
def _by_chance(n: int) -> FloatArray:
    """The largest gain in rows of pure chance, shape (SIMULATIONS,)."""
    rows = np.random.default_rng(SEED).standard_normal((SIMULATIONS, n))
    return np.asarray(_gains(rows).max(axis=1))
