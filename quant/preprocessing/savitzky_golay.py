"""Savitzky-Golay smoothing and derivatives."""

from functools import lru_cache
from operator import index
from typing import ClassVar, Self

import numpy as np
from numpy.lib.stride_tricks import sliding_window_view
from numpy.polynomial import legendre
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, name_some
from quant.errors import ParameterError
from quant.estimator.base import Step
from quant.spectra.segments import axis_values, describe_segment, equal_spacing, segments

HIGHEST_DERIVATIVE = 4
BLOCK = 8  # neighbouring windows in one matrix product: measured fastest on 100 to 2000 spectra, windows 5 to 101


def window_coefficients(window: int, polynomial: int, derivative: int = 0) -> FloatArray:
    """Return what turns the values in a window into the fitted polynomial, or its derivative, at each of its points.

    Parameters
    ----------
    window : int
        Odd number of points.
    polynomial : int
        Degree of the polynomial fitted to them by least squares, below `window`.
    derivative : int
        Order, 0 to 4 and not above `polynomial`; 0 smooths.

    Returns
    -------
    array of shape (window, window)
        Row i gives the result at point i of the window. The middle row holds the convolution coefficients of [1], the
        others those for the ends of a spectrum. Derivatives are per point^derivative.

    Raises
    ------
    ParameterError
        An even window, or numbers that do not go together.

    References
    ----------
    .. [1] A. Savitzky, M. J. E. Golay, Analytical Chemistry 36 (1964) 1627-1639; tables from memory, recomputed.
    .. [2] P. A. Gorry, Analytical Chemistry 62 (1990) 570-573 (orthogonal polynomials, ends); from memory.
    """
    _check_numbers(window, polynomial, derivative)
    half = max(window // 2, 1)
    t = (np.arange(window) - window // 2) / half  # −1 to 1, on which Legendre polynomials keep the fit well-conditioned
    basis = legendre.legvander(t, polynomial)
    Q, R = np.linalg.qr(basis)
    fit = np.linalg.solve(R, Q.T)  # values in the window -> weights of the basis polynomials
    differentiated = legendre.legder(np.eye(polynomial + 1), derivative, scl=1.0 / half)
    return np.asarray(legendre.legval(t, differentiated).T @ fit, dtype=np.float64)


def savitzky_golay(
    spectra: ArrayLike, window: int = 11, polynomial: int = 2, derivative: int = 0, axis: ArrayLike | None = None
) -> FloatArray:
    """Smooth or differentiate spectra by polynomials fitted in a moving window.

    Each contiguous segment is treated by itself. At its ends the polynomial fitted to the first (last) window supplies
    the values, so that all points are kept.

    Parameters
    ----------
    spectra : array of shape (spectra, points)
        [any unit]
    window, polynomial, derivative : int
        See `window_coefficients`.
    axis : array of shape (points,), optional
        Equally spaced within each segment; None numbers the points 0, 1, 2, ... [axis unit]

    Returns
    -------
    array of shape (spectra, points)
        [unit of `spectra` / axis unit^derivative]

    Raises
    ------
    ParameterError
        As `window_coefficients`; an axis that is not equally spaced; a segment shorter than the window.
    """
    X = as_matrix("spectra", spectra)
    coefficients, runs = _plan(axis_values(axis, X.shape[1]), window, polynomial, derivative)
    return _slide(X, coefficients, runs)


def _check_numbers(window: int, polynomial: int, derivative: int) -> None:
    try:
        index(window), index(polynomial), index(derivative)
    except TypeError as problem:
        raise ParameterError(
            f"savitzky_golay: window = {window!r}, polynomial = {polynomial!r}, derivative = {derivative!r}; "
            "expected whole numbers."
        ) from problem
    if window < 1 or window % 2 == 0:
        raise ParameterError(
            f"savitzky_golay: window = {window}; expected an odd number of points, so that one is in the middle. "
            f"Use {max(window - 1, 1)} or {max(window + 1, 3)}."
        )
    if not 0 <= polynomial < window:
        raise ParameterError(
            f"savitzky_golay: polynomial = {polynomial} with window = {window}; expected a degree from 0 to "
            f"{window - 1}. Use a lower degree or a longer window."
        )
    if not 0 <= derivative <= HIGHEST_DERIVATIVE:
        raise ParameterError(
            f"savitzky_golay: derivative = {derivative}; expected 0 (smoothing) to {HIGHEST_DERIVATIVE}. Choose one "
            "of these."
        )
    if derivative > polynomial:
        raise ParameterError(
            f"savitzky_golay: derivative = {derivative} of a polynomial of degree {polynomial} is zero everywhere; "
            f"expected a degree of at least {derivative}. Raise polynomial (and window, if need be)."
        )


def _plan(axis: FloatArray, window: int, polynomial: int, derivative: int) -> tuple[FloatArray, list[slice]]:
    """Return coefficients per axis unit, shape (window, window), and the segments they slide over."""
    _check_numbers(window, polynomial, derivative)
    coefficients, runs = _kept_plan(axis.tobytes(), window, polynomial, derivative)
    return coefficients.copy(), list(runs)


@lru_cache(maxsize=64)  # a search fits the same step again and again
def _kept_plan(
    axis_bytes: bytes, window: int, polynomial: int, derivative: int
) -> tuple[FloatArray, tuple[slice, ...]]:
    axis = np.frombuffer(axis_bytes, dtype=np.float64)
    coefficients = window_coefficients(window, polynomial, derivative)
    runs = tuple(segments(axis))
    if window == 1:  # the points themselves: no spacing needed
        return coefficients, runs
    short = [run for run in runs if run.stop - run.start < window]
    if short:
        raise ParameterError(
            f"savitzky_golay: window = {window} is longer than the segment(s) "
            f"{name_some(describe_segment(axis, run) for run in short)}; expected segments of at least {window} "
            "points. Use a shorter window, keep wider ranges, or cut the ranges after this step."
        )
    return coefficients / equal_spacing(axis) ** derivative, runs


def _slide(X: FloatArray, coefficients: FloatArray, runs: list[slice]) -> FloatArray:
    """Apply coefficients of shape (window, window) to each segment of spectra of shape (spectra, points)."""
    window, half = coefficients.shape[0], coefficients.shape[0] // 2
    reach = window + BLOCK - 1
    band = _band(coefficients[half], BLOCK)
    X = np.ascontiguousarray(X)
    result = np.empty_like(X)
    for run in runs:
        part, filled = X[:, run], result[:, run]
        n, points = part.shape
        filled[:, :half] = part[:, :window] @ coefficients[:half].T
        filled[:, points - half :] = part[:, points - window :] @ coefficients[half + 1 :].T
        blocks, rest = divmod(points - 2 * half, BLOCK)
        if blocks:
            pieces = sliding_window_view(part, reach, axis=1)[:, ::BLOCK]
            inner = filled[:, half : half + blocks * BLOCK].reshape(n, blocks, BLOCK, copy=False)
            np.matmul(pieces.swapaxes(0, 1), band, out=inner.swapaxes(0, 1))  # a product for each block of points
        if rest:
            reach_of_rest = window + rest - 1
            last = part[:, points - reach_of_rest :]
            filled[:, points - half - rest : points - half] = last @ band[:reach_of_rest, :rest]
    return result


def _band(coefficients: FloatArray, width: int) -> FloatArray:
    """Return the banded matrix, shape (width + window − 1, width), that convolves `width` neighbouring windows."""
    band = np.zeros((width + coefficients.size - 1, width))
    for k in range(width):
        band[k : k + coefficients.size, k] = coefficients
    return band


class SavitzkyGolay(Step):
    """Smooth, or take the first to fourth derivative per axis unit, within each contiguous segment.

    Parameters
    ----------
    window : int
        Odd number of points.
    polynomial : int
        Degree of the fitted polynomial, below `window`.
    derivative : int
        Order, 0 (smoothing) to 4, not above `polynomial`.
    axis : array of shape (points,), optional
        Axis values of the input, equally spaced within each segment; None numbers the points 0, 1, 2, ...
        A falling axis gives the same derivative as a rising one. [axis unit]
    """

    name: ClassVar[str] = "savitzky_golay"
    linear = True
    fitted = ("coefficients_", "bounds_")

    def __init__(
        self, window: int = 11, polynomial: int = 2, derivative: int = 0, axis: ArrayLike | None = None
    ) -> None:
        self.window = window
        self.polynomial = polynomial
        self.derivative = derivative
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Work out the coefficients, per axis unit, and the segments."""
        axis = axis_values(self.axis, self.check_fit(X).shape[1])
        self.coefficients_, runs = _plan(axis, self.window, self.polynomial, self.derivative)
        self.bounds_ = np.array([[run.start, run.stop] for run in runs], dtype=np.intp)
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return smoothed or differentiated spectra, shape (n, points)."""
        return _slide(self.check_new(X), self.coefficients_, [slice(*bounds) for bounds in self.bounds_.tolist()])

    def axis_after(self, axis: FloatArray) -> FloatArray:
        """Return the axis unchanged, once it is known to suit the window. [axis unit]"""
        _plan(axis, self.window, self.polynomial, self.derivative)
        return axis
