"""Extended multiplicative signal correction."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector, name_some
from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.estimator.base import Step
from quant.estimator.input import check_weights
from quant.preprocessing.centre import mean_spectrum
from quant.preprocessing.detrend import polynomial_terms
from quant.preprocessing.known_spectra import known_spectra
from quant.preprocessing.msc import LEAST_CORRELATION
from quant.preprocessing.rounding import vanishes
from quant.spectra.segments import axis_values

COLLINEAR = 1e-8  # a term of which the others leave a smaller share than this cannot be told from them


def emsc(
    spectra: ArrayLike,
    reference: ArrayLike,
    axis: ArrayLike | None = None,
    polynomial: int = 2,
    interferents: ArrayLike | None = None,
    analytes: ArrayLike | None = None,
) -> FloatArray:
    """Fit each spectrum by a reference, a polynomial and known spectra; take out the last two and divide by b.

    x = b·reference + Σ cₖ·tᵏ + Σ dⱼ·interferentⱼ + Σ hⱼ·analyteⱼ + e, with t the axis scaled to −1 ... 1, becomes
    (x − Σ cₖ·tᵏ − Σ dⱼ·interferentⱼ)/b. The analytes are fitted so that they do not disturb b, but they stay.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    reference : array of shape (points,)
        Usually the mean of the training spectra. [unit of `spectra`]
    axis : array of shape (points,), optional
        None numbers the points 0, 1, 2, ... [axis unit]
    polynomial : int
        Degree k of the baseline; 0 is an offset.
    interferents, analytes : array of shape (n, points), optional
        Spectra of what is to be taken out, and of what is to be kept; their size does not matter. [any unit]

    Returns
    -------
    array of shape (spectra, points)
        [unit of `spectra`]

    Raises
    ------
    NotEnoughDataError
        Fewer points than terms.
    ParameterError
        Spectra of another length, or a degree that is none.
    QuantityError
        Terms that cannot be told apart, or a spectrum whose b cannot be told from zero.

    References
    ----------
    .. [1] H. Martens, E. Stark, Journal of Pharmaceutical and Biomedical Analysis 9 (1991) 625-635; from memory.
    .. [2] N. K. Afseth, A. Kohler, Chemometrics and Intelligent Laboratory Systems 117 (2012) 92-99; from memory.
    """
    X, r = as_matrix("spectra", spectra), as_vector("reference", reference)
    terms, kept = _terms(r, axis_values(axis, X.shape[1]), polynomial, interferents, analytes)
    Q, R = np.linalg.qr(terms)
    along = X @ Q
    coefficients = np.linalg.solve(R, along.T).T
    # The reference is the last term: its part along Q is what no other term explains.
    shared = np.abs(along[:, -1])
    total = np.hypot(shared, np.linalg.norm(X - along @ Q.T, axis=1))
    bad = np.flatnonzero((shared <= LEAST_CORRELATION * total) | vanishes(shared, np.abs(X).max(axis=1)))
    if bad.size:
        raise QuantityError(
            f"{bad.size} spectra have nothing in common with the reference spectrum (b about 0), in row(s) "
            f"{name_some(bad)} (counted from 0); expected spectra of the same kind. Leave them out, or measure them "
            "again."
        )
    unwanted = coefficients[:, :-kept] @ terms[:, :-kept].T
    result: FloatArray = (X - unwanted) / coefficients[:, -1:]
    return result


def _terms(
    reference: FloatArray,
    axis: FloatArray,
    polynomial: int,
    interferents: ArrayLike | None,
    analytes: ArrayLike | None,
) -> tuple[FloatArray, int]:
    """Return the terms side by side, shape (points, terms), what is kept last, and how many those are."""
    if reference.size != axis.size:
        raise ParameterError(f"The reference spectrum has {reference.size} points, the spectra {axis.size}.")
    baseline = polynomial_terms(axis, polynomial)
    unwanted = known_spectra("interferents", interferents, axis.size)
    wanted = known_spectra("analytes", analytes, axis.size)
    names = [
        *(f"baseline term of degree {degree}" for degree in range(baseline.shape[1])),
        *(f"interferent {number}" for number in range(1, len(unwanted) + 1)),
        *(f"analyte {number}" for number in range(1, len(wanted) + 1)),
        "reference spectrum (mean of the training spectra)",
    ]
    if axis.size < len(names):
        raise NotEnoughDataError(
            f"emsc fits {len(names)} terms, which needs at least as many points; found n_features = {axis.size}. Keep "
            "more points, lower polynomial, or give fewer spectra."
        )
    # At length one, so that their units do not matter; the reference keeps its size, and so does b.
    others = np.hstack([baseline, unwanted.T, wanted.T])
    terms = np.column_stack([others / np.linalg.norm(others, axis=0), reference])
    own = np.abs(np.diag(np.linalg.qr(terms).R))
    own[-1] /= np.linalg.norm(reference) or 1.0
    lost = np.flatnonzero(own <= COLLINEAR)
    if lost.size:
        raise QuantityError(
            f"emsc: {name_some(names[i] for i in lost)} cannot be told from the terms before; expected terms of which "
            f"none is a sum of others: {name_some(names)}. Leave out what is there twice, lower polynomial, or check "
            "that the spectra are not flat."
        )
    return terms, len(wanted) + 1


class EMSC(Step):
    """Remove scale, a polynomial baseline and known interferents (extended multiplicative signal correction).

    The reference is the weighted mean of the training spectra.

    Parameters
    ----------
    polynomial : int
        Degree of the baseline; 0 is an offset, which without further terms makes this msc.
    interferents : array of shape (n, points), optional
        Spectra of what is to be taken out, such as moisture. [any unit]
    analytes : array of shape (n, points), optional
        Spectra of what must stay: fitted, so that they do not disturb the scale, but not taken out. [any unit]
    axis : array of shape (points,), optional
        Axis values of the input; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "emsc"
    learns = True
    fitted = ("reference_",)

    def __init__(
        self,
        polynomial: int = 2,
        interferents: ArrayLike | None = None,
        analytes: ArrayLike | None = None,
        axis: ArrayLike | None = None,
    ) -> None:
        self.polynomial = polynomial
        self.interferents = interferents
        self.analytes = analytes
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:  # noqa: ARG002
        """Take the weighted mean of the training spectra as reference."""
        matrix = self.check_fit(X)
        reference = mean_spectrum(matrix, check_weights(sample_weight, matrix.shape[0]))
        axis = axis_values(self.axis, matrix.shape[1])
        _terms(reference, axis, self.polynomial, self.interferents, self.analytes)
        self.reference_ = reference
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return corrected spectra, shape (n, points)."""
        matrix = self.check_new(X)
        return emsc(matrix, self.reference_, self.axis, self.polynomial, self.interferents, self.analytes)
