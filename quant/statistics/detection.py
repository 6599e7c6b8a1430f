"""What can be told from a blank: critical value, detection limit, limit of quantification of a calibration line.

A result above the *critical value* L_C says "present", wrongly for a share alpha of blanks. A sample at the *detection
limit* L_D is told from a blank except for a share beta. They are two numbers: a sample at the critical value is missed
every second time. Both count the scatter of the reading and of the calibration itself.
"""

import math
from dataclasses import dataclass

import numpy as np
from scipy import optimize, special

from quant.checks import one_of
from quant.errors import NotEnoughDataError, ParameterError
from quant.result import Result, documented
from quant.statistics.quantiles import t_quantile
from quant.statistics.straight_line import LineFit
from quant.text_table import Row, format_rows

NONCENTRAL_T = "noncentral t"
TWICE_T = "twice t"
WAYS = (NONCENTRAL_T, TWICE_T)
QUANTIFICATION_FACTOR = 10.0  # a relative standard deviation of 10 % at the limit of quantification


@dataclass(frozen=True, kw_only=True)
class DetectionLimits(Result):
    """Critical value, detection limit and limit of quantification of a calibration line."""

    zero_sd: float = documented("Standard deviation of a result at zero, calibration included", "unit of x")
    degrees_of_freedom: float = documented("Degrees of freedom of that standard deviation")
    readings: int = documented("Readings averaged for one result")
    alpha: float = documented("Share of blanks above the critical value")
    beta: float = documented("Share of samples at the detection limit below the critical value")
    way: str = documented("How the detection limit was found: noncentral t, or twice t")
    critical: float = documented("Critical value: a result above it says that the analyte is there", "unit of x")
    detection: float = documented("Detection limit: the least content told from zero", "unit of x")
    quantification: float = documented("Limit of quantification, 10 standard deviations at zero", "unit of x")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("standard deviation at zero", self.zero_sd, ""),
            (f"critical value ({100 * self.alpha:g} % false alarms)", self.critical, ""),
            (f"detection limit ({100 * self.beta:g} % missed)", self.detection, ""),
            ("limit of quantification (10 SD)", self.quantification, ""),
        ]

    def __str__(self) -> str:
        return f"Detection, mean of {self.readings} reading(s), {self.way}\n{format_rows(self.rows())}"


def critical_value(zero_sd: float, degrees_of_freedom: float, alpha: float = 0.05) -> float:
    """Critical value L_C = t(1 - alpha, ν)·s0 of a result.

    Parameters
    ----------
    zero_sd : float
        s0, standard deviation of a result at zero, the calibration's share included. [unit of the analyte]
    degrees_of_freedom : float
        ν of s0; `math.inf` where it is known.
    alpha : float
        Accepted share of blanks above it, inside (0, 1).

    Returns
    -------
    float
        [unit of the analyte]

    Raises
    ------
    ParameterError
        A negative or non-finite s0, or alpha outside (0, 1).
    NotEnoughDataError
        No degree of freedom.

    References
    ----------
    .. [1] L.A. Currie, Anal. Chem. 40 (1968) 586-593; Pure Appl. Chem. 67 (1995) 1699-1723 (from memory).
    """
    return _student(1 - alpha, degrees_of_freedom) * _checked_sd(zero_sd)


def detection_limit(
    zero_sd: float, degrees_of_freedom: float, alpha: float = 0.05, beta: float = 0.05, way: str = NONCENTRAL_T
) -> float:
    """Detection limit L_D of a result whose standard deviation does not change between zero and L_D.

    "noncentral t": δ·s0, δ such that a noncentral t (ν, δ) lies below t(1 - alpha, ν) with probability beta; exact
    where s0 is the true standard deviation. "twice t": [t(1 - alpha, ν) + t(1 - beta, ν)]·s0, a little larger; for
    alpha = beta exact on average over calibrations that each state a limit from their own s0, of a slope known well.

    Parameters
    ----------
    zero_sd : float
        s0, standard deviation of a result at zero, the calibration's share included. [unit of the analyte]
    degrees_of_freedom : float
        ν of s0; `math.inf` where it is known.
    alpha, beta : float
        Accepted shares of blanks above the critical value and of samples at L_D below it; above 0, their sum below 1.
    way : {"noncentral t", "twice t"}

    Returns
    -------
    float
        [unit of the analyte]

    Raises
    ------
    ParameterError
        A negative or non-finite s0, shares out of their bounds, or another way.
    NotEnoughDataError
        No degree of freedom.

    References
    ----------
    .. [1] C.A. Clayton, J.W. Hines, P.D. Elkins, Anal. Chem. 59 (1987) 2506-2514: noncentral t (from memory).
    .. [2] L.A. Currie, Pure Appl. Chem. 67 (1995) 1699-1723: twice t (from memory).
    """
    sd = _checked_sd(zero_sd)
    one_of("way", way, WAYS)
    if not (alpha > 0 and beta > 0 and alpha + beta < 1):
        raise ParameterError(f"alpha = {alpha}, beta = {beta}; expected shares above 0 whose sum is below 1.")
    t = _student(1 - alpha, degrees_of_freedom)
    if way == TWICE_T or math.isinf(degrees_of_freedom):
        return (t + _student(1 - beta, degrees_of_freedom)) * sd
    highest = 2 * abs(t) + 10
    while special.nctdtr(degrees_of_freedom, highest, t) > beta:
        highest *= 2
    delta = optimize.brentq(lambda d: special.nctdtr(degrees_of_freedom, d, t) - beta, 0.0, highest, xtol=1e-12)
    return float(delta) * sd


def zero_standard_deviation(line: LineFit, readings: int = 1, weight: float = 1.0) -> float:
    """Standard deviation of a result at zero content: (s/|b|)·sqrt(1/(m·w) + 1/n + x̄²/Sxx).

    Parameters
    ----------
    line : LineFit
        The calibration line, signal on content.
    readings : int
        m, readings averaged for one result.
    weight : float
        w, weight that a reading at zero has on the scale of the line's weights; 1 for an unweighted line.

    Returns
    -------
    float
        [unit of x]

    Raises
    ------
    NotEnoughDataError
        The slope is zero, or no degree of freedom is left.
    ParameterError
        Fewer than one reading, or a weight that is not above zero.
    """
    if readings < 1 or not weight > 0:
        raise ParameterError(f"readings = {readings}, weight = {weight}; expected 1 or more, and a weight above 0.")
    if line.slope == 0.0 or line.degrees_of_freedom < 1:
        raise NotEnoughDataError("a line with slope zero or without degrees of freedom has no detection limit.")
    share = 1.0 / (readings * weight) + line.mean_share + line.x_mean**2 / line.sxx
    return line.residual_sd / abs(line.slope) * math.sqrt(share)


def detection_limits(
    line: LineFit,
    *,
    readings: int = 1,
    weight: float = 1.0,
    alpha: float = 0.05,
    beta: float = 0.05,
    way: str = NONCENTRAL_T,
) -> DetectionLimits:
    """Critical value, detection limit and limit of quantification of a calibration line.

    Parameters
    ----------
    line : LineFit
        The calibration line, signal on content.
    readings : int
        Readings averaged for one result.
    weight : float
        Weight of a reading near zero on the scale of the line's weights.
    alpha, beta, way
        As `detection_limit` takes them.

    Raises
    ------
    NotEnoughDataError
        The slope is zero, or no degree of freedom is left.
    ParameterError
        Parameters out of their bounds.
    """
    zero_sd, dof = zero_standard_deviation(line, readings, weight), line.degrees_of_freedom
    return DetectionLimits(
        zero_sd=zero_sd,
        degrees_of_freedom=dof,
        readings=readings,
        alpha=alpha,
        beta=beta,
        way=way,
        critical=critical_value(zero_sd, dof, alpha),
        detection=detection_limit(zero_sd, dof, alpha, beta, way),
        quantification=QUANTIFICATION_FACTOR * zero_sd,
    )


def _student(p: float, degrees_of_freedom: float) -> float:
    if not 0 < p < 1:
        raise ParameterError(f"a share of {1 - p:.6g} was given; expected one inside (0, 1), such as 0.05.")
    if math.isinf(degrees_of_freedom):
        return float(special.ndtri(p))
    return t_quantile(p, degrees_of_freedom)


def _checked_sd(value: float) -> float:
    if not (np.isfinite(value) and value >= 0):
        raise ParameterError(f"zero_sd = {value}; expected a standard deviation, finite and not negative.")
    return value
