"""Spectra that a step is given beside the training spectra: interferents, analytes, differences."""

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import ParameterError


def known_spectra(name: str, spectra: ArrayLike | None, points: int) -> FloatArray:
    """Return spectra given to a step, shape (n, points), none for None.

    Raises
    ------
    ParameterError
        Not a table of finite numbers with as many columns as the spectra to be treated have points, or a row of zeros.
    """
    if spectra is None:
        return np.empty((0, points))
    matrix = as_matrix(name, spectra)
    if matrix.shape[1] != points:
        raise ParameterError(
            f"{name} have {matrix.shape[1]} point(s), the spectra {points}; expected as many. Take them through the "
            "steps that come before this one, on the same axis."
        )
    empty = np.flatnonzero(~matrix.any(axis=1))
    if empty.size:
        raise ParameterError(
            f"{name}: row(s) {name_some(empty)} (counted from 0) hold nothing but zeros; expected spectra. Leave them "
            "out."
        )
    return matrix
