"""What the figures do not say, and what they mean."""

from typing import Any

from quant.calibration.result import CalibrationResult

CAUTIONS = (
    "These results support the release decision of a qualified person; they do not replace it.",
    "Local codes and the pharmacopoeia in force rule. This report shows no compliance with any of them.",
    "The figures hold only for spectra recorded as these were: technique, accessory, resolution, sample preparation, "
    "ordinate and axis.",
    "They hold within the calibrated range, for the matrix that the samples came from. A new raw material, supplier, "
    "solvent or process step calls for new validation samples.",
    "Every result needs its interval and its statement of applicability beside it. A value that the calibration does "
    "not apply to must not be used.",
    "Check the spectrometer and re-validate after each service, repair or change of accessory, and at fixed intervals.",
    "Preparing standards means handling solvents: work under ventilation, keep flammable ones away from ignition "
    "sources, earth metal containers, wear gloves and goggles, and read the safety data sheets first.",
)

GLOSSARY = (
    ("error", "Predicted minus reference value."),
    ("RMSEC", "Root mean square error of calibration: of fitted samples, divided by n. Always too good."),
    ("SEC", "Standard error of calibration: of fitted samples, divided by n − A − 1 (A factors and the mean)."),
    ("RMSECV", "Root mean square error of cross-validation: of samples while they were left out of the fit."),
    ("Q²", "1 − PRESS/SST: share of the spread of the reference values that left-out predictions explain."),
    ("RMSEP", "Root mean square error of prediction: of samples that took no part in the calibration, bias included."),
    ("bias", "Mean of the errors. Significant: more than chance explains, by a t test at 95 %."),
    ("SEP", "Standard error of prediction: standard deviation of the errors about the bias, divided by n − 1."),
    ("R²", "1 − SSE/SST: share of the spread of these reference values that the predictions explain."),
    ("RPD", "Standard deviation of the reference values over SEP, both of the same set. Grows with the range."),
    ("factor", "One direction in the spectra that PLS uses. Too few miss the analyte, too many fit noise."),
    ("leverage", "How far a spectrum lies from the middle of the calibration, in the directions the model uses."),
    ("residual spectrum", "What the model cannot explain of a spectrum; large where something unknown is present."),
    ("applicable", "Within all warning limits, which 95 % of good new samples pass each."),
    ("not applicable", "Beyond a stop limit; all stop limits together reject at most 1 % of good new samples."),
    ("independent validation", "Samples prepared or drawn separately. A split of one set is an internal test."),
    ("one standard error", "Rule: the fewest factors with an error within one standard error of the lowest."),
    ("f ratio", "Rule: the fewest factors with a PRESS not significantly above the lowest (F test, α = 0.25)."),
    ("PRESS", "Sum of the squared errors of left-out samples."),
)


def context(result: CalibrationResult) -> dict[str, Any]:  # noqa: ARG001 (every section's context takes the result)
    """Return the cautions and the glossary."""
    return {"cautions": CAUTIONS, "glossary": GLOSSARY}
