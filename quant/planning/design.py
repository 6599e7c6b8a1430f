"""The design itself: standards, and validation samples between them."""

import itertools
import math

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.errors import ParameterError
from quant.planning.criterion import correlations
from quant.planning.exchange import inner_design, latin_design
from quant.planning.region import Region, decimals_of

VALIDATION_MARGIN = 0.02  # of each range, left free at both ends: inside the standards, and still 96 % of the range
_ORDERS = 200  # random orders of preparation tried
_MOST_COUNTED = 1_000_000


def design_standards(region: Region, n: int, seed: int) -> FloatArray:
    """Return n standards that decorrelate the components and fill the region.

    Parameters
    ----------
    region : Region
        k varied components.
    n : int
        Number of standards.
    seed : int
        Same seed, same design.

    Returns
    -------
    array of shape (n, k)
        Concentrations in the order of preparation, random and as little correlated with the components as can be, so
        that a drift does not look like a concentration. [unit]

    Raises
    ------
    ParameterError
        The levels allow fewer different mixtures than standards.
    """
    _check_distinct(region, n)
    rng = np.random.default_rng([seed, 0])
    nothing = np.empty((0, len(region.names)))
    if region.is_box:
        points = latin_design(n, region.levels, 0.0, nothing, rng)
    else:
        points = inner_design(region, n, 0.0, nothing, rng)
    return round_amounts(region, points)[_order(points, rng)]


def design_validation(region: Region, n: int, standards: FloatArray, seed: int) -> FloatArray:
    """Return n validation samples that fill the space between the standards.

    They are free of levels, stay inside the range of the standards and span 96 % of it.

    Parameters
    ----------
    region : Region
        k varied components.
    n : int
        Number of samples; 0 gives none.
    standards : array of shape (n_standards, k)
        Concentrations. [unit]
    seed : int
        Same seed, same design.

    Returns
    -------
    array of shape (n, k)
        Concentrations in the order of preparation. [unit]
    """
    if n == 0:
        return np.empty((0, len(region.names)))
    rng = np.random.default_rng([seed, 1])
    space, fixed = region.free_of_levels(), region.scaled(standards)
    if space.is_box:
        points = latin_design(n, space.levels, VALIDATION_MARGIN, fixed, rng)
    else:
        points = inner_design(space, n, VALIDATION_MARGIN, fixed, rng)
    return round_amounts(space, points)[_order(points, rng)]


def round_amounts(region: Region, points: FloatArray) -> FloatArray:
    """Return concentrations [unit] of scaled points, in decimals that can be weighed where that breaks no limit."""
    amounts = region.amounts(points)
    for c in range(amounts.shape[1]):
        if region.levels[c] is None:
            rounded = np.clip(amounts[:, c].round(decimals_of(region.span[c])), region.low[c], region.high[c])
            ends = (points[:, c] == 0) | (points[:, c] == 1)
            for i in np.flatnonzero(~ends):
                changed = points[i].copy()
                changed[c] = (rounded[i] - region.low[c]) / region.span[c]
                if region.contains(changed[None, :]):
                    amounts[i, c], points[i, c] = rounded[i], changed[c]
    return amounts.round(12)


def _order(points: FloatArray, rng: np.random.Generator) -> IntArray:
    orders = [rng.permutation(len(points)) for _ in range(_ORDERS)]
    number = np.arange(len(points), dtype=np.float64)
    worst = [np.abs(correlations(np.column_stack([number, points[order]]))[0, 1:]).max() for order in orders]
    return orders[int(np.argmin(worst))]


def _check_distinct(region: Region, n: int) -> None:
    counts = [count for count in region.levels if count is not None]
    if len(counts) < len(region.levels) or math.prod(counts) > _MOST_COUNTED:
        return
    grid = np.array(list(itertools.product(*(np.arange(count) / (count - 1) for count in counts))))
    possible = int((grid @ region.A.T <= region.b + 1e-9).all(axis=1).sum())
    if possible < n:
        raise ParameterError(
            f"The levels and constraints allow {possible} different mixtures, but {n} standards were asked for; "
            "expected no more standards than mixtures. Raise the levels, or leave them out for some component."
        )
