"""Between the points of a spectrum, by its Fourier series."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray


@dataclass(frozen=True, eq=False)
class FourierSeries:
    """A spectrum on an even, rising axis as a function that can be asked anywhere.

    The straight line through its ends is set apart and the rest mirrored, so that the ends do not ring.

    Attributes
    ----------
    start, step : float
        First axis value and spacing. [axis unit]
    line : tuple of float
        Value at the start and slope of the straight line. [ordinate; ordinate per axis unit]
    cosines : array of shape (n_points,)
        Coefficients. [ordinate]
    """

    start: float
    step: float
    line: tuple[float, float]
    cosines: FloatArray

    @classmethod
    def of(cls, axis: FloatArray, values: FloatArray) -> "FourierSeries":
        """Return the series of values of shape (n_points,) on an even, rising axis of shape (n_points,)."""
        n, start, step = axis.size, float(axis[0]), float(axis[-1] - axis[0]) / (axis.size - 1)
        slope = float(values[-1] - values[0]) / (step * (n - 1))
        rest = values - (values[0] + slope * step * np.arange(n))
        spectrum = np.fft.rfft(np.concatenate([rest, rest[-2:0:-1]])).real / (n - 1)  # even: cosines alone
        spectrum[[0, -1]] *= 0.5
        return cls(start, step, (float(values[0]), slope), spectrum)

    @property
    def frequencies(self) -> FloatArray:
        """Angular frequency of each cosine, shape (n_points,). [per axis unit]"""
        n = self.cosines.size
        return np.asarray(np.pi * np.arange(n) / ((n - 1) * self.step))

    def at(self, place: float | FloatArray, order: int = 0, smoothing: float = 0.0) -> FloatArray:
        """Return the series or a derivative of it at places of shape (m,), shape (m,).

        Parameters
        ----------
        place : float or array of shape (m,)
            [axis unit]
        order : {0, 1, 2, 3}
            Which derivative. [ordinate per (axis unit) to that power]
        smoothing : float
            Width of the smoothing, see `response`. [axis unit]
        """
        x = np.atleast_1d(np.asarray(place, dtype=np.float64)) - self.start
        w = self.frequencies
        turned = np.cos(np.outer(x, w) + order * np.pi / 2)
        line = self.line[0] + self.line[1] * x if order == 0 else self.line[1] if order == 1 else 0.0
        return np.asarray(turned @ (self.cosines * self.response(smoothing) * w**order) + line)

    def response(self, smoothing: float) -> FloatArray:
        """Return what smoothing by a width [axis unit] leaves of each cosine, shape (n_points,).

        A Gaussian of that width at half height, with its second and fourth moment taken out, exp(−x)·(1 + x + x²/2): it
        is flat at low frequencies, so that lopsided bands stay where they are.
        """
        x = 0.5 * self.frequencies**2 * smoothing**2 / (8.0 * np.log(2.0))
        return np.asarray(np.exp(-x) * (1.0 + x + 0.5 * x * x))

    def derivative_noise(self, noise: float, smoothing: float) -> float:
        """Return the standard deviation of the first derivative for white noise of a standard deviation."""
        gain = (self.frequencies * self.response(smoothing)) ** 2
        return float(noise * np.sqrt(gain.mean()))
