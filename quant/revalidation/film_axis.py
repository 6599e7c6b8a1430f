"""Offset and stretch of the wavenumber axis from the deviations of known bands."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.result import Result, documented
from quant.statistics.quantiles import t_two_sided_p

SIGNIFICANCE = 0.05
AIR = 2.7e-4  # refractive index of air less 1: wavenumbers in air are larger by as much than in vacuum


@dataclass(frozen=True, kw_only=True, eq=False)
class AxisError(Result):
    """Deviation = offset + stretch · (position − centre), by weighted least squares over the bands."""

    against: str = documented("What the bands were compared with")
    n_bands: int = documented("Number of bands")
    centre: float = documented("Weighted mean position, where offset and stretch do not depend on each other", "cm⁻¹")
    offset: float = documented("Mean deviation, at the centre", "cm⁻¹")
    offset_error: float = documented("Its standard error, from the scatter of the bands about the line", "cm⁻¹")
    stretch: float = documented("Deviation per wavenumber")
    stretch_error: float = documented("Its standard error")
    offset_significant: bool = documented("Whether the offset differs from 0 at 5 % for both questions together")
    stretch_significant: bool = documented("Whether the stretch differs from 0 at 5 % for both questions together")
    words: str = documented("The finding in words")

    def at(self, position: float) -> float:
        """Return the deviation that the line gives at a position [cm⁻¹]."""
        return self.offset + self.stretch * (position - self.centre)


def axis_error(
    positions: Sequence[float], deviations: Sequence[float], errors: Sequence[float], against: str
) -> AxisError:
    """Fit offset and stretch to the deviations of bands.

    Parameters
    ----------
    positions : sequence of float, length n_bands
        Three at least. [cm⁻¹]
    deviations : sequence of float, length n_bands
        Found minus expected. [cm⁻¹]
    errors : sequence of float, length n_bands
        What the deviations are good for, relative to each other: weights are 1/error². [cm⁻¹]
    against : str
        What the bands were compared with, for the words.
    """
    x, d = np.asarray(positions, dtype=np.float64), np.asarray(deviations, dtype=np.float64)
    weight = 1.0 / np.maximum(np.asarray(errors, dtype=np.float64), 1e-9) ** 2
    weight = weight / weight.mean()
    centre = float((weight @ x) / weight.sum())
    offset = float((weight @ d) / weight.sum())
    spread = float(weight @ (x - centre) ** 2)
    stretch = float(weight @ ((x - centre) * d)) / spread
    rest = d - offset - stretch * (x - centre)
    freedom = x.size - 2
    variance = float(weight @ rest**2) / freedom
    errors_of = [float(np.sqrt(variance / weight.sum())), float(np.sqrt(variance / spread))]
    p = [_p(value, error, freedom) for value, error in zip((offset, stretch), errors_of, strict=True)]
    alpha = [SIGNIFICANCE / 2 if value <= min(p) else SIGNIFICANCE for value in p]  # Holm, two questions
    shown = min(p) <= SIGNIFICANCE / 2
    significant = [shown and value <= limit for value, limit in zip(p, alpha, strict=True)]
    words = (
        f"Axis against {against}: offset {offset:+.3f} ± {errors_of[0]:.3f} cm⁻¹ at {centre:.0f} cm⁻¹, stretch "
        f"{1e6 * stretch:+.0f} ± {1e6 * errors_of[1]:.0f} parts per million ({_told(significant)})"
    )
    if significant[1] and abs(abs(stretch) - AIR) < 3.0 * errors_of[1]:
        words += "; that is the step between wavenumbers in air and in vacuum: compare the instrument's settings"
    return AxisError(
        against=against,
        n_bands=x.size,
        centre=centre,
        offset=offset,
        offset_error=errors_of[0],
        stretch=stretch,
        stretch_error=errors_of[1],
        offset_significant=significant[0],
        stretch_significant=significant[1],
        words=words,
    )


def _p(value: float, error: float, freedom: int) -> float:
    return t_two_sided_p(value / error, freedom) if error > 0 else float(value == 0)


def _told(significant: Sequence[bool]) -> str:
    names = [name for name, told in zip(("offset", "stretch"), significant, strict=True) if told]
    return (
        f"{' and '.join(names)} beyond the scatter of the bands" if names else "no more than the scatter of the bands"
    )
