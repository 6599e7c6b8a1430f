"""All preprocessing steps, by the name a recipe calls them."""

from quant.estimator.base import Step
from quant.later import LaterTable

STEPS: LaterTable[type[Step]] = LaterTable(
    {
        "absorbance": "quant.preprocessing.absorbance:Absorbance",
        "keep_ranges": "quant.preprocessing.ranges:KeepRanges",
        "leave_out_ranges": "quant.preprocessing.ranges:LeaveOutRanges",
        "resample": "quant.preprocessing.resample:Resample",
        "snv": "quant.preprocessing.snv:SNV",
        "msc": "quant.preprocessing.msc:MSC",
        "emsc": "quant.preprocessing.emsc:EMSC",
        "unit_length": "quant.preprocessing.normalise:UnitLength",
        "unit_area": "quant.preprocessing.normalise:UnitArea",
        "normalise_band": "quant.preprocessing.normalise:NormaliseBand",
        "savitzky_golay": "quant.preprocessing.savitzky_golay:SavitzkyGolay",
        "gap_derivative": "quant.preprocessing.gap_derivative:GapDerivative",
        "straight_baseline": "quant.preprocessing.baseline:StraightBaseline",
        "detrend": "quant.preprocessing.detrend:Detrend",
        "asymmetric_baseline": "quant.preprocessing.asymmetric_baseline:AsymmetricBaseline",
        "orthogonal_removal": "quant.preprocessing.orthogonal_removal:OrthogonalRemoval",
        "mean_centre": "quant.preprocessing.centre:MeanCentre",
        "scale_columns": "quant.preprocessing.scale:ScaleColumns",
    }
)

CORRECTIONS: LaterTable[type[Step]] = LaterTable({"spectral_map": "quant.preprocessing.spectral_map:SpectralMap"})
"""Steps that no recipe asks for, but a model corrected after service carries."""
