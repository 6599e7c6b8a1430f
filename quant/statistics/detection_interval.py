"""Detection limit of a multivariate calibration: an interval, since every blank has its own background.

How uncertain a result at zero is depends on what else is in the sample, through its leverage. Among samples like the
calibration's that leverage lies between two values, and so does the detection limit.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import paired_vectors
from quant.errors import NotEnoughDataError, ParameterError
from quant.result import Result, documented
from quant.text_table import Row, format_rows

DETECTION_FACTOR = 3.3  # twice the normal quantile 1.645, rounded as published: 5 % false alarms, 5 % missed
QUANTIFICATION_FACTOR = 10.0


@dataclass(frozen=True, kw_only=True)
class DetectionInterval(Result):
    """Detection limits of a multivariate calibration, from the most to the least favourable background."""

    sensitivity: float = documented("Length of the net analyte signal of one unit", "ordinate / unit of the analyte")
    leverage_low: float = documented("Lowest leverage a sample without analyte can have, 1/n included if it was asked")
    leverage_high: float = documented("Highest such leverage among backgrounds like the calibration's")
    low: float = documented("LOD_min: below it no sample is told from a blank reliably", "unit of the analyte")
    high: float = documented("LOD_max: above it every sample is told from a blank reliably", "unit of the analyte")
    quantification_high: float = documented("10 standard deviations at the highest leverage", "unit of the analyte")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("detection limit from (LOD_min)", self.low, ""),
            ("detection limit to (LOD_max)", self.high, ""),
            ("limit of quantification (10 SD)", self.quantification_high, ""),
        ]

    def __str__(self) -> str:
        return f"Detection, multivariate\n{format_rows(self.rows())}"


def result_sd(leverage: ArrayLike, sensitivity: float, signal_sd: float, reference_sd: float) -> FloatArray:
    """Standard deviation of a result, sqrt(SEN^-2·s_x²·(1 + h) + h·s_y²), in the shape of the leverage.

    Parameters
    ----------
    leverage : array of any shape
        h of the sample.
    sensitivity : float
        SEN = 1/|b|, b the regression vector. [ordinate / unit of the analyte]
    signal_sd : float
        s_x, noise of one point of a spectrum behind the preprocessing, alike and independent at all points. Where it is
        not (after a derivative), give sqrt(b'Σb)·SEN, see `replicate_parts.propagated_variance`. [ordinate]
    reference_sd : float
        s_y, standard error of the calibration's laboratory values. [unit of the analyte]

    Returns
    -------
    array
        [unit of the analyte]

    Raises
    ------
    ParameterError
        A sensitivity that is not above zero, or negative standard deviations or leverages.

    References
    ----------
    .. [1] A.C. Olivieri, N.M. Faber et al., Pure Appl. Chem. 78 (2006) 633-661 (from memory).
    """
    h = np.asarray(leverage, dtype=np.float64)
    numbers = np.array([sensitivity, signal_sd, reference_sd])
    if not (np.isfinite(numbers).all() and sensitivity > 0 and signal_sd >= 0 and reference_sd >= 0 and (h >= 0).all()):
        raise ParameterError(
            f"sensitivity = {sensitivity}, signal_sd = {signal_sd}, reference_sd = {reference_sd}; expected a finite "
            "sensitivity above 0, and standard deviations and leverages not below 0."
        )
    noise = (signal_sd / sensitivity) ** 2
    return np.asarray(np.sqrt(noise * (1 + h) + h * reference_sd**2))


def blank_leverages(reference: ArrayLike, leverages: ArrayLike, *, mean_term: bool = True) -> tuple[float, float]:
    """Lowest and highest leverage that samples without analyte have, their background being like the calibration's.

    With y_c = y - ȳ and h without the term 1/n: h0_min = ȳ²/sum(y_c²), h0_max = max(h_i - y_c,i²/sum(y_c²)) + h0_min,
    which is max{h_i + h0_min·[1 - (y_c,i/ȳ)²]}. The term 1/n is added to both afterwards: within the maximum it would
    keep the interval of a one-variable model from being a single value.

    Parameters
    ----------
    reference : array of shape (n_samples,)
        Reference values of the calibration samples. [unit of the analyte]
    leverages : array of shape (n_samples,)
        Their leverages in the mean-centred model, 1/n included.
    mean_term : bool
        Whether the leverages returned include 1/n, which a mean-centred model's result has, too.

    Returns
    -------
    tuple of float
        h0_min and h0_max.

    Raises
    ------
    SampleMismatchError
        The two differ in length.
    NotEnoughDataError
        Fewer than two samples, or reference values that do not differ.
    ParameterError
        A value that is not finite, or leverages below 1/n.

    References
    ----------
    .. [1] F. Allegrini, A.C. Olivieri, Anal. Chem. 86 (2014) 7858-7866 (from memory).
    """
    y, h = paired_vectors("reference values", reference, "leverages", leverages, least=2)
    if np.ptp(y) == 0:
        raise NotEnoughDataError(f"all {y.size} reference values are {y[0]:.6g}; samples that differ are needed.")
    if (h < (1 - 1e-9) / y.size).any():
        raise ParameterError(
            f"leverages below 1/n = {1 / y.size:.4g}; give those of the mean-centred model, 1/n included."
        )
    own = (y - y.mean()) ** 2
    total = float(own.sum())
    lowest = float(y.mean()) ** 2 / total
    background = float(np.max(h - 1 / y.size - own / total))  # they sum to A - 1, so the largest is not below zero
    term = 1 / y.size if mean_term else 0.0
    return lowest + term, lowest + max(background, 0.0) + term


def detection_interval(
    reference: ArrayLike,
    leverages: ArrayLike,
    *,
    sensitivity: float,
    signal_sd: float,
    reference_sd: float,
    mean_term: bool = True,
) -> DetectionInterval:
    """Interval of detection limits, 3.3 standard deviations of a result at zero at the two blank leverages.

    Parameters
    ----------
    reference, leverages : arrays of shape (n_samples,)
        Reference values [unit of the analyte] and leverages, 1/n included, of the calibration samples.
    sensitivity, signal_sd, reference_sd : float
        As `result_sd` takes them.
    mean_term : bool
        Whether the leverage at zero includes 1/n. The publication leaves it out; a mean-centred model has it.

    Raises
    ------
    SampleMismatchError
        Reference values and leverages differ in length.
    NotEnoughDataError
        Fewer than two samples, or reference values that do not differ.
    ParameterError
        Parameters out of their bounds.

    References
    ----------
    .. [1] F. Allegrini, A.C. Olivieri, Anal. Chem. 86 (2014) 7858-7866 (from memory).
    """
    leverage_low, leverage_high = blank_leverages(reference, leverages, mean_term=mean_term)
    low, high = (float(result_sd(h, sensitivity, signal_sd, reference_sd)) for h in (leverage_low, leverage_high))
    return DetectionInterval(
        sensitivity=sensitivity,
        leverage_low=leverage_low,
        leverage_high=leverage_high,
        low=DETECTION_FACTOR * low,
        high=DETECTION_FACTOR * high,
        quantification_high=QUANTIFICATION_FACTOR * high,
    )
