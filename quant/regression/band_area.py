"""Classical calibration of one band: a line or quadratic of its signal against concentration, read backwards."""

from collections.abc import Sequence
from dataclasses import asdict
from typing import Any, ClassVar, Self

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import one_of
from quant.errors import NotEnoughDataError, ParameterError
from quant.regression.line_weights import LAWS, level_table, standard_weights, told_weight, weight_at
from quant.regression.method import LineMethod
from quant.spectra.bands import BandSet, BandSpec, place_bands, refuse_gaps
from quant.statistics.curve import (
    QuadraticFit,
    check_branch,
    curve_leverage,
    curve_value,
    fit_quadratic,
    inverse_quadratic,
    inverse_quadratic_interval,
)
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


class BandArea(LineMethod):
    """Line or quadratic of a band's signal against concentration (Beer-Lambert), predicted by reading it backwards.

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
    curve : {"line", "quadratic"}
        A quadratic is read on the branch of the calibrated range, and refused if it turns within that.
    line_weights : {"equal", "1/x", "1/x^2", "1/s^2"}
        Weights of the standards; the weight of an unknown follows from its own concentration.
    sd_column : str, optional
        1/s^2: name of the standards' standard deviations, which `fit` takes as second column of y.

    Attributes
    ----------
    line_ : LineFit
        x: concentration, y: signal. Beside a quadratic only to compare.
    curve_ : QuadraticFit or None
        The quadratic, if there is one.
    standards_ : array of shape (2, levels) or None
        Concentrations of the standards and 1/√w of each; None for equal weights.
    n_samples_ : float
        Number of training rows.
    residual_basis_ : array of shape (rank, points)
        What training profiles consist of: leading right singular vectors, not centred (matrix and analyte).

    Notes
    -----
    Rows count one each, so replicates must be averaged first. `factor_counts_` is (1,), through the origin (0,),
    of a quadratic (2,).
    """

    averages_replicates: ClassVar[bool] = True
    classical: ClassVar[bool] = True
    fitted: ClassVar[tuple[str, ...]] = (
        *("n_samples_", "line_values_", "residual_basis_", "curve_values_", "standards_"),
    )
    curve_values_: dict[str, Any] | None = None
    standards_: FloatArray | None = None

    def __init__(
        self,
        bands: Sequence[BandSpec] | None = None,
        reference_band: BandSpec | None = None,
        through_origin: bool = False,  # noqa: FBT001 (a scikit-learn parameter)
        axis: ArrayLike | None = None,
        curve: str = "line",
        line_weights: str = "equal",
        sd_column: str | None = None,
    ) -> None:
        self.bands = bands
        self.reference_band = reference_band
        self.through_origin = through_origin
        self.axis = axis
        self.curve = curve
        self.line_weights = line_weights
        self.sd_column = sd_column

    @property
    def companions(self) -> tuple[str, ...]:
        """The standard deviations that weights 1/s^2 come from."""
        return (self.sd_column or "sd",) if self.line_weights == "1/s^2" else ()

    @property
    def factor_counts_(self) -> tuple[int, ...]:
        """(1,) for a free line, (0,) through the origin, (2,) for a quadratic."""
        return (2,) if self.curve_values_ else (0,) if self.line_.through_origin else (1,)

    @property
    def line_(self) -> LineFit:
        """The calibration line, x: concentration, y: signal."""
        return LineFit(**self.line_values_)

    @property
    def curve_(self) -> QuadraticFit | None:
        """The calibration quadratic, x: concentration, y: signal; None for a line."""
        return QuadraticFit(**self.curve_values_) if self.curve_values_ else None

    def fit(self, X: ArrayLike, y: ArrayLike | None = None) -> Self:  # type: ignore[override]  # weights have no meaning here
        """Fit the line or quadratic.

        Parameters
        ----------
        X : array of shape (n, k)
            Spectra, one a sample (replicates averaged). [absorbance]
        y : array of shape (n,), or (n, 2) for weights 1/s^2
            Concentrations; then the standard deviations of the signals.

        Returns
        -------
        BandArea
            Itself, fitted.

        Raises
        ------
        NotEnoughDataError
            Too few samples, equal concentrations, a signal that does not follow them, or a quadratic that turns within
            their range.
        ParameterError
            A band is not as described, does not lie on the axis or meets a gap of it, or curve and weights do not
            exist.
        QuantityError
            The reference band shows no signal above zero.
        """
        one_of("line_weights", self.line_weights, LAWS)
        if one_of("curve", self.curve, ("line", "quadratic")) == "quadratic" and self.through_origin:
            raise ParameterError("through_origin = true belongs to curve = 'line'; remove one of the two.")
        matrix, values, sds = self.check_fit_companions(X, y)
        bands = self._place()
        refuse_gaps("band_area", bands)
        if values.size < 2 and not self.through_origin:
            raise NotEnoughDataError(f"A straight line needs 2 samples or more; n_samples={values.size} were given.")
        signal = bands.signals(matrix)
        weights = standard_weights(self.line_weights, values, sds[:, 0] if sds.size else None)
        fit = fit_line_through_origin if self.through_origin else fit_line
        line = fit(values, signal, weights)
        if abs(line.slope) * np.sqrt(line.sxx) <= 10 * signal.size * EPS * np.linalg.norm(signal):
            raise NotEnoughDataError(
                f"The band's signal does not change with concentration (slope {line.slope:.1e}), so it cannot be read "
                "backwards. Check the band's range, or add samples that differ."
            )
        self.line_values_: dict[str, Any] = asdict(line)
        self.curve_values_ = None
        if self.curve == "quadratic":
            curve = fit_quadratic(values, signal, weights)
            check_branch(curve)
            self.curve_values_ = asdict(curve)
        self.standards_ = None if self.line_weights == "equal" else level_table(values, weights)
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
        """Concentrations (signal − intercept)/slope, or the quadratic's root, shape (1, n). [unit of y]"""
        return self._read(self.signals(X)).reshape(1, -1)

    def leverage_each(self, X: ArrayLike) -> FloatArray:
        """Leverage 1/n + (x̂ − x̄)²/Sxx, through the origin x̂²/Σx², or that of the quadratic, shape (1, n).

        With weights it is w(x̂) times as much: the share of the calibration over that of the reading itself.
        """
        predicted, curve = self.predict_each(X), self.curve_
        leverage = line_leverage(self.line_, predicted) if curve is None else curve_leverage(curve, predicted)
        return leverage * self.weights_at(predicted[0])

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
            Quantile of Student's t at the degrees of freedom of the line or quadratic.
        readings : int or array of shape (n,)
            Readings behind each signal, each with the weight that `weights_at` gives its concentration.

        Returns
        -------
        InverseInterval
            See `inverse_interval` of `quant.statistics.straight_line`, `inverse_quadratic_interval` of `.curve`.

        Raises
        ------
        NotEnoughDataError
            The line left no degree of freedom.
        ParameterError
            t is not above zero, or fewer than one reading.
        """
        self.check_fitted()
        measured, curve = np.atleast_1d(np.asarray(signal, dtype=np.float64)), self.curve_
        weight = self.weights_at(self._read(measured))
        if curve is not None:
            return inverse_quadratic_interval(curve, measured, t, readings, weight)
        return inverse_interval(self.line_, measured, t, readings, weight)

    def weights_at(self, concentration: ArrayLike) -> FloatArray:
        """Weight of a signal at concentrations of shape (n,), the mean weight of the standards being 1."""
        return weight_at(self.line_weights, self.standards_, np.asarray(concentration, dtype=np.float64))

    def signal_at(self, concentration: ArrayLike) -> FloatArray:
        """Signal that the line or quadratic has at concentrations of any shape."""
        line, curve, x = self.line_, self.curve_, np.asarray(concentration, dtype=np.float64)
        signal: FloatArray = line.y_mean + line.slope * (x - line.x_mean) if curve is None else curve_value(curve, x)
        return signal

    def remarks_each(self, X: ArrayLike) -> tuple[str, ...]:
        """State the weight of each signal, where standards are weighted."""
        if self.line_weights == "equal":
            return super().remarks_each(X)
        return tuple(told_weight(self.line_weights, float(w)) for w in self.weights_at(self.predict(X)))

    def with_factors(self, count: int) -> Self:
        """Return itself: a line has no simpler self.

        Raises
        ------
        ParameterError
            `count` is not the one of `factor_counts_`.
        """
        self.check_count(count)
        return self

    def _read(self, signals: FloatArray) -> FloatArray:
        curve = self.curve_
        return inverse_value(self.line_, signals) if curve is None else inverse_quadratic(curve, signals)

    def _place(self) -> BandSet:
        self.check_fitted()
        return place_bands(self.bands, self.reference_band, self.axis, self.n_features_in_)


def _leading_directions(profiles: FloatArray) -> FloatArray:
    n, points = profiles.shape
    rank = max(1, min(2, n - 1, points - 1))  # matrix and analyte; of a single height one direction is all there is
    directions: FloatArray = np.linalg.svd(profiles, full_matrices=False)[2]
    return directions[:rank].copy()
