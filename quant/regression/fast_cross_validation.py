"""Left-out predictions of PLS for all folds and all factor counts at once, equal to refitting every fold.

For steps that learn nothing from other spectra: these are applied once, before. Two ways, chosen by cost: rotated
spectra (`fast_cross_validation_exact.py`), the digits and the guard of refitting; cross-products
(`fast_cross_validation_cross_products.py`) for archives, where the folds that its own guard stops are done again in the
first way. Many candidates, ranked by Gram matrices: `fast_cross_validation_many.py`.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray, IntArray
from quant.checks import as_matrix, as_vector
from quant.errors import ParameterError, SampleMismatchError
from quant.estimator.input import check_weights
from quant.regression.fast_cross_validation_columns import NEVER, Columns, check_factors, check_samples, fold_columns
from quant.regression.fast_cross_validation_cross_products import ACCURACY_NOTE, cross_product_scores
from quant.regression.fast_cross_validation_exact import ExactScores, exact_scores, rotated
from quant.regression.fast_cross_validation_threads import one_blas_thread


@dataclass(frozen=True, kw_only=True)
class LeftOut:
    """What models that did not see a sample say of it. Counts are 0, 1, ... n_factors; past a stop nothing changes.

    Attributes
    ----------
    predicted, leverage : array of shape (repeats, counts, samples)
        Of the mean spectrum of each sample; leverage with 1/n. [unit of y], [1]
    residual : array of shape (repeats, counts, samples)
        Mean over the spectra of each sample of the sum of squares of what the factors leave; NaN if not asked for.
        [(unit of X)²]
    within : array of shape (repeats, counts)
        Sum of squares of replicates' predictions about those of their sample. [(unit of y)²]
    repeat : array of shape (folds,)
        The repeat of each fold; folds in the order of repeats, within one in that of rising labels.
    stopped : array of shape (folds,)
        Number of factors found.
    notes : tuple of str
        One a fold, '' if it found all factors.
    new_predicted, new_leverage : array of shape (folds, counts, new spectra)
        Of further spectra, by the model of every fold.
    """

    predicted: FloatArray
    leverage: FloatArray
    residual: FloatArray
    within: FloatArray
    repeat: IntArray
    stopped: IntArray
    notes: tuple[str, ...]
    new_predicted: FloatArray
    new_leverage: FloatArray


def fast_left_out(
    X: ArrayLike,
    y: ArrayLike,
    fold_labels: Sequence[ArrayLike],
    n_factors: int,
    weight: ArrayLike | None = None,
    sample_index: ArrayLike | None = None,
    new: ArrayLike | None = None,
    *,
    residuals: bool = True,
    way: str | None = None,
) -> LeftOut:
    """Cross-validate PLS; mean-centred in every fold, never column-scaled.

    Parameters
    ----------
    X : array of shape (n, k)
        Spectra behind all preprocessing, replicates one by one.
    y : array of shape (n,)
        Reference values, one a spectrum.
    fold_labels : sequence of arrays of shape (n,)
        One a repeat: equal whole numbers, 0 or more, for spectra left out together.
    n_factors : int
        The most factors.
    weight : array of shape (n,), optional
        1/m for each of the m replicates of a sample; one by default.
    sample_index : array of shape (n,), optional
        The sample, 0 to samples − 1, each spectrum belongs to; by default each is a sample.
    new : array of shape (m, k), optional
        Further spectra, to be predicted by the model of every fold (jackknife+).
    residuals : bool
        Whether to work out residuals.
    way : {"rotated", "cross_products"}, optional
        By default the cheaper: see `cheaper_way`.

    Returns
    -------
    LeftOut
        With "rotated", same guard and notes as `PLS` refitted in every fold. Either way predictions and leverages equal
        refitting to 1e-8 (of the range of y; of themselves) while scores and weights before scaling are above 1e-6 of
        the norm of the spectra. The guard is at about 1e-12: between, two programs differ more and more.

    Raises
    ------
    ParameterError
        Arguments that cannot be used; more factors than the smallest training set or the points can carry.
    SampleMismatchError
        Lengths that differ, or a sample in two folds.
    """
    spectra, values = as_matrix("X", X), as_vector("y", y)
    if values.size != spectra.shape[0]:
        raise SampleMismatchError(f"{spectra.shape[0]} spectra in X but {values.size} values in y; give one each.")
    extra = np.empty((0, spectra.shape[1])) if new is None else as_matrix("new", new)
    if extra.shape[1] != spectra.shape[1]:
        raise ParameterError(f"new has {extra.shape[1]} points, X has {spectra.shape[1]}; give spectra of one axis.")
    samples = check_samples(sample_index, fold_labels, values.size)
    weights = np.concatenate([check_weights(weight, values.size), np.zeros(extra.shape[0])])
    labels = [np.concatenate([np.asarray(one), np.full(extra.shape[0], NEVER)]) for one in fold_labels]
    columns = fold_columns(labels, weights.size)
    count = check_factors(n_factors, columns, weights, spectra.shape[1])
    chosen = way or cheaper_way(weights.size, spectra.shape[1], len(columns), columns.repeat[-1] + 1, count)
    targets = np.concatenate([values, np.zeros(extra.shape[0])])
    found = _scores(np.vstack([spectra, extra]), targets, weights, columns, count, chosen, residuals=residuals)
    return _collect(found, columns, samples, values.size)


def cheaper_way(n: int, k: int, folds: int, repeats: int, n_factors: int) -> str:
    """Choose between "rotated" and "cross_products" by their cost in nanoseconds; F folds in all, A factors.

    rotated: 0.25·n·k·A·F for the products + 4·(n + k)·A²·F for making W and T orthogonal + 6e3·A·F for calls.
    cross_products: 0.06·n·k²·repeats + 4·k²·F to subtract + 0.7·n·k·F for means + 0.15·k²·A·F + 3e4·A·F for calls.
    Fitted to 36 measured cases on one core, n = 300 to 8000, k = 50 to 700, A and F = 5 and 20: the choice cost 5 %
    over the better of the two on average, 77 % at most. They are within a third of each other from n = 400 to 1000 at
    k = 200 and A = 20; from 2000 spectra on, cross-products gain. With n ≤ k spectra the rotated ones are no larger
    than cross-products, keep more digits, and are always taken.
    """
    if n <= k:
        return "rotated"
    calls = float(n_factors * folds)
    rotated_ns = 0.25 * n * k * calls + 4 * (n + k) * n_factors * calls + 6e3 * calls
    products_ns = 0.06 * n * k**2 * repeats + (4 * k**2 + 0.7 * n * k) * folds + (0.15 * k**2 + 3e4) * calls
    return "rotated" if rotated_ns <= products_ns else "cross_products"


def _scores(
    X: FloatArray, y: FloatArray, weight: FloatArray, columns: Columns, count: int, way: str, *, residuals: bool
) -> ExactScores:
    if way == "rotated":
        with one_blas_thread():
            return exact_scores(rotated(X, weight), columns, y[None], count, weight, X.shape[1])
    if way != "cross_products":
        raise ParameterError(f"way = {way!r}; expected 'rotated' or 'cross_products'.")
    centred = X - weight @ X / weight.sum()
    found = cross_product_scores(centred, columns, y[None], count, weight, residuals=residuals)
    again = np.flatnonzero([note.startswith(ACCURACY_NOTE) for note in found.notes])
    if again.size:
        exact = exact_scores(centred, columns.take(again), y[None], count, weight, X.shape[1])
        for whole, part in (
            (found.scores, exact.scores),
            (found.y_loadings, exact.y_loadings),
            (found.stopped, exact.stopped),
            (found.residual, exact.residual),
        ):
            whole[:, again] = part
        for column, note in zip(again, exact.notes, strict=True):
            found.notes[column] = note
    return found


def _collect(found: ExactScores, columns: Columns, samples: IntArray, n: int) -> LeftOut:
    repeats, counts, n_samples = int(columns.repeat[-1]) + 1, found.scores.shape[2], int(samples.max()) + 1
    shape = (repeats, counts, n_samples)
    predicted, leverage, residual, within = np.empty(shape), np.empty(shape), np.empty(shape), np.empty(shape[:2])
    is_new = columns.asked >= n
    for repeat in range(repeats):
        column, slot = np.nonzero((columns.repeat == repeat)[:, None] & columns.real & ~is_new)
        row = columns.asked[column, slot]
        scores, loadings, rest = np.empty((counts, n)), np.empty((counts, n)), np.empty((counts, n))
        scores[:, row] = found.scores[0, column, :, slot].T
        rest[:, row] = found.residual[0, column, :, slot].T
        loadings[:, row] = found.y_loadings[0, column].T
        mean = _sample_means(scores, samples)
        single = np.cumsum(loadings * scores, axis=0)
        predicted[repeat] = _sample_means(single, samples)
        leverage[repeat] = np.cumsum(mean**2, axis=0)
        residual[repeat] = _sample_means(rest, samples)
        within[repeat] = np.sum((single - predicted[repeat][:, samples]) ** 2, axis=1)
    of_column, slots = (part.reshape(len(columns), -1) for part in np.nonzero(columns.real & is_new))
    return LeftOut(
        predicted=predicted,
        leverage=leverage,
        residual=residual,
        within=within,
        repeat=columns.repeat,
        stopped=found.stopped[0],
        notes=tuple(found.notes),
        new_predicted=found.predicted()[0][of_column, :, slots].transpose(0, 2, 1),
        new_leverage=found.leverage()[0][of_column, :, slots].transpose(0, 2, 1),
    )


def _sample_means(rows: FloatArray, samples: IntArray) -> FloatArray:
    """Average each row of shape (n,) over the spectra of each sample."""
    number = np.bincount(samples)
    if number.size == samples.size:
        return rows[:, np.argsort(samples)]
    return np.stack([np.bincount(samples, weights=row) for row in rows]) / number
