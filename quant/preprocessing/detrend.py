"""Removal of a polynomial trend along the axis."""

from operator import index
from typing import ClassVar, Self

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix
from quant.errors import NotEnoughDataError, ParameterError
from quant.estimator.base import Step
from quant.spectra.segments import axis_values


def polynomial_terms(axis: FloatArray, degree: int) -> FloatArray:
    """Return Legendre polynomials of the axis values, shape (points, degree + 1), on −1 to 1 between the axis ends.

    Parameters
    ----------
    axis : array of shape (points,)
        [axis unit]
    degree : int
        Highest degree; 0 is a constant.

    Raises
    ------
    ParameterError
        A degree that is not a whole number from 0.
    """
    try:
        highest = index(degree)
    except TypeError:
        highest = -1
    if highest < 0:
        raise ParameterError(
            f"polynomial = {degree!r}; expected the degree of a polynomial: 0 (a constant), 1, 2 ... Choose one."
        )
    middle, half = (axis.max() + axis.min()) / 2, (axis.max() - axis.min()) / 2
    return np.asarray(legendre.legvander((axis - middle) / (half or 1.0), highest), dtype=np.float64)


def detrend(spectra: ArrayLike, axis: ArrayLike | None = None, polynomial: int = 2) -> FloatArray:
    """Subtract from each spectrum the polynomial in the axis values that fits it best.

    One polynomial is fitted to all points together, across cuts as well: scattering bends the baseline of a whole
    spectrum, and a polynomial for each range would take out more than that.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    axis : array of shape (points,), optional
        Strictly rising or falling, equally spaced or not; None numbers the points 0, 1, 2, ... [axis unit]
    polynomial : int
        Degree: 0 takes out the mean, 1 a line, 2 a parabola, as in [1].

    Returns
    -------
    array of shape (spectra, points)
        [unit of `spectra`]

    Raises
    ------
    NotEnoughDataError
        Not more points than the polynomial has coefficients: nothing would be left.
    ParameterError
        No such degree, or an axis that does not fit.

    References
    ----------
    .. [1] R. J. Barnes, M. S. Dhanoa, S. J. Lister, Applied Spectroscopy 43 (1989) 772-777 (second degree, after the
       standard normal variate); from memory.
    """
    X = as_matrix("spectra", spectra)
    basis = _basis(axis_values(axis, X.shape[1]), polynomial)
    return X - (X @ basis) @ basis.T


def _basis(axis: FloatArray, polynomial: int) -> FloatArray:
    """Return an orthonormal basis of the polynomials, shape (points, degree + 1)."""
    terms = polynomial_terms(axis, polynomial)
    if terms.shape[0] <= terms.shape[1]:
        raise NotEnoughDataError(
            f"A polynomial of degree {polynomial} fits any {terms.shape[1]} points, and nothing would be left; found "
            f"n_features = {terms.shape[0]}. Keep more points, or lower the degree."
        )
    return np.asarray(np.linalg.qr(terms).Q, dtype=np.float64)


class Detrend(Step):
    """Subtract the polynomial in the axis values that fits each spectrum best, usually after snv.

    One polynomial is fitted to all points together, across cuts as well.

    Parameters
    ----------
    polynomial : int
        Degree: 0 takes out the mean, 1 a line, 2 a parabola.
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "detrend"
    linear = True
    fitted = ("basis_",)

    def __init__(self, polynomial: int = 2, axis: ArrayLike | None = None) -> None:
        self.polynomial = polynomial
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Work out the polynomials on this axis."""
        self.basis_ = _basis(axis_values(self.axis, self.check_fit(X).shape[1]), self.polynomial)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra without their trend, shape (n, points)."""
        matrix = self.check_new(X)
        return matrix - (matrix @ self.basis_) @ self.basis_.T

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Return the axis unchanged, once it is known to hold points enough. [axis unit]"""
        _basis(axis, self.polynomial)
        return axis
