"""Classical calibration of one band: a straight line of its signal against concentration, read backwards."""

from collections.abc import Sequence
from dataclasses import asdict
from typing import Any, ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.errors import NotEnoughDataError
from quant.regression.bands import BandSet, BandSpec, place_bands
from quant.regression.method import Method
from quant.statistics.straight_line import (
    EPS,
    InverseInterval,
    LineFit,
    fit_line,
    fit_line_through_origin,
    inverse_interval,
    inverse_value,
    line_leverage,
)


class BandArea(Method):
    """Straight line of a band's signal against concentration (Beer-Lambert), predicted by reading it backwards.

    Parameters
    ----------
    bands : list of dict, optional
        Bands whose signals are summed. A band is one of

        - ``{"signal": "area", "range": [lo, hi]}``: trapezoids over the grid points from lo to hi inclusive, positive
          for positive bands whatever the direction of the axis;
        - ``{"signal": "height", "range": [lo, hi]}``: the largest value, by a parabola through the top three points;
        - ``{"signal": "height_at", "position": p}``: the value at p, interpolated linearly;

        each perhaps with ``"baseline": [p1, p2]``: the straight line through the spectrum at p1 and p2, which may lie
        outside the range, is subtracted first. None: the area of the whole axis. [axis unit]
    reference_band : dict, optional
        A band to divide by: an internal standard, or a measure of path length.
    through_origin : bool
        Whether no concentration means no signal for certain.
    axis : array of shape (k,), optional
        Axis values, rising or falling; None: points are numbered 0, 1, 2 ... [axis unit]

    Attributes
    ----------
    line_ : LineFit
        x: concentration, y: signal.
    n_samples_ : float
        Number of training rows.
    residual_basis_ : array of shape (rank, points)
        What training profiles consist of: leading right singular vectors, not centred (matrix and analyte).

    Notes
    -----
    Rows count one each, so replicates must be averaged first. `factor_counts_` is (1,), through the origin (0,).
    """

    averages_replicates: ClassVar[bool] = True
    fitted: ClassVar[tuple[str, ...]] = ("n_samples_", "line_values_", "residual_basis_")

    def __init__(
        self,
        bands: Sequence[BandSpec] | None = None,
        reference_band: BandSpec | None = None,
        through_origin: bool = False,  # noqa: FBT001 (a scikit-learn parameter)
        axis: ArrayLike | None = None,
    ) -> None:
        self.bands = bands
        self.reference_band = reference_band
        self.through_origin = through_origin
        self.axis = axis

    @property
    def factor_counts_(self) -> tuple[int, ...]:
        """(1,) for a free line, (0,) through the origin."""
        return (0,) if self.line_.through_origin else (1,)

    @property
    def line_(self) -> LineFit:
        """The calibration line, x: concentration, y: signal."""
        return LineFit(**self.line_values_)

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # type: ignore[override]  # weights have no meaning here
        """Fit the line.

        Parameters
        ----------
        X : array of shape (n, k)
            Spectra, one a sample (replicates averaged). [absorbance]
        y : array of shape (n,)
            Concentrations.

        Returns
        -------
        BandArea
            Itself, fitted.

        Raises
        ------
        NotEnoughDataError
            Too few samples, equal concentrations, or a signal that does not follow them.
        ParameterError
            A band is not as described or does not lie on the axis.
        QuantityError
            The reference band shows no signal above zero.
        """
        matrix, values = self.check_fit_pair(X, y)
        bands = self._place()
        if values.size < 2 and not self.through_origin:
            raise NotEnoughDataError(f"A straight line needs 2 samples or more; n_samples={values.size} were given.")
        signal = bands.signals(matrix)
        line = fit_line_through_origin(values, signal) if self.through_origin else fit_line(values, signal)
        if abs(line.slope) * np.sqrt(line.sxx) <= 10 * signal.size * EPS * np.linalg.norm(signal):
            raise NotEnoughDataError(
                f"The band's signal does not change with concentration (slope {line.slope:.1e}), so it cannot be read "
                "backwards. Check the band's range, or add samples that differ."
            )
        self.line_values_: dict[str, Any] = asdict(line)
        self.n_samples_ = float(values.size)
        self.residual_basis_ = _leading_directions(bands.profiles(matrix))
        return self

    def signals(self, X: ArrayLike) -> FloatArray:
        """Signal of each spectrum, shape (n,). [unit of X (× axis unit for areas)]

        Raises
        ------
        QuantityError
            The reference band shows no signal above zero in some rows.
        """
        return self._place().signals(self.check_new(X))

    def predict_each(self, X: ArrayLike) -> FloatArray:
        """Concentrations (signal − intercept)/slope, shape (1, n). [unit of y]"""
        signals = self.signals(X)
        return inverse_value(self.line_, signals).reshape(1, -1)

    def leverage_each(self, X: ArrayLike) -> FloatArray:
        """Leverage 1/n + (x̂ − x̄)²/Sxx, through the origin x̂²/Σx², shape (1, n)."""
        predicted = self.predict_each(X)
        return line_leverage(self.line_, predicted)

    def residual_each(self, X: ArrayLike) -> FloatArray:
        """Sum of squares of what `residual_basis_` leaves of the bands' profiles, shape (1, n). [(unit of X)²]

        A single height has no profile, and nothing is left of it.
        """
        profiles = self._place().profiles(self.check_new(X))
        rest = profiles - (profiles @ self.residual_basis_.T) @ self.residual_basis_
        squares: FloatArray = np.einsum("nk,nk->n", rest, rest)
        return squares.reshape(1, -1)

    def inverse_interval(self, signal: ArrayLike, t: float, readings: ArrayLike = 1) -> InverseInterval:
        """Concentrations with standard errors and intervals, from signals of shape (n,).

        Parameters
        ----------
        signal : array of shape (n,)
            As from `signals`, each the mean of `readings` readings.
        t : float
            Quantile of Student's t at `line_.degrees_of_freedom`.
        readings : int or array of shape (n,)
            Readings behind each signal.

        Returns
        -------
        InverseInterval
            See `quant.statistics.straight_line.inverse_interval`.

        Raises
        ------
        NotEnoughDataError
            The line left no degree of freedom.
        ParameterError
            t is not above zero, or fewer than one reading.
        """
        self.check_fitted()
        return inverse_interval(self.line_, signal, t, readings)

    def with_factors(self, count: int) -> Self:
        """Return itself: a line has no simpler self.

        Raises
        ------
        ParameterError
            `count` is not the one of `factor_counts_`.
        """
        self.check_count(count)
        return self

    def _place(self) -> BandSet:
        self.check_fitted()
        return place_bands(self.bands, self.reference_band, self.axis, self.n_features_in_)


def _leading_directions(profiles: FloatArray) -> FloatArray:
    n, points = profiles.shape
    rank = max(1, min(2, n - 1, points - 1))  # matrix and analyte; of a single height one direction is all there is
    directions: FloatArray = np.linalg.svd(profiles, full_matrices=False)[2]
    return directions[:rank].copy()
