"""Repeated determinations of one sample become one value."""

from collections.abc import Mapping, Sequence
from typing import NamedTuple

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.spectra.reference_table import Analyte, Repeatability
from quant.statistics.repeatability import pooled_standard_deviation


class Averaged(NamedTuple):
    """One row a sample, in the order of first appearance; arrays of shape (n_samples, n_analytes)."""

    sample_ids: list[str]
    values: FloatArray
    limits: FloatArray
    determinations: IntArray
    notes: list[dict[str, str]]
    repeatability: dict[str, Repeatability]


def average_repeats(
    sample_ids: Sequence[str],
    analytes: Sequence[Analyte],
    values: FloatArray,
    limits: FloatArray,
    notes: Sequence[Mapping[str, str]],
) -> Averaged:
    """Average the rows of each sample, analyte by analyte.

    Cells without a value do not count. Where one determination of several is only known to lie below a limit, so is
    their mean: below the mean of limits and values together. Such samples tell nothing of repeatability. Notes are
    kept where all rows of a sample agree.

    Parameters
    ----------
    sample_ids : sequence of n_rows str
    analytes : sequence of Analyte
    values, limits : arrays of shape (n_rows, n_analytes)
        Values, and upper limits of those that are only known to lie below one; NaN where there is none.
        [unit of each analyte]
    notes : sequence of n_rows mappings
    """
    numbers: dict[str, int] = {}
    index = np.array([numbers.setdefault(sample, len(numbers)) for sample in sample_ids], dtype=np.intp)
    upper = np.where(np.isnan(limits), values, limits)
    known = np.isfinite(upper)
    count, total, below = (np.zeros((len(numbers), len(analytes))) for _ in range(3))
    np.add.at(count, index, known)
    np.add.at(total, index, np.where(known, upper, 0.0))
    np.add.at(below, index, np.isfinite(limits))
    mean = np.divide(total, count, out=np.full_like(total, np.nan), where=count > 0)
    repeatability = {}
    for column, analyte in enumerate(analytes):
        plain = known[:, column] & (below[index, column] == 0)
        spread, freedom = pooled_standard_deviation(values[plain, column], index[plain])
        if freedom:
            several = int((np.bincount(index[plain]) > 1).sum())
            repeatability[analyte.name] = Repeatability(spread, freedom, several)
    rows: list[list[Mapping[str, str]]] = [[] for _ in numbers]
    for number, row in zip(index.tolist(), notes, strict=True):
        rows[number].append(row)
    return Averaged(
        list(numbers),
        np.where(below > 0, np.nan, mean),
        np.where(below > 0, mean, np.nan),
        count.astype(np.intp),
        [_common(own) for own in rows],
        repeatability,
    )


def _common(rows: Sequence[Mapping[str, str]]) -> dict[str, str]:
    """Notes in which all rows agree."""
    return {key: value for key, value in rows[0].items() if all(row.get(key) == value for row in rows[1:])}
