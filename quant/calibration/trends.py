"""Whether errors of left-out samples drift: with value, order and the columns of notes (operator, batch, date)."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from scipy import special

from quant.arrays import FloatArray
from quant.errors import NotEnoughDataError
from quant.result import Result, documented
from quant.statistics.quantiles import t_two_sided_p
from quant.statistics.straight_line import fit_line

ALPHA = 0.05  # shared by all trends of one calibration (Bonferroni)
FEWEST_IN_GROUP = 2.0  # samples a group on average: a note that tells almost every sample apart is no group
NUMBERS_FROM = 6  # different numbers from which a column is taken for a quantity, not for groups


@dataclass(frozen=True, kw_only=True)
class Trend(Result):
    """One look at the errors."""

    against: str = documented("What the errors were held against")
    test: str = documented("t test of a slope, or F test of the groups' means")
    statistic: float = documented("t or F")
    p: float = documented("Probability of a statistic this large by chance")
    n_groups: int | None = documented("Number of groups, for the F test")
    significant: bool = documented("Whether p is below 0.05 divided by the number of looks")


def find_trends(
    errors: FloatArray, predicted: FloatArray, notes: Sequence[Mapping[str, str]], ignored: Sequence[str] = ()
) -> tuple[Trend, ...]:
    """Hold errors of left-out samples against predicted value, order, and every note that all samples have.

    The predicted and not the reference value is taken: errors of inverse predictions (PLS) always fall with the
    reference value, since that holds its own error.

    Parameters
    ----------
    errors, predicted : arrays of shape (n_samples,)
        Of left-out samples. [unit of the analyte]
    notes : sequence of mappings
        One row of notes a sample, in the order of the samples.
    ignored : sequence of str
        Notes that are not looked at.
    """
    looks: list[tuple[str, FloatArray | Sequence[str]]] = [
        ("predicted value", predicted),
        ("order of the samples", np.arange(errors.size, dtype=np.float64)),
    ]
    patterns: set[bytes] = set()  # a date and the batch of that date part the samples alike: one look is enough
    common = [key for key in (notes[0] if notes else {}) if all(row.get(key) for row in notes)]
    for key in common:
        column = [row[key] for row in notes]
        pattern = np.unique(np.array(column), return_inverse=True)[1].tobytes()
        if key in ignored or len(set(column)) < 2 or pattern in patterns:
            continue
        patterns.add(pattern)
        numbers = _numbers(column)
        looks.append((f"note {key}", column if numbers is None else numbers))
    found = [trend for against, marks in looks if (trend := _look(against, marks, errors)) is not None]
    return tuple(
        Trend(against=a, test=test, statistic=statistic, p=p, n_groups=groups, significant=p < ALPHA / len(found))
        for a, test, statistic, p, groups in found
    )


def _numbers(column: Sequence[str]) -> FloatArray | None:
    """A column of at least six different numbers, as numbers."""
    try:
        numbers = np.array([float(text) for text in column])
    except ValueError:
        return None
    return numbers if np.isfinite(numbers).all() and np.unique(numbers).size >= NUMBERS_FROM else None


def _look(
    against: str, marks: FloatArray | Sequence[str], errors: FloatArray
) -> tuple[str, str, float, float, int | None] | None:
    if isinstance(marks, np.ndarray):
        try:
            line = fit_line(marks, errors)
        except NotEnoughDataError:
            return None
        if line.degrees_of_freedom < 1 or line.slope_sd == 0:
            return None
        t = line.slope / line.slope_sd
        return against, "slope, t", t, t_two_sided_p(t, line.degrees_of_freedom), None
    group = np.unique(np.array(marks), return_inverse=True)[1]
    count = np.bincount(group)
    within_freedom, between_freedom = errors.size - count.size, count.size - 1
    if errors.size < FEWEST_IN_GROUP * count.size or within_freedom < 1:
        return None
    means = np.bincount(group, weights=errors) / count
    within = float(np.sum((errors - means[group]) ** 2)) / within_freedom
    between = float(count @ (means - errors.mean()) ** 2) / between_freedom
    if within == 0:
        return None
    p = float(special.fdtrc(between_freedom, within_freedom, between / within))
    return against, "groups, F", between / within, p, int(count.size)
