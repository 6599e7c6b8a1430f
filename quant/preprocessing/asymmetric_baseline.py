"""Asymmetric least squares baseline."""

from operator import index
from typing import ClassVar, NamedTuple, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import NotEnoughDataError, ParameterError
from quant.estimator.base import Step
from quant.spectra.segments import axis_values, describe_segment, equal_spacing, segments

REFINEMENTS = 2  # of the last solution: its rounding error falls from the condition number's size to that of its root


class _Factors(NamedTuple):
    """L·E·Lᵀ of W/λ + Dᵀ·D, pentadiagonal, for each spectrum; both of shape (points, spectra)."""

    beside: FloatArray  # L just below its diagonal of ones: row i couples points i and i − 1
    inverse: FloatArray  # 1/E; as points two apart are coupled by 1, also L two below its diagonal, at i + 2


def asymmetric_baseline(
    spectra: ArrayLike,
    smoothness: float = 1e6,
    asymmetry: float = 0.01,
    iterations: int = 10,
    axis: ArrayLike | None = None,
) -> FloatArray:
    """Return the smooth line z under each spectrum y that minimises Σ wᵢ (yᵢ − zᵢ)² + λ Σ (zᵢ₋₁ − 2 zᵢ + zᵢ₊₁)².

    wᵢ is p where yᵢ > zᵢ, else 1 − p, so that bands above the line hardly lift it; weights and line are found in turn,
    from weights of one [1]. Each contiguous segment has its own line.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    smoothness : float
        λ, above 0: 10² to 10⁹. It counts points: at twice the points in the same range take 16 times as much. [1]
    asymmetry : float
        p, between 0 and 1: 0.001 to 0.1 for bands that point upwards, 0.5 for plain smoothing. [1]
    iterations : int
        How often, at most, the line is found; less where the weights have come to rest.
    axis : array of shape (points,), optional
        Equally spaced within each segment; None numbers the points 0, 1, 2, ... [axis unit]

    Returns
    -------
    array of shape (spectra, points)
        [unit of `spectra`]

    Raises
    ------
    NotEnoughDataError
        A segment of fewer than three points.
    ParameterError
        A number out of its range, or an axis that is not equally spaced.

    References
    ----------
    .. [1] P. H. C. Eilers, H. F. M. Boelens, Baseline correction with asymmetric least squares smoothing, Leiden
       University Medical Centre report (2005); from memory.
    """
    X = as_matrix("spectra", spectra)
    _check_numbers(smoothness, asymmetry, iterations)
    result = np.empty_like(X)
    for run in _runs(axis_values(axis, X.shape[1])):
        result[:, run] = _baseline(np.ascontiguousarray(X[:, run].T), smoothness, asymmetry, iterations).T
    return result


def _check_numbers(smoothness: float, asymmetry: float, iterations: int) -> None:
    if not (np.isfinite(smoothness) and smoothness > 0):
        raise ParameterError(f"smoothness = {smoothness:g}; expected a number above 0. Try 1e2 to 1e9.")
    if not 0 < asymmetry < 1:
        raise ParameterError(f"asymmetry = {asymmetry:g}; expected a number between 0 and 1. Try 0.001 to 0.1.")
    try:
        enough = index(iterations) >= 1
    except TypeError:
        enough = False
    if not enough:
        raise ParameterError(f"iterations = {iterations!r}; expected a whole number from 1. Try 10.")


def _runs(axis: FloatArray) -> list[slice]:
    """Return the segments, each long enough and equally spaced."""
    runs = segments(axis)
    short = [run for run in runs if run.stop - run.start < 3]
    if short:
        raise NotEnoughDataError(
            "A smooth baseline needs at least three points in each segment; found n_features = "
            f"{axis.size}, and segment(s) {name_some(describe_segment(axis, run) for run in short)}. Keep wider "
            "ranges, or cut the ranges after this step."
        )
    equal_spacing(axis)
    return runs


def _baseline(y: FloatArray, smoothness: float, asymmetry: float, iterations: int) -> FloatArray:
    """Return the baseline of one segment, shapes (points, spectra)."""
    # The straight line that fits best belongs to every baseline as it is; without it the rest is found to more digits.
    basis = np.linalg.qr(np.column_stack([np.ones(len(y)), np.linspace(-1.0, 1.0, len(y))])).Q
    line = basis @ (basis.T @ y)
    rest = y - line
    weights = np.ones_like(y)
    for _ in range(iterations):
        share = weights / smoothness
        factors = _factorise(share)
        z = _solve(factors, share * rest)
        last, weights = weights, np.where(rest > z, asymmetry, 1.0 - asymmetry)
        if np.array_equal(weights, last):
            break
    for _ in range(REFINEMENTS):
        z += _solve(factors, share * (rest - z) - _roughness_gradient(z))
    return line + z


def _roughness_gradient(z: FloatArray) -> FloatArray:
    """Return Dᵀ·D·z, D taking second differences along the points; shapes (points, spectra)."""
    bend = z[:-2] - 2.0 * z[1:-1] + z[2:]
    result = np.zeros_like(z)
    result[:-2] += bend
    result[1:-1] -= 2.0 * bend
    result[2:] += bend
    return result


def _factorise(share: FloatArray) -> _Factors:
    """Return the factors of W/λ + Dᵀ·D for W/λ of shape (points, spectra)."""
    bends = np.ones(len(share) - 2)
    pivots = share + np.convolve(bends, [1.0, 4.0, 1.0])[:, np.newaxis]  # become E, row by row
    couplings = np.convolve(bends, [-2.0, -2.0]).tolist()
    beside, inverse = np.zeros_like(share), np.empty_like(share)
    before, last = np.zeros_like(share[0]), np.divide(1.0, pivots[0], out=inverse[0])
    factor = beside[0]
    for coupling, pivot, row, inverted in zip(couplings, pivots[1:], beside[1:], inverse[1:], strict=True):
        coupled = coupling - factor
        factor = np.multiply(coupled, last, out=row)
        pivot -= factor * coupled
        pivot -= before
        before, last = last, np.divide(1.0, pivot, out=inverted)
    return _Factors(beside, inverse)


def _solve(factors: _Factors, right: FloatArray) -> FloatArray:
    """Return the solution for a right-hand side of shape (points, spectra), which is left as it was."""
    beside, inverse = factors
    z = right.copy()
    z[1] -= beside[1] * z[0]
    for far, near, row, farther, nearer in zip(inverse[:-2], beside[2:], z[2:], z[:-2], z[1:-1], strict=True):
        row -= near * nearer + far * farther
    z *= inverse
    z[-2] -= beside[-1] * z[-1]
    back = slice(None, None, -1)
    for far, near, row, farther, nearer in zip(
        inverse[:-2][back], beside[1:-1][back], z[:-2][back], z[2:][back], z[1:-1][back], strict=True
    ):
        row -= near * nearer + far * farther
    return z


class AsymmetricBaseline(Step):
    """Subtract a smooth baseline that bands hardly lift (asymmetric least squares), within each contiguous segment.

    Parameters
    ----------
    smoothness : float
        Above 0; 1e2 to 1e9. The larger, the stiffer; a line stays a line whatever it is. It counts points: at twice the
        points in the same range take 16 times as much.
    asymmetry : float
        Between 0 and 1: weight of points above the baseline, those below having 1 less this. 0.001 to 0.1 for bands
        that point upwards.
    iterations : int
        How often, at most, weights and baseline are found in turn.
    axis : array of shape (points,), optional
        Axis values of the input, equally spaced within each segment; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "asymmetric_baseline"

    def __init__(
        self,
        smoothness: float = 1e6,
        asymmetry: float = 0.01,
        iterations: int = 10,
        axis: ArrayLike | None = None,
    ) -> None:
        self.smoothness = smoothness
        self.asymmetry = asymmetry
        self.iterations = iterations
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Check the numbers and the axis; nothing is learnt."""
        _check_numbers(self.smoothness, self.asymmetry, self.iterations)
        _runs(axis_values(self.axis, self.check_fit(X).shape[1]))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return spectra without their baseline, shape (n, points)."""
        matrix = self.check_new(X)
        return matrix - asymmetric_baseline(matrix, self.smoothness, self.asymmetry, self.iterations, self.axis)

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Return the axis unchanged, once it is known to be equally spaced in long enough segments. [axis unit]"""
        _runs(axis)
        return axis
