"""PLS of many folds at once on the Gram matrix of the spectra: sample space, one matrix product a factor.

In sample space a model needs no spectra, only their inner products G = X·X'. The score of a factor is t = G·u, u the
part of y not yet explained, centred and made orthogonal to the scores before. A fold is a mask over samples, a weight a
scale of the rows of G, and the mean is factor 0: the score of ones. So folds, repeats, analytes and permutations of y
are columns of one product, and candidates with Gram matrices of their own a stack of such products.

A Gram matrix holds the *squares* of the singular values, so half of the digits of a weak direction are gone before the
first product. The guard here therefore stops long before that of `bidiagonal.py`: at scores below about 1.5e-4 of the
norm of the spectra, if 1e-8 is asked for; see `ACCURACY`.
"""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.regression.bidiagonal import EPS
from quant.regression.fast_cross_validation_columns import Columns
from quant.regression.fast_cross_validation_threads import scratch

ACCURACY = 1e-8  # share of a score that may be rounding error: see `gram_scores`
CANCELLED = 0.01  # squared norm left by a pass against all scores below which it is repeated (norm: a tenth)
BLOCK_BYTES = 2**23  # of scores worked on at a time: more falls out of cache


@dataclass(frozen=True)
class Gram:
    """Inner products of spectra, shape (n, n), with the trace of what they were worked out from. [(unit of X)²]

    A difference of two Gram matrices carries the rounding error of the larger, and the guard has to know.
    """

    values: FloatArray
    size: float


@dataclass(frozen=True)
class ColumnScores:
    """What every column says of the rows it was asked about; c candidates, A factors, factor 0 being the mean.

    Attributes
    ----------
    scores : array of shape (c, columns, A + 1, slots)
        Scaled to sum(weight·t²) = 1 over the training rows; zero past where a column stopped.
    y_loadings : array of shape (c, columns, A + 1)
        What each factor adds to the prediction is loading · score. [unit of y]
    stopped : array of shape (c, columns)
        Number of factors found; A where the guard let all pass.
    """

    scores: FloatArray
    y_loadings: FloatArray
    stopped: IntArray

    def predicted(self) -> FloatArray:
        """Predictions with 0, 1, ... A factors, shape (c, columns, A + 1, slots). [unit of y]"""
        return _summed(self.scores * self.y_loadings[..., None])

    def leverage(self) -> FloatArray:
        """Leverages, 1/n included, shape (c, columns, A + 1, slots)."""
        return _summed(self.scores**2)


def _summed(parts: FloatArray) -> FloatArray:
    """Sum over factors in place; several times as fast as cumsum over the last but one of many short axes."""
    for a in range(1, parts.shape[-2]):
        parts[..., a, :] += parts[..., a - 1, :]
    return parts


def centred_gram(X: FloatArray) -> FloatArray:
    """Return the inner products of spectra less their mean, which changes no result and keeps digits.

    Parameters
    ----------
    X : array of shape (n, k)
        The mean is subtracted in place: a copy would cost a tenth of the time.

    Returns
    -------
    array of shape (n, n)
        [(unit of X)²]
    """
    X -= X.mean(axis=0)
    return np.asarray(X @ X.T)


def gram_scores(
    grams: FloatArray,
    columns: Columns,
    y: FloatArray,
    n_factors: int,
    weight: FloatArray | None = None,
    accuracy: float = ACCURACY,
    size: FloatArray | None = None,
) -> ColumnScores:
    """Fit PLS to every column on every Gram matrix; mean-centred, not column-scaled.

    Parameters
    ----------
    grams : array of shape (c, n, n) or (c, columns, n, n)
        Inner products of the spectra of each candidate, symmetric, for all columns alike or for each its own; see
        `centred_gram`. [(unit of X)²]
    columns : Columns
        Training rows and rows asked about.
    y : array of shape (1 or columns, n)
        Reference values, of all columns alike or of each its own; those of rows outside training are not looked at.
    n_factors : int
        The most factors, A.
    weight : array of shape (n,), optional
        Not negative; 1/m for each of m replicates.
    accuracy : float
        A column stops at the factor of whose score a larger share may be rounding error: eps·size·‖u‖/‖G·u‖. On 600
        simulated models with singular values falling over up to 18 decades, left-out predictions kept to 1e-10 of the
        range of y, and leverages to 5e-9 of themselves, with 1e-8; with 1e-6, to 5e-9 and 4e-7. The laws under tests
        hold predictions to 1e-8 with the default; with 1e-6 one in thousands misses that, which is no harm where
        candidates are only ranked, and very smooth spectra carry more factors: raw meat spectra (Tecator) 18, not 11.
    size : array of shape (c,) or (c, columns), optional
        Size of what each Gram matrix was worked out from, by default its trace; see `Gram`. [(unit of X)²]

    Returns
    -------
    ColumnScores

    References
    ----------
    .. [1] S. Rännar, F. Lindgren, P. Geladi, S. Wold, A PLS kernel algorithm for data sets with many variables and
       fewer objects, J. Chemometrics 8 (1994) 111 (from memory).
    .. [2] J. W. Daniel, W. B. Gragg, L. Kaufman, G. W. Stewart, Reorthogonalization and stable algorithms for updating
       the Gram-Schmidt QR factorization, Math. Comp. 30 (1976) 772 (from memory): when to repeat a pass.
    """
    c, n = grams.shape[0], grams.shape[-1]
    sizes = np.einsum("...ii->...", grams) if size is None else size
    least = np.broadcast_to(np.square(EPS * sizes / accuracy).reshape(c, -1), (c, len(columns)))
    root, training = weighted_rows(columns, weight)
    if weight is not None:
        grams = grams * (root[:, None] * root)
    found = ColumnScores(
        _by_factor(n_factors + 1, c, len(columns), columns.asked.shape[1]),
        _by_factor(n_factors + 1, c, len(columns)),
        np.zeros((c, len(columns)), dtype=np.intp),
    )
    y = np.broadcast_to(y, (len(columns), n))
    for block in columns.blocks(c * (n_factors + 4) * n * 8, BLOCK_BYTES, least=8):
        part = ColumnScores(found.scores[:, block], found.y_loadings[:, block], found.stopped[:, block])
        own = grams if grams.ndim == 3 else grams[:, block]
        _fit_block(own, training[block], root, columns.asked[block], y[block], least[:, block], part)
    return found


def _by_factor(counts: int, c: int, F: int, *slots: int) -> FloatArray:
    """Return zeros of shape (c, F, counts, *slots), one factor after the other in memory, as they are written."""
    return np.moveaxis(np.zeros((counts, c, F, *slots)), 0, 2)


def weighted_rows(columns: Columns, weight: FloatArray | None) -> tuple[FloatArray, BoolArray]:
    """Return the square roots of the weights, shape (n,), one where a row only is predicted, and who trains."""
    n = columns.training.shape[1]
    if weight is None:
        return np.ones(n), columns.training
    return np.sqrt(np.where(weight > 0, weight, 1.0)), columns.training & (weight > 0)


def centred_values(mask: FloatArray, root: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Centre y in each column.

    Returns
    -------
    ones, mean, rest : arrays of shapes (columns, n), (columns,), (columns, n)
        Score of factor 0, with norm 1; mean of y; root·(y − mean), zero outside training and where y is constant.
    """
    ones = mask * root
    size = np.linalg.norm(ones, axis=1, keepdims=True)
    inside = np.where(mask > 0, y, 0.0)
    middle = inside.sum(axis=1, keepdims=True) / mask.sum(axis=1, keepdims=True)  # large offsets would cost digits
    middle = middle + np.sum(ones**2 * (inside - middle), axis=1, keepdims=True) / size**2
    rest = ones * (inside - middle)
    noise = 10 * mask.sum(axis=1) * EPS * np.linalg.norm(ones * inside, axis=1)  # as in bidiagonal.py
    rest[np.linalg.norm(rest, axis=1) <= noise] = 0.0
    return ones / size, middle[:, 0], rest


def _fit_block(
    grams: FloatArray,
    training: BoolArray,
    root: FloatArray,
    asked: IntArray,
    y: FloatArray,
    least: FloatArray,
    out: ColumnScores,
) -> None:
    """Fill `out`. T holds scores not scaled, within training; `inverse` their 1/(t't); least: of t't/u'u."""
    c, F, counts, slots = out.scores.shape
    n = grams.shape[-1]
    mask = training.astype(np.float64)
    ones, mean, rest = centred_values(mask, root, y)
    places = (asked + n * np.arange(F)[:, None]).ravel()
    rows, u, W, step = scratch("scores", (counts, c, F, n), (c, F, n), (c, F, n), (c, F, n))
    T, inverse, S = rows.transpose(1, 2, 0, 3), _by_factor(counts, c, F), out.scores
    total = np.linalg.norm(mask * root, axis=1)
    T[:, :, 0], inverse[:, :, 0], out.y_loadings[:, :, 0] = ones, 1.0, mean * total
    S[:, :, 0] = root[asked] / total[:, None]  # rows of S are scaled like those of G until the end
    u[:] = rest
    yy = np.vecdot(rest, rest)
    live, uu = np.broadcast_to(yy > 0, (c, F)).copy(), np.broadcast_to(yy, (c, F)).copy()
    rounding = EPS * yy
    for a in range(1, counts):
        np.matmul(u, grams, out=W) if grams.ndim == 3 else np.matvec(grams, u, out=W)
        raw = W.reshape(c, F * n).take(places, axis=1, mode="clip").reshape(c, F, slots)
        W *= mask
        t, before = T[:, :, a], T[:, :, :a]
        h, removed = _remove(W, before, inverse[:, :, :a], step, out=t)
        tt = np.vecdot(t, t)
        if (live & (tt < CANCELLED * removed)).any():
            h += _remove(t, before, inverse[:, :, :a], step, out=t)[0]
            tt = np.vecdot(t, t)
        live &= tt > least * uu
        np.divide(1.0, tt, out=inverse[:, :, a], where=live)
        np.subtract(raw, np.vecmat(h, S[:, :, :a]), out=S[:, :, a])
        if not live.all():
            S[:, :, a][~live] = 0.0
        tu = np.vecdot(t, u)
        share = np.multiply(tu, inverse[:, :, a], out=out.y_loadings[:, :, a])
        u -= np.multiply(t, share[..., None], out=step)
        uu -= share * tu  # ‖u‖², never below what rounding leaves of it
        np.maximum(uu, rounding, out=uu)
    out.stopped[:] = np.count_nonzero(inverse[:, :, 1:], axis=2)
    size = np.sqrt(np.where(inverse > 0, 1.0 / np.where(inverse > 0, inverse, 1.0), 1.0))
    out.y_loadings[:, :, 1:] *= size[:, :, 1:]
    S /= size[..., None]
    S /= root[asked][:, None]


def _remove(
    W: FloatArray, T: FloatArray, inverse: FloatArray, step: FloatArray, out: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Make W orthogonal to T in one pass, into `out`; return the coefficients and the squared norm taken."""
    products: FloatArray = np.matvec(T, W)
    h = products * inverse
    np.vecmat(h, T, out=step)
    np.subtract(W, step, out=out)
    return h, np.vecdot(products, h)
