"""Several tests of one question, held together so that chance alone seldom makes any of them speak."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import ParameterError


def holm_adjusted(p_values: ArrayLike) -> FloatArray:
    """Return p-values adjusted by Holm: those at or below α are significant at family-wise level α.

    Parameters
    ----------
    p_values : array of shape (n_tests,)
        One a test, from 0 to 1.

    Returns
    -------
    array of shape (n_tests,)
        In the same order; never below the p-value itself, at most 1.

    Raises
    ------
    ParameterError
        A number outside 0 to 1.

    References
    ----------
    .. [1] S. Holm, Scand. J. Statist. 6 (1979) 65-70 (from memory).

    Examples
    --------
    >>> holm_adjusted([0.01, 0.04, 0.03]).round(3).tolist()
    [0.03, 0.06, 0.06]
    """
    p = np.asarray(p_values, dtype=np.float64)
    if not ((p >= 0) & (p <= 1)).all():
        raise ParameterError(f"p-values run from {p.min():g} to {p.max():g}; expected numbers from 0 to 1.")
    order = np.argsort(p, kind="stable")
    stepped = np.maximum.accumulate(p[order] * (p.size - np.arange(p.size)))
    adjusted = np.empty_like(p)
    adjusted[order] = np.minimum(stepped, 1.0)
    return adjusted
