"""Limits and standard deviation of a calibration line by the short formulas of guidelines: ICH Q2(R2), ISO 8466-1.

They are asked for, and reported. What tells a sample from a blank with stated risks stands in `detection`.
"""

from dataclasses import dataclass

from numpy.typing import ArrayLike

from quant.checks import as_vector
from quant.errors import NotEnoughDataError
from quant.result import Result, documented
from quant.statistics.straight_line import LineFit


@dataclass(frozen=True, kw_only=True)
class IchLimits(Result):
    """Detection and quantification limit by one of the ways of ICH Q2(R2)."""

    way: str = documented("Whose standard deviation: residuals of the line, its intercept, or blanks")
    sigma: float = documented("That standard deviation", "unit of the signal")
    slope: float = documented("Slope of the line", "unit of the signal / unit of x")
    detection: float = documented("Detection limit 3.3·sigma/|slope|", "unit of x")
    quantification: float = documented("Quantification limit 10·sigma/|slope|", "unit of x")


def ich_limits(line: LineFit, blanks: ArrayLike | None = None) -> tuple[IchLimits, ...]:
    """Limits 3.3·σ/S and 10·σ/S of ICH Q2(R2), one record a way: residuals of the line, its intercept, blanks.

    They leave out the calibration's own uncertainty (residuals, blanks) or the reading's (intercept), and hold no
    stated shares of false results; the guideline wants them confirmed with samples near the limit.

    Parameters
    ----------
    line : LineFit
        The calibration line, signal on content.
    blanks : array of shape (n_blanks,), optional
        Signals of blanks, 2 at least. [unit of the signal]

    Raises
    ------
    NotEnoughDataError
        The slope is zero, no degree of freedom is left, or fewer than two blanks.
    ParameterError
        Blanks that are not finite.

    References
    ----------
    .. [1] ICH Q2(R2), November 2023 (from memory; to be confirmed against the edition in force).
    """
    if line.slope == 0.0 or line.degrees_of_freedom < 1:
        raise NotEnoughDataError("a line with slope zero or without degrees of freedom has no detection limit.")
    sigmas = {"residual SD": line.residual_sd}
    if not line.through_origin:
        sigmas["intercept SD"] = line.intercept_sd
    if blanks is not None:
        signals = as_vector("blanks", blanks)
        if signals.size < 2:
            raise NotEnoughDataError(f"{signals.size} blank(s); a standard deviation needs 2 or more.")
        sigmas["blanks"] = float(signals.std(ddof=1))
    size = abs(line.slope)
    return tuple(
        IchLimits(way=way, sigma=s, slope=line.slope, detection=3.3 * s / size, quantification=10 * s / size)
        for way, s in sigmas.items()
    )


def method_standard_deviation(line: LineFit) -> tuple[float, float]:
    """Standard deviation of the method, s_x0 = s_y/|b|, and its ratio to the mean content, V_x0, after ISO 8466-1.

    Parameters
    ----------
    line : LineFit
        The unweighted calibration line, signal on content, 10 equidistant standards in the standard.

    Returns
    -------
    tuple of float
        s_x0 [unit of x] and V_x0 [%].

    Raises
    ------
    NotEnoughDataError
        The slope or the mean content is zero, or no degree of freedom is left.

    References
    ----------
    .. [1] ISO 8466-1 (from memory; to be confirmed against the edition in force).
    """
    if line.slope == 0.0 or line.x_mean == 0.0 or line.degrees_of_freedom < 1:
        raise NotEnoughDataError(
            "the slope or the mean content is zero, or no degree of freedom is left: there is no standard deviation."
        )
    sd = line.residual_sd / abs(line.slope)
    return sd, 100 * sd / abs(line.x_mean)
