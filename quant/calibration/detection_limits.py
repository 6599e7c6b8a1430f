"""What a calibration can tell from a blank: critical value, detection limit, limit of quantification, sensitivity."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.errors import NotEnoughDataError, ParameterError
from quant.model.calibration import Calibration
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.result import Result, documented
from quant.statistics.detection import (
    NONCENTRAL_T,
    QUANTIFICATION_FACTOR,
    DetectionLimits,
    critical_value,
    detection_limit,
)
from quant.statistics.detection_interval import DetectionInterval, blank_leverages, detection_interval
from quant.statistics.method_limits import IchLimits, ich_limits, method_standard_deviation
from quant.statistics.net_analyte_signal import analytical_sensitivity, net_analyte_signal_of_vector
from quant.text_table import Row, format_rows

FROM_REPLICATES = "scatter of replicates' predictions, times the sensitivity, for as many spectra as the standards have"
FROM_RESIDUALS = "residual spectra of left-out samples; there are no replicates"
STATED_LABORATORY = "laboratory error"
FROM_LEFT_OUT = "s0 of left-out samples, which is rather too large: no laboratory error is known"
ALPHA = 0.05  # shares of false alarms and of misses
FAR = 1.0  # zero lies more than this many times the calibrated range's width below it
EXTRAPOLATED = "zero lies far below the calibrated range: these figures are extrapolated and refuse no limit"


@dataclass(frozen=True, kw_only=True, eq=False)
class DetectionResult(Result):
    """Detection figures of one calibration."""

    unit: str = documented("Unit of the analyte")
    line: DetectionLimits | None = documented(
        "Band area: figures of the calibration line (Currie, with t)", default=None
    )
    ich: tuple[IchLimits, ...] = documented(
        "Band area: the ways of ICH Q2(R2), 3.3 and 10 sigma over slope", default=()
    )
    method_sd: float | None = documented(
        "Band area: standard deviation of the method, ISO 8466-1", "unit of the analyte", default=None
    )
    method_cv: float | None = documented("Band area: the same over the mean content", "%", default=None)
    interval: DetectionInterval | None = documented(
        "Multivariate: LOD_min and LOD_max of Allegrini & Olivieri 2014", default=None
    )
    signal_sd: float | None = documented(
        "Multivariate: noise of one point of a mean spectrum behind the preprocessing", "ordinate", default=None
    )
    signal_sd_source: str = documented("Multivariate: where that comes from", default="")
    reference_sd: float | None = documented(
        "Multivariate: standard error of a reference value", "unit of the analyte", default=None
    )
    reference_sd_source: str = documented("Multivariate: where that comes from", default="")
    selectivity: float | None = documented(
        "Multivariate: net analyte signal over the analyte's apparent spectrum (slope of spectra on values), 0 to 1",
        default=None,
    )
    analytical_sensitivity: float | None = documented(
        "Multivariate: sensitivity over noise; its inverse is the smallest difference that stands out",
        "1 / unit of the analyte",
        default=None,
    )
    left_out_sd: float | None = documented(
        "Standard error of a result at zero from errors of left-out samples", "unit of the analyte", default=None
    )
    left_out_critical: float | None = documented("Critical value from it, 5 %", "unit of the analyte", default=None)
    left_out_detection: float | None = documented(
        "Detection limit from it, 5 % and 5 %", "unit of the analyte", default=None
    )
    smallest_decidable: float | None = documented(
        "The larger of limit of quantification and detection limit: smaller limits are not decided",
        "unit of the analyte",
        default=None,
    )
    smallest_from: str = documented("Which of the two it is")
    remark: str = documented("What to beware of, or empty")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        rows: list[Row] = []
        if self.line is not None:
            rows += [(name, value, self.unit) for name, value, _ in self.line.rows()]
        if self.interval is not None:
            rows += [(name, value, self.unit) for name, value, _ in self.interval.rows()]
        rows += [
            ("from left-out errors: standard error at zero", self.left_out_sd, self.unit),
            ("from left-out errors: critical value", self.left_out_critical, self.unit),
            ("from left-out errors: detection limit", self.left_out_detection, self.unit),
            ("smallest limit that can be decided", self.smallest_decidable, self.unit),
        ]
        return rows

    def __str__(self) -> str:
        return f"Detection\n{format_rows(self.rows())}"


def detect(
    model: Calibration, values: FloatArray, mean: FloatArray, crossed: CrossValidationResult
) -> DetectionResult | None:
    """Find the detection figures of a calibration; None where its model allows none.

    Parameters
    ----------
    model : Calibration
    values : array of shape (n_samples,)
        Reference values of the calibration samples. [unit of the analyte]
    mean : array of shape (n_samples, n_points_after)
        Their processed spectra, one a sample.
    crossed : CrossValidationResult
        For residual spectra of left-out samples.
    """
    try:
        if isinstance(model.method, BandArea):
            return _of_line(model, model.method)
        return _of_vector(model, values, mean, crossed)
    except (NotEnoughDataError, ParameterError):
        return None


def _of_line(model: Calibration, method: BandArea) -> DetectionResult:
    """By the standard error of a result at zero, whatever the curve and the weights."""
    freedom = model.uncertainty.degrees_of_freedom
    at_zero = method.inverse_interval(method.signal_at(np.zeros(1)), model.uncertainty.t)
    zero = float(at_zero.standard_error[0])
    found = DetectionLimits(
        zero_sd=zero,
        degrees_of_freedom=freedom,
        readings=1,
        alpha=ALPHA,
        beta=ALPHA,
        way=NONCENTRAL_T,
        critical=critical_value(zero, freedom, ALPHA),
        detection=detection_limit(zero, freedom, ALPHA, ALPHA),
        quantification=QUANTIFICATION_FACTOR * zero,
    )
    # The guideline's ways and the standard's figure are those of a straight, unweighted line.
    plain = method.curve_ is None and method.line_weights == "equal"
    spread = plain and not method.line_.through_origin
    sd, cv = method_standard_deviation(method.line_) if spread else (None, None)
    return _result(
        model,
        line=found,
        ich=ich_limits(method.line_) if plain else (),
        method_sd=sd,
        method_cv=cv,
        limits={"limit of quantification": found.quantification, "detection limit": found.detection},
    )


def _of_vector(
    model: Calibration, values: FloatArray, mean: FloatArray, crossed: CrossValidationResult
) -> DetectionResult | None:
    method = model.method
    if isinstance(method, ClassicalLeastSquares):
        method = method.unconstrained()  # holding at zero hides the scatter of blanks
    coefficients = getattr(method, "coefficients_", None)
    if coefficients is None:
        return None
    known, centred = model.uncertainty, values - values.mean()
    apparent = centred @ (mean - mean.mean(axis=0)) / float(centred @ centred)
    net = net_analyte_signal_of_vector(coefficients[-1], apparent)
    leverages = model.method.leverage_each(mean)[-1]
    if known.replicate_sd:
        # Of a result from as many spectra as the calibration's samples have, as its leverages and values are.
        noise, noise_source = known.replicate_sd / np.sqrt(known.replicates) * net.sensitivity, FROM_REPLICATES
    else:
        residual = crossed.at(model.factors)[2].mean()
        noise = float(np.sqrt(residual / max(mean.shape[1] - model.factors - 1, 1)))
        noise_source = FROM_RESIDUALS
    stated = known.laboratory_error is not None
    reference = known.laboratory_error if known.laboratory_error is not None else known.s0
    interval = detection_interval(
        values, leverages, sensitivity=net.sensitivity, signal_sd=noise, reference_sd=reference
    )
    worst = blank_leverages(values, leverages)[1]
    zero = known.s0 * float(np.sqrt(1 + worst))
    return _result(
        model,
        interval=interval,
        signal_sd=noise,
        signal_sd_source=noise_source,
        reference_sd=reference,
        reference_sd_source=STATED_LABORATORY if stated else FROM_LEFT_OUT,
        selectivity=net.selectivity,
        analytical_sensitivity=analytical_sensitivity(net.sensitivity, noise) if noise > 0 else None,
        left_out_sd=zero,
        left_out_critical=critical_value(zero, known.degrees_of_freedom),
        left_out_detection=detection_limit(zero, known.degrees_of_freedom),
        limits={"limit of quantification": interval.quantification_high, "detection limit LOD_max": interval.high},
    )


def _result(model: Calibration, *, limits: dict[str, float], **found: Any) -> DetectionResult:
    largest = max(limits, key=lambda name: limits[name])
    lowest, highest = model.limits.lowest, model.limits.highest
    far = lowest > FAR * (highest - lowest)
    return DetectionResult(
        unit=model.analyte.printed_unit,
        smallest_decidable=None if far else limits[largest],
        smallest_from="" if far else largest,
        remark=EXTRAPOLATED if far else "",
        **found,
    )
