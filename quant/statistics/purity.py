"""Purity by difference: what is left of the whole when every measured impurity is taken away.

What was not measured is counted as pure, so the figure is an upper bound, and its uncertainty covers the measured
impurities only.
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, paired_vectors
from quant.errors import ParameterError
from quant.result import Result, documented
from quant.text_table import Row, format_rows

UPPER_BOUND = "an upper bound: impurities that were not measured are counted as pure"


@dataclass(frozen=True, kw_only=True)
class Purity(Result):
    """Purity by difference."""

    value: float = documented("Total less the sum of the measured impurities; an upper bound", "unit of the contents")
    standard_uncertainty: float = documented("Of that sum, correlations included", "unit of the contents")
    total: float = documented("The whole", "unit of the contents")
    n_impurities: int = documented("Number of measured impurities")
    statement: str = documented("What the figure means")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("purity by difference, at most", self.value, ""),
            ("standard uncertainty", self.standard_uncertainty, ""),
            ("statement", self.statement, ""),
        ]

    def __str__(self) -> str:
        return f"Purity, {self.n_impurities} impurities measured\n{format_rows(self.rows())}"


def purity_by_difference(
    contents: ArrayLike,
    standard_uncertainties: ArrayLike,
    correlations: ArrayLike | None = None,
    total: float = 100.0,
) -> Purity:
    """Purity P = total - sum(c_i) with u² = sum over i and j of r_ij·u_i·u_j.

    Impurities predicted from one spectrum share its errors: their correlations are not zero. Negative contents are
    taken as they are; cutting them off would make every purity too low.

    Parameters
    ----------
    contents, standard_uncertainties : arrays of shape (n_impurities,)
        c_i and u_i, one impurity at least. [one unit for all, that of the total]
    correlations : array of shape (n_impurities, n_impurities), optional
        r_ij of the errors, such as those of left-out samples; none where it is not given.
    total : float
        The whole: 100 for percent. [same unit]

    Raises
    ------
    SampleMismatchError
        Contents and uncertainties differ in number.
    NotEnoughDataError
        There is no impurity.
    ParameterError
        A value that is not finite, negative uncertainties, or numbers that are no correlations.

    References
    ----------
    .. [1] JCGM 100:2008 (GUM), 5.2: uncertainty of a sum of correlated values (from memory).
    """
    c, u = paired_vectors("contents", contents, "standard uncertainties", standard_uncertainties)
    if (u < 0).any() or not math.isfinite(total):
        raise ParameterError("standard uncertainties must not be negative, and the total has to be finite.")
    r = np.eye(c.size) if correlations is None else _checked_correlations(correlations, c.size)
    variance = float(u @ r @ u)
    return Purity(
        value=total - float(c.sum()),
        standard_uncertainty=math.sqrt(max(variance, 0.0)),  # below zero by rounding only: r has no negative eigenvalue
        total=total,
        n_impurities=c.size,
        statement=UPPER_BOUND,
    )


def _checked_correlations(correlations: ArrayLike, n: int) -> FloatArray:
    r = as_matrix("correlations", correlations)
    if r.shape != (n, n):
        raise ParameterError(f"correlations have shape {r.shape}; expected ({n}, {n}) for {n} impurities.")
    if not (np.allclose(r, r.T, rtol=0, atol=1e-9) and np.allclose(np.diag(r), 1, rtol=0, atol=1e-9)):
        raise ParameterError("correlations must be symmetric with 1 on the diagonal.")
    if np.linalg.eigvalsh(r).min() < -1e-9 * n:
        raise ParameterError(
            "correlations contradict each other (a negative eigenvalue); estimate them from one data set."
        )
    return r
