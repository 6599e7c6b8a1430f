"""Absorbance from transmittance."""

from typing import ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray
from quant.checks import name_some
from quant.errors import QuantityError
from quant.estimator.base import Step
from quant.spectra.segments import axis_values

HIGHEST_FRACTION = 1.5  # noise lifts a clear spectrum a little above 1; more than this is no fraction


def absorbance(transmittance: ArrayLike, axis: ArrayLike | None = None) -> FloatArray:
    """Return A = −log10(T).

    Parameters
    ----------
    transmittance : array of shape (spectra, points)
        As a fraction: 1 means that nothing is absorbed. [1]
    axis : array of shape (points,), optional
        Axis values, to name places in messages; None numbers the points 0, 1, 2, ... [axis unit]

    Returns
    -------
    array of shape (spectra, points)
        Decadic absorbance. [1]

    Raises
    ------
    QuantityError
        T above 1.5 (percent given as fraction), T that is not finite, or T ≤ 0, which has no absorbance.

    References
    ----------
    .. [1] IUPAC Gold Book, "absorbance" (decadic, A = −log10 T); from memory.
    """
    T = np.asarray(transmittance, dtype=np.float64)
    refuse_without_absorbance(T, axis_values(axis, T.shape[1]))
    return -np.log10(T)


def refuse_without_absorbance(T: FloatArray, axis: FloatArray) -> None:
    """Refuse transmittance, shape (spectra, points), that has no absorbance; `axis` names the places.

    Raises
    ------
    QuantityError
        As `absorbance`.
    """
    too_high = np.isfinite(T) & (T > HIGHEST_FRACTION)
    if too_high.any():
        raise QuantityError(
            f"Transmittance up to {T[too_high].max():g} {_culprits(too_high, axis)}; expected a fraction, 1 where "
            "nothing is absorbed. These look like percent: divide by 100, or declare them as percent when reading."
        )
    without = ~np.isfinite(T) | (T <= 0)
    if without.any():
        raise QuantityError(
            f"Transmittance of zero or below, or not a finite number, {_culprits(without, axis)}; expected T > 0, "
            "since anything else has no absorbance. Keep only ranges that let light through (keep_ranges or "
            "leave_out_ranges before this step), or measure again with a shorter path or a fresh background."
        )


def _culprits(bad: BoolArray, places: FloatArray) -> str:
    rows = np.flatnonzero(bad.any(axis=1))
    columns = np.flatnonzero(bad.any(axis=0))
    return (
        f"in row(s) {name_some(rows)} (counted from 0), {int(bad.sum())} point(s), "
        f"at axis position(s) {name_some(f'{place:g}' for place in places[columns])}"
    )


class Absorbance(Step):
    """Turn transmittance, as a fraction, into absorbance.

    Parameters
    ----------
    axis : array of shape (points,), optional
        Axis values of the input, to name places in messages; None numbers the points 0, 1, 2, ... [axis unit]
    """

    name: ClassVar[str] = "absorbance"
    positive_only = True

    def __init__(self, axis: ArrayLike | None = None) -> None:
        self.axis = axis

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # noqa: ARG002 (the contract's signature)
        """Refuse training spectra that have no absorbance; nothing is learnt."""
        matrix = self.check_fit(X)
        refuse_without_absorbance(matrix, axis_values(self.axis, matrix.shape[1]))
        return self

    def transform(self, X: ArrayLike) -> FloatArray:
        """Return absorbance, shape (n, points)."""
        return absorbance(self.check_new(X), self.axis)
