"""Tests whether something that every standard shows is more than the scatter between them."""

import numpy as np
from scipy import special

from quant.arrays import FloatArray
from quant.statistics.quantiles import t_two_sided_p


def mean_p(columns: FloatArray) -> float:
    """Probability by chance of means as far from zero: Student's t for one column, Hotelling's T² for several.

    Parameters
    ----------
    columns : array of shape (n_standards, n_kinds)
        One value a standard and kind. Where there are no more standards than kinds nothing can be shown: 1.
    """
    n, q = columns.shape
    mean, centred = columns.mean(axis=0), columns - columns.mean(axis=0)
    if q == 1:
        error = float(centred.std() / np.sqrt(n - 1))
        return t_two_sided_p(float(mean[0]) / error, n - 1) if error > 0 else float(mean[0] == 0)
    if n <= q:
        return 1.0
    turned = np.linalg.lstsq(centred.T @ centred, mean, rcond=None)[0]
    t_squared = n * (n - 1) * float(mean @ turned)
    return float(special.fdtrc(q, n - q, t_squared * (n - q) / (q * (n - 1))))


def dempster_p(rows: FloatArray) -> float:
    """Probability by chance of a mean row as large, for rows much longer than there are rows.

    Parameters
    ----------
    rows : array of shape (n_standards, n_points)
        Residuals, weighted so that all points scatter about alike.

    Notes
    -----
    F = n·|mean|² / tr S, with r and (n − 1)·r degrees of freedom, r = (tr Σ)²/tr Σ² from unbiased estimates.

    References
    ----------
    .. [1] A.P. Dempster, Ann. Math. Statist. 29 (1958) 995-1010; Z. Bai, H. Saranadasa, Statist. Sinica 6 (1996)
       311-329 for the estimates of the traces. Both from memory.
    """
    n = len(rows)
    m = n - 1
    mean = rows.mean(axis=0)
    centred = rows - mean
    gram = centred @ centred.T / m  # same non-zero eigenvalues as S
    trace, square = float(np.trace(gram)), float(np.einsum("ij,ij->", gram, gram))
    if trace <= 0:
        return float(not mean.any())
    scale = m**2 / ((m + 2) * (m - 1))
    of_square = scale * (square - trace**2 / m)
    square_of = scale * (m + 1) / m * (trace**2 - 2.0 * square / (m + 1))
    r = max(square_of / max(of_square, np.finfo(float).tiny), 1.0)
    r = min(r, float(rows.shape[1]))
    return float(special.fdtrc(r, m * r, n * float(mean @ mean) / trace))


def spread_p(before: FloatArray, after: FloatArray) -> float:
    """Probability by chance of two variances as different, two-sided F.

    Parameters
    ----------
    before, after : arrays of shape (n_before,), (n_after,), or with a column for each part
        Two rows at least, normally distributed. Variances of parts add up; degrees of freedom are counted as if one
        part made up all of it, which errs towards chance.
    """
    first, second = (float(np.sum(rows.var(axis=0, ddof=1))) for rows in (before, after))
    if first <= 0 or second <= 0:
        return float(first == second)
    above = float(special.fdtrc(len(after) - 1, len(before) - 1, second / first))
    return min(1.0, 2.0 * min(above, 1.0 - above))
