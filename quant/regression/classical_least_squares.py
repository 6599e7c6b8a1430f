"""Classical least squares: spectra as sums of pure spectra times contents (Beer-Lambert), read backwards."""

from collections.abc import Sequence
from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector, one_of
from quant.errors import AxisMismatchError, NotEnoughDataError
from quant.estimator.input import check_weights
from quant.regression.bidiagonal import EPS
from quant.regression.method import Method
from quant.regression.non_negative import non_negative_least_squares

BASELINES = ("none", "offset", "slope", "quadratic")


class ClassicalLeastSquares(Method):
    """Multicomponent Beer-Lambert: X = C·K + E, with K estimated from standards and C from a new spectrum.

    All that absorbs and varies must be among the components: what is missing is taken for those that are there.

    Parameters
    ----------
    components : sequence of str, optional
        Names of the components besides the one predicted; `fit` takes their contents as further columns of y.
    background : bool
        Whether a spectrum that all samples share (solvent, matrix) is fitted besides the components. Not where all
        contents add up to a constant.
    baseline : {"none", "offset", "slope", "quadratic"}
        Polynomial in the axis, of its own for each spectrum, fitted beside the pure spectra.
    non_negative : bool
        Whether contents below zero are held at zero and the others fitted anew; biased near zero.
    axis : array of shape (k,), optional
        Axis values for the baseline; None: points are equally spaced. [axis unit]

    Attributes
    ----------
    pure_spectra_ : array of shape (p, k)
        K = (C'WC)⁻¹·C'WX: the component predicted first, then `components`. With a baseline they are only known up to
        such a polynomial each, and the predictions do not depend on it. [unit of X / unit of y]
    background_ : array of shape (k,)
        Zero without a background. [unit of X]
    baseline_basis_ : array of shape (terms, k)
        Orthonormal polynomials.
    inverse_cross_products_ : array of shape (q, q)
        (C'WC)⁻¹; C has a first column of ones where there is a background.
    n_samples_ : float
        Sum of the training weights.

    Notes
    -----
    The leverage of a spectrum is ĉ'(C'WC)⁻¹ĉ of its estimated contents ĉ: the share of the calibration in the variance
    of a prediction, σ²·(1 + h)/|net analyte signal|². `factor_counts_` holds one number, p − 1 (p with a background).

    References
    ----------
    .. [1] D. M. Haaland, R. G. Easterling, Appl. Spectrosc. 34 (1980) 539; 36 (1982) 665 (from memory).
    """

    averages_replicates: ClassVar[bool] = False
    classical: ClassVar[bool] = True
    fitted: ClassVar[tuple[str, ...]] = (
        *("n_samples_", "pure_spectra_", "background_", "baseline_basis_", "inverse_cross_products_"),
    )

    def __init__(
        self,
        components: Sequence[str] | None = None,
        background: bool = False,  # noqa: FBT001 (a scikit-learn parameter)
        baseline: str = "none",
        non_negative: bool = False,  # noqa: FBT001 (a scikit-learn parameter)
        axis: ArrayLike | None = None,
    ) -> None:
        self.components = components
        self.background = background
        self.baseline = baseline
        self.non_negative = non_negative
        self.axis = axis

    @property
    def companions(self) -> tuple[str, ...]:
        """The other components."""
        return tuple(self.components or ())

    @property
    def factor_counts_(self) -> tuple[int, ...]:
        """(p − 1,), with a background (p,): one term takes the place of the mean."""
        return (len(self.inverse_cross_products_) - 1,)

    @property
    def coefficients_(self) -> FloatArray:
        """Regression vector, shape (1, k); contents held at zero have none. [unit of y / unit of X]

        Raises
        ------
        AttributeError
            The prediction is not linear in the spectrum.
        """
        if self.non_negative:
            raise AttributeError("non_negative = true: the prediction is not linear and has no regression vector.")
        basis, triangle = self._decompose()
        vectors = np.asarray(np.linalg.solve(triangle, basis.T), dtype=np.float64)
        return vectors[:1]

    def unconstrained(self) -> Self:
        """Return a fitted copy that lets contents fall below zero: linear in the spectrum."""
        free = type(self)(**{**self.get_params(), "non_negative": False})
        free.__dict__.update({**self.__dict__, "non_negative": False})
        return free

    def fit(self, X: ArrayLike, y: ArrayLike | None = None, sample_weight: ArrayLike | None = None) -> Self:
        """Estimate the pure spectra.

        Parameters
        ----------
        X : array of shape (n, k)
            Spectra, neither centred nor scaled. [absorbance]
        y : array of shape (n,), or (n, 1 + len(components))
            Contents: of the component to predict, then of the others.
        sample_weight : array of shape (n,), optional
            Weights; zero means that the row is absent. The m replicates of one sample weigh 1/m each.

        Raises
        ------
        AxisMismatchError
            The axis has another length than the spectra.
        NotEnoughDataError
            Fewer samples or points than components, contents that are linear combinations of each other, or a
            component without a spectrum of its own.
        ParameterError
            X, y, the weights or the baseline cannot be used.
        """
        matrix, values, others = self.check_fit_companions(X, y)
        weight = check_weights(sample_weight, values.size)
        contents = np.column_stack([*([np.ones(values.size)] if self.background else []), values, others])
        root = np.sqrt(weight)[:, None]
        self._check_contents(contents * root)
        spectra: FloatArray = np.linalg.lstsq(contents * root, matrix * root, rcond=None)[0]
        self.n_samples_ = float(weight.sum())
        self.background_ = spectra[0] if self.background else np.zeros(matrix.shape[1])
        self.pure_spectra_ = spectra[int(self.background) :]
        triangle = np.linalg.qr(contents * root, mode="r")
        half = np.linalg.solve(triangle, np.eye(len(triangle)))
        self.inverse_cross_products_ = half @ half.T
        self.baseline_basis_ = self._polynomials(matrix.shape[1])
        self._check_spectra()
        return self

    def contents(self, X: ArrayLike) -> FloatArray:
        """Estimate the contents of all components, shape (n, p). [unit of y]"""
        basis, triangle = self._decompose()
        projected = (self.check_new(X) - self.background_) @ basis
        found = np.asarray(np.linalg.solve(triangle, projected.T).T, dtype=np.float64)
        if self.non_negative:
            for row in np.flatnonzero((found < 0).any(axis=1)):
                found[row] = non_negative_least_squares(triangle, projected[row])
        return found

    def residual_spectra(self, X: ArrayLike) -> FloatArray:
        """Return what background, components and baseline leave of each spectrum, shape (n, k). [unit of X]"""
        rest = self.check_new(X) - self.background_ - self.contents(X) @ self.pure_spectra_
        return self._without_baseline(rest)

    def predict_each(self, X: ArrayLike) -> FloatArray:
        """Predict, shape (1, n). [unit of y]"""
        return self.contents(X)[:, 0][None, :]

    def leverage_each(self, X: ArrayLike) -> FloatArray:
        """Leverage ĉ'(C'WC)⁻¹ĉ, shape (1, n)."""
        found = self.contents(X)
        terms = np.column_stack([np.ones(len(found)), found]) if self.background else found
        leverage: FloatArray = np.einsum("np,pq,nq->n", terms, self.inverse_cross_products_, terms)
        return leverage[None, :]

    def residual_each(self, X: ArrayLike) -> FloatArray:
        """Sum of squares of the residual spectra, shape (1, n). [(unit of X)²]"""
        rest = self.residual_spectra(X)
        squares: FloatArray = np.einsum("nk,nk->n", rest, rest)
        return squares[None, :]

    def remarks_each(self, X: ArrayLike) -> tuple[str, ...]:
        """Name the components held at zero."""
        if not self.non_negative:
            return super().remarks_each(X)
        names = ("the analyte", *self.companions)
        held = [[name for name, value in zip(names, row, strict=True) if value == 0] for row in self.contents(X)]
        return tuple(f"held at zero: {', '.join(row)}" if row else "" for row in held)

    def with_factors(self, count: int) -> Self:
        """Return itself: there is no simpler self.

        Raises
        ------
        ParameterError
            `count` is not the one of `factor_counts_`.
        """
        self.check_count(count)
        return self

    def _decompose(self) -> tuple[FloatArray, FloatArray]:
        """Q (k, p) and R (p, p) of the pure spectra less their baselines: x·Q = R·c for every spectrum x."""
        self.check_fitted()
        basis, triangle = np.linalg.qr(self._without_baseline(self.pure_spectra_).T)
        return basis, triangle

    def _without_baseline(self, spectra: FloatArray) -> FloatArray:
        return spectra - (spectra @ self.baseline_basis_.T) @ self.baseline_basis_

    def _polynomials(self, n_points: int) -> FloatArray:
        terms = BASELINES.index(one_of("baseline", self.baseline, BASELINES))
        place = np.arange(float(n_points)) if self.axis is None else as_vector("axis", self.axis)
        if place.size != n_points:
            raise AxisMismatchError(f"axis has {place.size} values, the spectra have {n_points} points.")
        if n_points < terms + len(self.pure_spectra_):
            raise NotEnoughDataError(
                f"{len(self.pure_spectra_)} component(s) and {terms} baseline term(s) cannot be told apart from "
                f"n_features={n_points} point(s). Keep more of the spectrum."
            )
        middle, reach = (place.max() + place.min()) / 2, max(float(np.ptp(place)) / 2, 1e-300)
        powers = np.vander((place - middle) / reach, terms, increasing=True)
        return np.ascontiguousarray(np.linalg.qr(powers)[0].T) if terms else np.empty((0, n_points))

    def _check_contents(self, contents: FloatArray) -> None:
        n, terms = int(np.count_nonzero(contents.any(axis=1))), contents.shape[1]
        if n < terms or not _independent(contents, np.linalg.norm(contents, axis=0)):
            background = " and a background" if self.background else ""
            raise NotEnoughDataError(
                f"{1 + len(self.companions)} component(s){background} cannot be told apart: the contents of the {n} "
                "samples are too few, all zero, or determine each other (as where they add up to a constant). Add "
                "standards in which they vary independently, or leave out a component or the background."
            )

    def _check_spectra(self) -> None:
        lengths = np.linalg.norm(self.pure_spectra_, axis=1)  # those with their baselines: rounding error stays small
        if not _independent(self._without_baseline(self.pure_spectra_).T, lengths):
            raise NotEnoughDataError(
                f"The {len(self.pure_spectra_)} component(s) have no spectra that differ from each other and from the "
                "baseline. Keep ranges in which each absorbs, or take a simpler baseline."
            )


def _independent(columns: FloatArray, lengths: FloatArray) -> bool:
    """Whether no column, of about these lengths, is zero or a combination of the others, to rounding error."""
    if not lengths.all():
        return False
    sizes = np.linalg.svd(columns / lengths, compute_uv=False)
    return bool(sizes[-1] > 10 * max(columns.shape) * EPS)
