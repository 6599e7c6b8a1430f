"""What the model looks at in the spectra."""

from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.plots.agreement import plot_calibration_line
from quant.plots.components import plot_pure_spectrum, plot_residual_spectra
from quant.plots.spectra import plot_bands, plot_regression_vector
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.method import Method
from quant.reports.pictures import Picture, picture
from quant.spectra.bands import BandSpec
from quant.text_table import Row
from quant.units import AXIS_UNITS


def context(result: CalibrationResult, analyte: AnalyteResult, place: str) -> dict[str, Any]:  # noqa: ARG001
    """Return the regression vector, pure and residual spectra, or bands and calibration line."""
    method = analyte.model.method
    if isinstance(method, ClassicalLeastSquares):
        return {"bands": _model(analyte, method), "rows": [], "pictures": _of_components(analyte, place)}
    if not isinstance(method, BandArea):
        caption = (
            "Regression vector: ordinates that raise the prediction lie above the line, those that lower it below."
        )
        return {
            "bands": [],
            "rows": [],
            "pictures": [picture(plot_regression_vector, analyte, f"{place}-vector", caption)],
        }
    unit = AXIS_UNITS[analyte.picture.axis_unit]
    bands = [("band", describe_band(band, unit)) for band in method.bands or ()]
    if method.reference_band:
        bands.append(("reference band", describe_band(method.reference_band, unit)))
    bands = bands or [("band", "the whole axis")]
    if method.line_weights != "equal":
        bands.append(("weights", f"{method.line_weights}; results state the weight of their own signal"))
    return {
        "bands": bands,
        "rows": _line(analyte, method),
        "pictures": _pictures(analyte, place),
    }


def describe_band(band: BandSpec, unit: str) -> str:
    """Return a band in words: "area from 2212 to 2240 cm⁻¹ above the straight line through 2196 and 2256"."""
    if band.get("range"):
        first, last = band["range"]
        text = f"{band.get('signal', 'area')} from {first:g} to {last:g} {unit}"
    else:
        text = f"height at {band['position']:g} {unit}"
    line = band.get("baseline")
    return (
        f"{text}, above the straight line through {line[0]:g} and {line[1]:g} {unit}"
        if line
        else f"{text}, no baseline"
    )


def _model(result: AnalyteResult, method: ClassicalLeastSquares) -> list[tuple[str, str]]:
    return [
        ("components", ", ".join((result.analyte, *method.companions))),
        ("background that all samples share", "fitted" if method.background else "none"),
        ("baseline of each spectrum", method.baseline),
        ("contents below zero", "held at zero" if method.non_negative else "allowed"),
    ]


def _of_components(result: AnalyteResult, place: str) -> list[Picture]:
    residual = "What the components leave of the calibration samples. Structure is something that is not among them."
    pure = [
        picture(plot_pure_spectrum, result, f"{place}-pure{i}", f"Pure spectrum: {name}.", narrow=True, number=i)
        for i, name in enumerate(result.picture.components)
    ]
    return [*pure, picture(plot_residual_spectra, result, f"{place}-residual", residual)]


def _line(result: AnalyteResult, method: BandArea) -> list[Row]:
    line, curve = method.line_, method.curve_
    if curve is not None:
        names = ("constant of the quadratic", "linear coefficient", "quadratic coefficient")
        terms = zip(names, curve.coefficients, curve.coefficient_sds, strict=True)
        return [
            *(row for name, value, sd in terms for row in ((name, value, ""), ("its standard deviation", sd, ""))),
            ("the quadratic turns at", curve.vertex, result.unit),
            ("residual standard deviation", curve.residual_sd, ""),
            ("degrees of freedom", curve.degrees_of_freedom, ""),
        ]
    return [
        ("slope of signal on value", line.slope, f"per {result.unit}" if result.unit else ""),
        ("its standard deviation", line.slope_sd, f"per {result.unit}" if result.unit else ""),
        ("intercept", line.intercept, "fixed at zero" if line.through_origin else ""),
        ("its standard deviation", None if line.through_origin else line.intercept_sd, ""),
        ("residual standard deviation", line.residual_sd, ""),
        ("degrees of freedom", line.degrees_of_freedom, ""),
        ("correlation", line.correlation, ""),
    ]


def _pictures(result: AnalyteResult, place: str) -> list[Picture]:
    kind = "line" if result.picture.curve is None else "quadratic"
    line = picture(plot_calibration_line, result, f"{place}-line", f"Calibration {kind} with its samples.", narrow=True)
    if not result.picture.bands:
        return [line]
    return [
        picture(plot_bands, result, f"{place}-bands", "The bands on the preprocessed spectra."),
        *(
            picture(plot_bands, result, f"{place}-band{number}", caption, narrow=True, number=number)
            for number, caption in enumerate(_near_by(result.model.method))
        ),
        line,
    ]


def _near_by(method: Method) -> list[str]:
    """Return the captions of the pictures of each band from near by."""
    if not isinstance(method, BandArea):
        return []
    bands = [("band", band) for band in method.bands or ()]
    if method.reference_band:
        bands.append(("reference band", method.reference_band))
    rests = "; dotted: where its baseline rests"
    return [f"The {name} near by{rests if band.get('baseline') else ''}." for name, band in bands]
