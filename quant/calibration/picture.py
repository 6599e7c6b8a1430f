"""The numbers behind the pictures of a calibration."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.model.calibration import Calibration
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.factor_regression import FactorRegression
from quant.regression.method import Method
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet

MOST_SHOWN = 60  # spectra in a picture, evenly along the reference values
CURVE_POINTS = 101
SHOWN_DIGITS = 5  # of the largest ordinate


@dataclass(frozen=True, kw_only=True, eq=False)
class Picture(Result):
    """What the report draws of one calibration."""

    axis: FloatArray = documented("Axis of the spectra as read", "axis unit")
    axis_unit: str = documented("Unit of the axis")
    quantity: str = documented("Ordinate of the spectra as read")
    shown: tuple[str, ...] = documented("Samples whose mean spectra are drawn, at most 60")
    shown_values: FloatArray = documented("Their reference values", "unit of the analyte")
    spectra: FloatArray = documented("Their mean spectra as read, rounded for drawing")
    processed_axis: FloatArray = documented("Axis behind the preprocessing", "axis unit")
    processed: FloatArray = documented("Their mean spectra after preprocessing, rounded for drawing")
    regression_vector: FloatArray | None = documented(
        "PLS, PCR, classical least squares: regression vector on the processed axis"
    )
    components: tuple[str, ...] = documented("Classical least squares: names of the pure spectra, background last")
    pure_spectra: FloatArray | None = documented("Classical least squares: pure spectra on the processed axis")
    residual_spectra: FloatArray | None = documented("Classical least squares: residual spectra of the samples shown")
    bands: tuple[tuple[float, float], ...] = documented(
        "Band area: from, to of each band, the reference band last", "axis unit"
    )
    signals: FloatArray | None = documented("Band area: signal of each calibration sample")
    line: tuple[float, float] | None = documented("Band area: slope and intercept of signal on value")
    rmsec: FloatArray = documented("RMSEC, one a number of factors", "unit of the analyte")
    curve: FloatArray | None = documented("Band area by a quadratic: contents and signals along it, two rows")
    explained_x: FloatArray | None = documented("PLS, PCR: share of the spectra's variance that each factor explains")
    explained_y: FloatArray | None = documented("PLS, PCR: share of the values' variance that each factor explains")
    leverage: FloatArray = documented("Leverage of each calibration sample, 1/n included")
    residual: FloatArray = documented("Sum of squares of the residual spectrum of each calibration sample")


def picture_of(
    model: Calibration,
    training: SampleSet,
    full: Method,
    axis_after: FloatArray,
    processed: FloatArray,
    values: FloatArray,
) -> Picture:
    """Gather what the report draws of one calibration.

    Parameters
    ----------
    model : Calibration
    training : SampleSet
        Its calibration samples.
    full : Method
        The regression with the largest number of factors looked at.
    axis_after : array of shape (n_points_after,)
        Axis of the processed spectra. [axis unit]
    processed : array of shape (n_spectra, n_points_after)
        Processed spectra.
    values : array of shape (n_samples,)
        Reference values. [unit of the analyte]
    """
    mean = training.mean_by_sample(processed)
    raw = training.mean_by_sample(training.spectra.values)
    order = np.argsort(values, kind="stable")
    shown = np.unique(order[np.linspace(0, order.size - 1, min(order.size, MOST_SHOWN)).round().astype(int)])
    fitted, coefficients = full.predict_each(mean), getattr(model.method, "coefficients_", None)
    return Picture(
        axis=model.axis.values,
        axis_unit=model.axis.unit,
        quantity=model.quantity,
        shown=tuple(training.sample_ids[i] for i in shown),
        shown_values=values[shown],
        spectra=_rounded(raw[shown]),
        processed_axis=axis_after,
        processed=_rounded(mean[shown]),
        regression_vector=None if coefficients is None else coefficients[-1],
        components=_components(model),
        pure_spectra=_pure_spectra(model.method),
        residual_spectra=_rounded(model.method.residual_spectra(mean[shown]))
        if isinstance(model.method, ClassicalLeastSquares)
        else None,
        bands=_band_ranges(model.method),
        signals=model.method.signals(mean) if isinstance(model.method, BandArea) else None,
        line=_line(model.method),
        curve=_curve(model.method),
        rmsec=np.sqrt(np.mean((fitted - values) ** 2, axis=1)),
        explained_x=full.explained_x_ if isinstance(full, FactorRegression) else None,
        explained_y=full.explained_y_ if isinstance(full, FactorRegression) else None,
        leverage=model.method.leverage_each(mean)[-1],
        residual=training.mean_by_sample(model.method.residual_each(processed)[-1]),
    )


def _components(model: Calibration) -> tuple[str, ...]:
    if not isinstance(model.method, ClassicalLeastSquares):
        return ()
    background = ("background",) if model.method.background else ()
    return (model.analyte.name, *model.method.companions, *background)


def _pure_spectra(method: Method) -> FloatArray | None:
    if not isinstance(method, ClassicalLeastSquares):
        return None
    return np.vstack([method.pure_spectra_, method.background_]) if method.background else method.pure_spectra_


def _curve(method: Method) -> FloatArray | None:
    if not isinstance(method, BandArea) or method.curve_ is None:
        return None
    contents = np.linspace(method.curve_.lowest, method.curve_.highest, CURVE_POINTS)
    return np.stack([contents, method.signal_at(contents)])


def _line(method: Method) -> tuple[float, float] | None:
    return (method.line_.slope, method.line_.intercept) if isinstance(method, BandArea) else None


def _band_ranges(method: Method) -> tuple[tuple[float, float], ...]:
    if not isinstance(method, BandArea):
        return ()
    bands = [*(method.bands or ()), *([method.reference_band] if method.reference_band else [])]
    spans = [band.get("range") or [band["position"]] * 2 for band in bands]
    return tuple((float(min(span)), float(max(span))) for span in spans)


def _rounded(spectra: FloatArray) -> FloatArray:
    """Round to five digits of the largest ordinate: finer than any screen."""
    largest = float(np.abs(spectra).max())
    return np.round(spectra, SHOWN_DIGITS - int(np.ceil(np.log10(largest)))) if largest > 0 else spectra
