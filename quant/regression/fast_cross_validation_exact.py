"""PLS of many folds at once with the digits of refitting: masked bidiagonalisation of the rotated spectra.

A Gram matrix would square the singular values. Rotating does not: with X' = Q·L', L (n × n) stands for the spectra in
every inner product, n being the samples, and the models of all folds are Golub-Kahan bidiagonalisations of masked rows
of L, as in `bidiagonal.py`, with its guard. They advance together, so that L meets all folds in one matrix product,
twice a factor. Since lengths are kept too, residuals of left-out spectra are there without going back to the spectra.
"""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.regression.bidiagonal import EPS, FLAT_NOTE, _noise_note
from quant.regression.fast_cross_validation_columns import Columns
from quant.regression.fast_cross_validation_gram import ColumnScores, centred_values, weighted_rows

BLOCK_BYTES = 2**22  # of working arrays of the columns in hand


@dataclass(frozen=True)
class ExactScores(ColumnScores):
    """Scores as of one candidate, with what only the spectra themselves can tell.

    Attributes
    ----------
    residual : array of shape (1, columns, A + 1, slots)
        Sum of squares of what 0, 1, ... A factors leave of the spectra asked about. [(unit of X)²]
    notes : list of str
        One a column: why it stopped, else ''.
    """

    residual: FloatArray
    notes: list[str]


def rotated(X: FloatArray, weight: FloatArray) -> FloatArray:
    """Return spectra less their weighted mean, in min(n, k) coordinates that keep all inner products.

    Parameters
    ----------
    X : array of shape (n, k)
        Spectra.
    weight : array of shape (n,)
        Not negative, not all zero.

    Returns
    -------
    array of shape (n, min(n, k))
        [unit of X]
    """
    centred: FloatArray = X - weight @ X / weight.sum()
    n, k = X.shape
    if n >= k:
        return centred
    triangle = np.asarray(np.linalg.qr(centred.T, mode="r"))
    return np.ascontiguousarray(triangle.T)


def exact_scores(
    spectra: FloatArray, columns: Columns, y: FloatArray, n_factors: int, weight: FloatArray, n_points: int
) -> ExactScores:
    """Fit PLS to every column; mean-centred, not column-scaled.

    Parameters
    ----------
    spectra : array of shape (n, k)
        From `rotated`, or spectra less their mean.
    columns : Columns
        Training rows and rows asked about.
    y : array of shape (1 or columns, n)
        Reference values, of all columns alike or of each its own; those of rows outside training are not looked at.
    n_factors : int
        The most factors, A.
    weight : array of shape (n,)
        Not negative; 1/m for each of m replicates.
    n_points : int
        Points of the spectra before rotation: the guard counts them.

    Returns
    -------
    ExactScores
        Equal to `PLS` refitted for every column: same guard, same notes.
    """
    n, k = spectra.shape
    root, training = weighted_rows(columns, weight)
    weighted = spectra * root[:, None]
    shape = (1, len(columns), n_factors + 1)
    slots = columns.asked.shape[1]
    found = ExactScores(
        scores=np.zeros((*shape, slots)),
        y_loadings=np.zeros(shape),
        stopped=np.full(shape[:2], n_factors, dtype=np.intp),
        residual=np.empty((*shape, slots)),
        notes=[""] * len(columns),
    )
    y = np.broadcast_to(y, (len(columns), n))
    per_column = 8 * ((n_factors + 4) * (n + 2 * k) + 2 * slots * k)
    for block in columns.blocks(per_column, BLOCK_BYTES, least=8):
        folds = _Folds(weighted, training[block].astype(np.float64), root, y[block], n_factors, n_points)
        part = columns.take(block)
        folds.fit(part, found.scores[0, block])
        found.y_loadings[0, block] = folds.q
        found.stopped[0, block] = folds.stopped
        found.notes[block] = folds.notes
        folds.residuals(spectra[part.asked], found.scores[0, block], found.residual[0, block])
    return found


class _Folds:
    """Bidiagonalisations side by side: F columns, W and P in the coordinates of the spectra, T over rows."""

    def __init__(
        self, weighted: FloatArray, mask: FloatArray, root: FloatArray, y: FloatArray, n_factors: int, n_points: int
    ) -> None:
        F, (n, k) = mask.shape[0], weighted.shape
        self.X, self.mask, self.root, self.n_factors = weighted, mask, root, n_factors
        self.W, self.P = np.zeros((F, n_factors, k)), np.zeros((F, n_factors, k))
        self.T, self.q = np.zeros((F, n_factors + 1, n)), np.zeros((F, n_factors + 1))
        self.T[:, 0], mean, self.rest = centred_values(mask, root, y)
        self.total = np.linalg.norm(mask * root, axis=1)
        self.q[:, 0] = mean * self.total
        self.shift = self.T[:, 0] @ weighted  # root of summed weight · mean spectrum of the fold
        squares = np.maximum(mask @ np.vecdot(weighted, weighted) - np.vecdot(self.shift, self.shift), 0.0)
        self.noise = 10 * np.maximum(mask.sum(axis=1), n_points) * EPS * np.sqrt(squares)
        flat = np.linalg.norm(self.rest, axis=1) == 0
        self.live: BoolArray = ~flat
        self.stopped = np.where(flat, 0, n_factors)
        self.notes = [FLAT_NOTE if one and n_factors else "" for one in flat]

    def fit(self, columns: Columns, S: FloatArray) -> None:
        """Find the factors, and fill S, the scores of the rows asked about, shape (F, A + 1, slots)."""
        W, P, T = self.W, self.P, self.T
        scale = self.root[columns.asked]
        S[:, 0] = scale / self.total[:, None]
        alpha = np.zeros(len(columns))
        for a in range(1, self.n_factors + 1):
            if not self.live.any():
                break
            # P − alpha·W of the factor before; the first one from y.
            w = P[:, a - 2] - alpha[:, None] * W[:, a - 2] if a > 1 else _unit(self.rest)[0] @ self.X
            w, theta = _unit(_orthogonalise(w, W[:, : a - 1])[0])
            self._stop(a, "weight", theta)
            t = w @ self.X.T
            raw = np.take_along_axis(t, columns.asked, axis=1)
            t, h = _orthogonalise(t * self.mask, T[:, :a])
            t, alpha = _unit(t)
            self._stop(a, "score", alpha)
            live = self.live[:, None]
            W[:, a - 1], T[:, a] = np.where(live, w, 0.0), np.where(live, t, 0.0)
            P[:, a - 1] = T[:, a] @ self.X
            S[:, a] = np.where(live, raw - np.vecmat(h, S[:, :a]), 0.0) / np.where(live, alpha[:, None], 1.0)
            self.q[:, a] = np.vecdot(T[:, a], self.rest)
        S /= scale[:, None]

    def residuals(self, asked: FloatArray, S: FloatArray, out: FloatArray) -> None:
        """Fill `out`, shape (F, A + 1, slots), for spectra asked about of shape (F, slots, k)."""
        rest = asked - (self.shift / self.total[:, None])[:, None]
        out[:, 0] = np.vecdot(rest, rest)
        for a in range(self.n_factors):  # never by a difference of large sums
            rest -= S[:, a + 1, :, None] * self.P[:, a, None]
            out[:, a + 1] = np.vecdot(rest, rest)

    def _stop(self, factor: int, what: str, norm: FloatArray) -> None:
        for column in np.flatnonzero(self.live & (norm <= self.noise)):
            self.live[column] = False
            self.stopped[column] = factor - 1
            self.notes[column] = _noise_note(factor, what, norm[column], self.noise[column])


def _orthogonalise(vectors: FloatArray, rows: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Make each vector orthogonal to its rows, in two passes; return it and the sum of the coefficients."""
    first = np.matvec(rows, vectors)
    vectors = vectors - np.vecmat(first, rows)
    second = np.matvec(rows, vectors)
    return vectors - np.vecmat(second, rows), first + second


def _unit(vectors: FloatArray) -> tuple[FloatArray, FloatArray]:
    norm = np.linalg.norm(vectors, axis=1)
    return vectors / np.where(norm > 0, norm, 1.0)[:, None], norm
