"""The arithmetic of partial least squares with one response: Golub-Kahan bidiagonalisation."""

from dataclasses import dataclass
from typing import Self

import numpy as np

from quant.arrays import FloatArray

EPS = float(np.finfo(np.float64).eps)
FLAT_NOTE = "all reference values are equal: there is no factor to find, and every prediction is their mean"


@dataclass(frozen=True, kw_only=True)
class Bidiagonal:
    """X·W = T·B with orthonormal W and T and upper bidiagonal B, and all that follows from it.

    X and y stand for the rows present (weight above zero), centred by the weighted mean, each multiplied by the square
    root of its weight. A = number of factors found, k = points of a spectrum.
    """

    x_mean: FloatArray  # (k,)
    y_mean: float
    weights: FloatArray  # W, (k, A)
    scores: FloatArray  # T, (rows present, A)
    diagonal: FloatArray  # alpha of B, (A,), above zero
    superdiagonal: FloatArray  # theta of B, (A - 1,), of either sign
    rotations: FloatArray  # R = W·inverse(B), (k, A): T = X·R
    loadings: FloatArray  # P = X'T, (k, A)
    y_loadings: FloatArray  # q = T'y, (A,), never negative
    coefficients: FloatArray  # (A + 1, k): row a is the regression vector of a factors
    explained_x: FloatArray  # (A,), fractions of the sum of squares of X
    explained_y: FloatArray  # (A,), fractions of the sum of squares of y
    guard_note: str  # why fewer factors than asked for were found, else ''


def pls_bidiagonal(X: FloatArray, y: FloatArray, weight: FloatArray, n_factors: int) -> Bidiagonal:
    """Find up to `n_factors` PLS factors; mean-centred, never column-scaled.

    "Bidiag2": Golub-Kahan bidiagonalisation started from X'y. W and T are orthogonalised against all earlier columns,
    twice, so that no orthogonality is lost. A factor whose weight or score is no larger than rounding error is not
    taken: past that point no two algorithms agree, and neither is right.

    Parameters
    ----------
    X : array of shape (n, k)
        Spectra, one a row.
    y : array of shape (n,)
        Reference values. [unit of the analyte]
    weight : array of shape (n,)
        Not negative; zero means that the row is absent.
    n_factors : int
        The most factors wanted.

    Returns
    -------
    Bidiagonal
        The decomposition, and regression vectors for 0 to A factors.

    References
    ----------
    .. [1] Å. Björck, U. G. Indahl, Fast and stable partial least squares modelling: a benchmark study with
       theoretical comments, J. Chemometrics 31 (2017) e2898 (from memory).
    .. [2] R. Manne, Analysis of two partial-least-squares algorithms for multivariate calibration, Chemom. Intell. Lab.
       Syst. 2 (1987) 187 (from memory).
    """
    present = weight > 0
    if not present.all():
        X, y, weight = X[present], y[present], weight[present]
    root = np.sqrt(weight)
    x_mean, y_mean = weight @ X / weight.sum(), float(weight @ y / weight.sum())
    Xc, yc = (X - x_mean) * root[:, None], (y - y_mean) * root
    x_size, y_size = float(np.linalg.norm(Xc)), float(np.linalg.norm(yc))
    if y_size <= 10 * y.size * EPS * float(np.linalg.norm(y * root)):
        found, guard_note = _Factors(0, *Xc.shape), FLAT_NOTE if n_factors else ""
    else:
        found, guard_note = _find_factors(Xc, yc, n_factors, noise=10 * max(X.shape) * EPS * x_size)

    rotations = found.rotations()
    q = found.T @ yc
    return Bidiagonal(
        x_mean=x_mean,
        y_mean=y_mean,
        weights=found.W.T,
        scores=found.T.T,
        diagonal=found.alpha,
        superdiagonal=found.theta[1:],
        rotations=rotations.T,
        loadings=found.P.T,
        y_loadings=q,
        coefficients=running_sum(q[:, None] * rotations),
        explained_x=np.einsum("ak,ak->a", found.P, found.P) / x_size**2 if q.size else np.empty(0),
        explained_y=q**2 / y_size**2 if q.size else np.empty(0),
        guard_note=guard_note,
    )


class _Factors:
    """Factors while they are found: one a row, so that each is contiguous in memory."""

    def __init__(self, n_factors: int, n_rows: int, n_points: int) -> None:
        self.W, self.P = np.empty((n_factors, n_points)), np.empty((n_factors, n_points))
        self.T = np.empty((n_factors, n_rows))
        self.alpha, self.theta = np.empty(n_factors), np.empty(n_factors)  # theta[0] is no part of B

    def cut(self, count: int) -> Self:
        """Keep the first `count`."""
        for name in ("W", "P", "T", "alpha", "theta"):
            setattr(self, name, getattr(self, name)[:count])
        return self

    def rotations(self) -> FloatArray:
        """R of R·B = W, a factor a row."""
        rotations = np.empty_like(self.W)
        for a, w in enumerate(self.W):
            rotations[a] = (w - self.theta[a] * rotations[a - 1] if a else w) / self.alpha[a]
        return rotations


def _find_factors(Xc: FloatArray, yc: FloatArray, n_factors: int, noise: float) -> tuple[_Factors, str]:
    found = _Factors(n_factors, *Xc.shape)
    W, P, T, alpha, theta = found.W, found.P, found.T, found.alpha, found.theta
    for a in range(n_factors):
        w = P[a - 1] - alpha[a - 1] * W[a - 1] if a else (yc / np.linalg.norm(yc)) @ Xc
        w = _orthogonalise(w, W[:a])
        theta[a] = np.linalg.norm(w)
        if theta[a] <= noise:
            return found.cut(a), _noise_note(a + 1, "weight", theta[a], noise)
        w /= theta[a]
        t = Xc @ w - theta[a] * T[a - 1] if a else Xc @ w
        t = _orthogonalise(t, T[:a])
        alpha[a] = np.linalg.norm(t)
        if alpha[a] <= noise:
            return found.cut(a), _noise_note(a + 1, "score", alpha[a], noise)
        t /= alpha[a]
        if t @ yc < 0:  # the sign of a factor is free: ours makes its y-loading positive
            w, t, theta[a] = -w, -t, -theta[a]
        W[a], T[a], P[a] = w, t, t @ Xc
    return found, ""


def _orthogonalise(vector: FloatArray, rows: FloatArray) -> FloatArray:
    for _ in range(2):  # twice is enough: the second pass removes what rounding left of the first
        vector = vector - (rows @ vector) @ rows
    return vector


def _noise_note(factor: int, what: str, norm: float, noise: float) -> str:
    return (
        f"factor {factor} would be numerical noise: the norm of its {what} before scaling is {norm:.1e}, "
        f"rounding alone makes up to {noise:.1e}; stopped at {factor - 1}"
    )


def running_sum(rows: FloatArray) -> FloatArray:
    """Sums of the first 0, 1, ... A of A rows, shape (A + 1, columns)."""
    return np.vstack([np.zeros((1, rows.shape[1])), np.cumsum(rows, axis=0)])
