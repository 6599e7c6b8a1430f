"""PLS of many folds on cross-products X'X and X'y, for archives with many more samples than points.

The cross-products of the rows a fold leaves out are subtracted from those of all rows, and the mean of the rows that
stay is taken out by their sums, so that the spectra are passed over once for all folds. As every method on squares,
this loses half of the digits of weak directions and has a guard of its own.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import islice

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.regression.bidiagonal import EPS, FLAT_NOTE
from quant.regression.fast_cross_validation_columns import Columns
from quant.regression.fast_cross_validation_exact import ExactScores
from quant.regression.fast_cross_validation_gram import ACCURACY, centred_values, weighted_rows

ACCURACY_NOTE = "accuracy"  # how the notes of columns begin that another algorithm can take further
PARTS_BYTES = 2**28  # of the cross-products of folds kept at a time; where they take more, they are formed twice
VECTORS_BYTES = 2**26  # of masks and reference values of the columns in hand
ROWS_AT_A_TIME = 256  # of spectra whose residuals are worked on: they stay in cache


@dataclass(frozen=True)
class _Model:
    rotations: FloatArray  # (A, k)
    loadings: FloatArray  # (A, k)
    y_loadings: FloatArray  # (A,)


def cross_product_scores(
    spectra: FloatArray,
    columns: Columns,
    y: FloatArray,
    n_factors: int,
    weight: FloatArray,
    accuracy: float = ACCURACY,
    residuals: bool = True,  # noqa: FBT001 (named by callers)
) -> ExactScores:
    """Fit PLS to every column by the improved kernel algorithm no. 2; mean-centred, not column-scaled.

    Parameters
    ----------
    spectra : array of shape (n, k)
        Less their mean: the subtraction of sums then costs no digits.
    columns : Columns
        Training rows and rows asked about.
    y : array of shape (1 or columns, n)
        Reference values, of all columns alike or of each its own; those of rows outside training are not looked at.
    n_factors : int
        The most factors, A.
    weight : array of shape (n,)
        Not negative; 1/m for each of m replicates.
    accuracy : float
        A column stops at the factor of whose score a larger share may be rounding error; with a note that starts with
        "accuracy": whoever needs more factors refits.
    residuals : bool
        Whether to work them out (they cost as much as the rest); else they are NaN.

    Returns
    -------
    ExactScores

    References
    ----------
    .. [1] B. S. Dayal, J. F. MacGregor, Improved PLS algorithms, J. Chemometrics 11 (1997) 73 (from memory).
    .. [2] O.-C. G. Engstrøm, M. H. Jensen, Fast partition-based cross-validation with centering and scaling for X'X and
       X'Y, J. Chemometrics (2025) (from memory).
    """
    n = spectra.shape[0]
    root, training = weighted_rows(columns, weight)
    weighted = spectra if (root == 1.0).all() else spectra * root[:, None]
    shape = (1, len(columns), n_factors + 1)
    slots = columns.asked.shape[1]
    found = ExactScores(
        scores=np.zeros((*shape, slots)),
        y_loadings=np.zeros(shape),
        stopped=np.zeros(shape[:2], dtype=np.intp),
        residual=np.full((*shape, slots), np.nan),
        notes=[""] * len(columns),
    )
    y = np.broadcast_to(y, (len(columns), n))
    each = _training_products(weighted, columns, training)
    for block in columns.blocks(4 * 8 * n, VECTORS_BYTES):
        mask = training[block].astype(np.float64)
        ones, mean, rest = centred_values(mask, root, y[block])
        total = np.linalg.norm(mask * root, axis=1)
        middles, starts, sizes = ones @ weighted, rest @ weighted, np.linalg.norm(rest, axis=1)
        for i, (column, S) in enumerate(islice(each, len(total))):
            S -= np.outer(middles[i], middles[i])  # centred: the mean is factor 0
            model = _fit(S, starts[i], float(sizes[i]), n_factors, accuracy)
            count = model.y_loadings.size
            found.y_loadings[0, column, : count + 1] = [mean[i] * total[i], *model.y_loadings]
            found.stopped[0, column] = count
            if count < n_factors:
                found.notes[column] = _note(count, accuracy) if sizes[i] else FLAT_NOTE
            found.scores[0, column, 0] = 1.0 / total[i]
            left = spectra[columns.asked[column]] - middles[i] / total[i]
            _apply(model, left, found.scores[0, column, 1:], found.residual[0, column] if residuals else None)
    return found


def _training_products(weighted: FloatArray, columns: Columns, training: BoolArray) -> Iterator[tuple[int, FloatArray]]:
    """Yield each column with the cross-products of its training rows; one pass a repeat, if they may be kept."""
    k = weighted.shape[1]
    for repeat in np.unique(columns.repeat):
        members = np.flatnonzero(columns.repeat == repeat)
        taught = training[members].any(axis=0)
        left = [np.flatnonzero(taught & ~training[column]) for column in members]
        kept = [_products(weighted, rows) for rows in left] if members.size * k * k * 8 <= PARTS_BYTES else None
        total = _products(weighted, np.flatnonzero(training[members].all(axis=0)))  # rows that no column leaves out
        for part in kept or (_products(weighted, rows) for rows in left):
            total += part
        for number, column in enumerate(members):
            yield int(column), total - (kept[number] if kept else _products(weighted, left[number]))


def _products(weighted: FloatArray, rows: IntArray) -> FloatArray:
    chosen = weighted[rows]
    product: FloatArray = chosen.T @ chosen  # one triangle is worked out, since both factors are one array
    return product


def _fit(S: FloatArray, c: FloatArray, y_size: float, n_factors: int, accuracy: float) -> _Model:
    """Find up to `n_factors` factors from S = X'X and c = X'y, centred, of training rows; y_size: norm of y."""
    k = c.size
    W, R, P, q = np.zeros((n_factors, k)), np.zeros((n_factors, k)), np.zeros((n_factors, k)), np.zeros(n_factors)
    noise = EPS * np.trace(S) / accuracy  # of r'S·r per squared norm of r
    # Of c = X'u: eps·‖X‖·‖y‖, and a tenth of `accuracy`, since the weights that follow inherit its error.
    smallest = 10 * np.sqrt(EPS * noise / accuracy) * y_size
    for a in range(n_factors):
        w = c
        for _ in range(2):
            w = w - (W[:a] @ w) @ W[:a]
        size = float(np.linalg.norm(w))
        if size <= smallest:
            return _Model(R[:a], P[:a], q[:a])
        w = r = w / size
        for _ in range(2):  # orthogonal scores: r'S·r_j = 0
            r = r - (P[:a] @ r) @ R[:a]
        s = S @ r
        tt = float(r @ s)
        if tt <= noise * float(r @ r):
            return _Model(R[:a], P[:a], q[:a])
        W[a], R[a], P[a] = w, r / np.sqrt(tt), s / np.sqrt(tt)
        q[a] = R[a] @ c
        c = c - q[a] * P[a]
    return _Model(R, P, q)


def _apply(model: _Model, left: FloatArray, scores: FloatArray, residual: FloatArray | None) -> None:
    """Fill scores, shape (A, rows), and residuals, shape (A + 1, rows), of centred spectra, which are used up."""
    count = model.y_loadings.size
    for first in range(0, left.shape[0], ROWS_AT_A_TIME):
        rows = slice(first, first + ROWS_AT_A_TIME)
        rest = left[rows]
        t = model.rotations @ rest.T
        scores[:count, rows] = t
        if residual is None:
            continue
        residual[0, rows] = np.vecdot(rest, rest)
        for a in range(count):  # never by a difference of large sums
            rest -= t[a, :, None] * model.loadings[a]
            residual[a + 1, rows] = np.vecdot(rest, rest)
        residual[count + 1 :, rows] = residual[count, rows]


def _note(count: int, accuracy: float) -> str:
    return (
        f"{ACCURACY_NOTE}: more than {accuracy:.0e} of factor {count + 1} would be rounding error of the "
        f"cross-products; stopped at {count}"
    )
