"""Standard normal variate."""

from typing import ClassVar

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import NotEnoughDataError, QuantityError
from quant.estimator.base import Step
from quant.preprocessing.rounding import vanishes


def snv(spectra: ArrayLike) -> FloatArray:
    """Subtract from each spectrum its mean and divide it by its standard deviation.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]

    Returns
    -------
    array of shape (spectra, points)
        Each row has mean 0 and standard deviation 1, with points − 1 in the denominator. [1]

    Raises
    ------
    NotEnoughDataError
        Fewer than two points.
    QuantityError
        A flat spectrum, which has no standard deviation to divide by.

    References
    ----------
    .. [1] R. J. Barnes, M. S. Dhanoa, S. J. Lister, Applied Spectroscopy 43 (1989) 772-777; from memory.
    """
    X = as_matrix("spectra", spectra)
    if X.shape[1] < 2:
        raise NotEnoughDataError(
            f"The standard normal variate needs at least two points a spectrum; found n_features = {X.shape[1]}."
        )
    mean = X.mean(axis=1)
    result: FloatArray = X - mean[:, np.newaxis]  # the one array of this size: what follows works in place
    spread = np.sqrt(np.vecdot(result, result) / (X.shape[1] - 1))
    flat = np.flatnonzero(vanishes(spread, np.abs(mean)))
    if flat.size:
        raise QuantityError(
            f"{flat.size} spectra are flat (standard deviation 0), in row(s) {name_some(flat)} (counted from 0); "
            "expected spectra that vary along the axis. Leave them out, or measure them again."
        )
    result *= (1.0 / spread)[:, np.newaxis]
    return result


class SNV(Step):
    """Remove offset and scale from each spectrum by itself (standard normal variate)."""

    name: ClassVar[str] = "snv"

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra of mean 0 and standard deviation 1, shape (n, points)."""
        return snv(self.check_new(X))
