"""Whether something varies more, or less, from standard to standard than it did before."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.revalidation.change_fit import ROUNDS_ON, fit_changes
from quant.revalidation.change_terms import CURVATURE, OFFSET, SLOPE, VAPOUR, Ground
from quant.revalidation.change_tests import spread_p
from quant.revalidation.change_words import BASELINE_SPREAD, VAPOUR_SPREAD

# What varies, and by which factor each part counts: root mean squares of 1, u and (3u² − 1)/2 over the range.
PARTS: Mapping[str, Mapping[str, float]] = {
    VAPOUR_SPREAD: {VAPOUR: 1.0},
    BASELINE_SPREAD: {OFFSET: 1.0, SLOPE: 3.0**-0.5, CURVATURE: 5.0**-0.5},
}


@dataclass(frozen=True, eq=False)
class Spread:
    """How much something varied before and after.

    Attributes
    ----------
    kind : str
    before, after : float
        Standard deviations between standards. [absorbance]
    error : float
        Standard error of their difference. [absorbance]
    p_value : float
        Probability by chance of two variances as different.
    added : mapping
        By kind of change, how much its variance has grown. [absorbance²]
    """

    kind: str
    before: float
    after: float
    error: float
    p_value: float
    added: Mapping[str, float]


def spreads(
    ground: Ground, before: FloatArray, after: FloatArray, directions: FloatArray, weights: FloatArray
) -> list[Spread]:
    """Compare how vapour and baseline vary between standards, before and after, each against their own mean.

    Parameters
    ----------
    ground : Ground
    before, after : array of shape (n_standards, n_points)
        [absorbance]
    directions : array of shape (n_directions, n_points)
        How spectra differ by composition.
    weights : array of shape (n_points,)
        Of the squared residuals.
    """
    sizes = []
    for rows in (before, after):
        middle = np.broadcast_to(rows.mean(axis=0), rows.shape)
        sizes.append(fit_changes(ground, middle, rows, ground.kinds, directions, weights, rounds=ROUNDS_ON).sizes)
    found = []
    for kind, parts in PARTS.items():
        if not set(parts) <= set(ground.kinds):
            continue
        places = [ground.kinds.index(part) for part in parts]
        then, now = (each[:, places] * np.array(list(parts.values())) for each in sizes)
        before_sd, after_sd = (float(np.sqrt(columns.var(axis=0, ddof=1).sum())) for columns in (then, now))
        variances = [each[:, places].var(axis=0, ddof=1) for each in sizes]
        added = dict(zip(parts, (variances[1] - variances[0]).tolist(), strict=True))
        # Of two standard deviations of n values.
        error = float(np.hypot(before_sd, after_sd) / np.sqrt(2.0 * (len(before) - 1)))
        found.append(Spread(kind, before_sd, after_sd, error, spread_p(then, now), added))
    return found
