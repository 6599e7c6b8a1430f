"""Models fitted side by side: each is one column, with the rows it learns from and the rows it is asked about."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.checks import name_some
from quant.errors import ParameterError, SampleMismatchError

NEVER = -1  # fold label of a row no model learns from, and every model predicts


@dataclass(frozen=True)
class Columns:
    """Which rows each model learns from, and which it predicts.

    Attributes
    ----------
    training : array of shape (columns, rows)
        True where the model learns from the row.
    asked : array of shape (columns, slots)
        Row numbers to predict; columns with fewer than the widest repeat a row.
    real : array of shape (columns, slots)
        False where a slot only fills up.
    repeat : array of shape (columns,)
        The repeat of the cross-validation that the column belongs to.
    """

    training: BoolArray
    asked: IntArray
    real: BoolArray
    repeat: IntArray

    def __len__(self) -> int:
        return int(self.training.shape[0])

    def take(self, chosen: slice | IntArray) -> "Columns":
        """Return only the chosen columns."""
        return Columns(self.training[chosen], self.asked[chosen], self.real[chosen], self.repeat[chosen])

    def blocks(self, bytes_per_column: int, most_bytes: int, least: int = 1) -> Iterator[slice]:
        """Yield runs of columns whose working arrays take `most_bytes` or less, but no fewer than `least` columns."""
        size = max(least, most_bytes // max(bytes_per_column, 1))
        for first in range(0, len(self), size):
            yield slice(first, min(first + size, len(self)))


def fold_columns(fold_labels: Sequence[ArrayLike], n_rows: int) -> Columns:
    """Turn fold labels into columns: one for each fold of each repeat.

    Parameters
    ----------
    fold_labels : sequence of arrays of shape (n_rows,)
        One a repeat: whole numbers, equal for rows left out together; −1: no model of this repeat learns from the row,
        each predicts it.
    n_rows : int
        Rows of the spectra.

    Returns
    -------
    Columns
        In the order of repeats, within one in that of rising labels.

    Raises
    ------
    ParameterError
        No repeat, labels of another shape, or a fold that leaves fewer than two rows to learn from.
    """
    if not len(fold_labels):
        raise ParameterError("fold_labels is empty; expected one array of fold labels for each repeat.")
    training, asked, repeats = [], [], []
    for repeat, given in enumerate(fold_labels):
        labels = np.asarray(given)
        if labels.shape != (n_rows,) or labels.dtype.kind not in "iu":
            raise ParameterError(
                f"fold_labels[{repeat}] has shape {labels.shape} and type {labels.dtype}; expected {n_rows} whole "
                "numbers, one a row of the spectra."
            )
        never = labels == NEVER
        out = labels == np.unique(labels[~never])[:, None]
        training.append(~out & ~never)
        asked.append(out | never)
        repeats += [repeat] * len(out)
    if not repeats:
        raise ParameterError("Every fold label is −1, so there is nothing to leave out; label the rows to learn from.")
    learnt = np.concatenate(training)
    few = np.flatnonzero(np.count_nonzero(learnt, axis=1) < 2)
    if few.size:
        raise ParameterError(
            f"Fold(s) {name_some(few)}, counted from 0, leave fewer than 2 rows to learn from; use more folds."
        )
    return Columns(learnt, *_padded(np.concatenate(asked)), np.array(repeats, dtype=np.intp))


def check_factors(n_factors: object, columns: Columns, weight: FloatArray, n_points: int) -> int:
    """Return the number of factors if every model can carry it.

    Raises
    ------
    ParameterError
        No whole number from 0 to the lesser of the points and the smallest training set less one.
    """
    rows = int(np.count_nonzero(columns.training & (weight > 0), axis=1).min())
    bound = max(min(rows - 1, n_points), 0)
    if isinstance(n_factors, bool) or not isinstance(n_factors, int | np.integer) or not 0 <= n_factors <= bound:
        raise ParameterError(
            f"n_factors = {n_factors!r}; expected a whole number from 0 to {bound}, the lesser of the points "
            f"({n_points}) and the smallest training set ({rows} rows) less one. Reduce n_factors."
        )
    return int(n_factors)


def check_samples(sample_index: ArrayLike | None, fold_labels: Sequence[ArrayLike], n: int) -> IntArray:
    """Return the sample of each of n spectra, if every sample is left out as a whole in every repeat.

    Raises
    ------
    ParameterError
        Not the numbers 0 to samples − 1, or a label below 0.
    SampleMismatchError
        Lengths that differ, or a sample in two folds.
    """
    samples = np.arange(n) if sample_index is None else np.asarray(sample_index)
    if (
        samples.shape != (n,)
        or samples.dtype.kind not in "iu"
        or set(samples.tolist()) != set(range(samples.max() + 1))
    ):
        raise ParameterError(f"sample_index has shape {samples.shape}; expected {n} numbers of samples, 0, 1, 2 ...")
    first = np.zeros(samples.max() + 1, dtype=np.intp)
    first[samples[::-1]] = np.arange(n)[::-1]
    for labels in map(np.asarray, fold_labels):
        if labels.shape != (n,):
            raise SampleMismatchError(f"{labels.size} fold labels for {n} spectra; give one each.")
        if (labels < 0).any():
            raise ParameterError(f"Fold labels run from {labels.min()}; expected 0 or more, so that all are left out.")
        torn = np.unique(samples[labels != labels[first[samples]]])
        if torn.size:
            raise SampleMismatchError(
                f"Sample(s) {name_some(torn)}, counted from 0, have spectra in two folds; keep replicates together."
            )
    return samples.astype(np.intp)


def _padded(asked: BoolArray) -> tuple[IntArray, BoolArray]:
    """Return the rows asked about in each column, from a mask of shape (columns, rows), and which slots are real."""
    counts = np.count_nonzero(asked, axis=1)[:, None]
    slots = np.arange(counts.max())
    first = np.cumsum(counts)[:, None] - counts
    return np.nonzero(asked)[1][first + slots % counts], slots < counts
