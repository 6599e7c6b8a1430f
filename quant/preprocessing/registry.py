"""All preprocessing steps, by the name a recipe calls them."""

from quant.estimator import Step
from quant.preprocessing.absorbance import Absorbance
from quant.preprocessing.asymmetric_baseline import AsymmetricBaseline
from quant.preprocessing.baseline import StraightBaseline
from quant.preprocessing.centre import MeanCentre
from quant.preprocessing.detrend import Detrend
from quant.preprocessing.emsc import EMSC
from quant.preprocessing.gap_derivative import GapDerivative
from quant.preprocessing.msc import MSC
from quant.preprocessing.normalise import NormaliseBand, UnitArea, UnitLength
from quant.preprocessing.orthogonal_removal import OrthogonalRemoval
from quant.preprocessing.ranges import KeepRanges, LeaveOutRanges
from quant.preprocessing.resample import Resample
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.scale import ScaleColumns
from quant.preprocessing.snv import SNV
from quant.preprocessing.spectral_map import SpectralMap

STEPS: dict[str, type[Step]] = {
    "absorbance": Absorbance,
    "keep_ranges": KeepRanges,
    "leave_out_ranges": LeaveOutRanges,
    "resample": Resample,
    "snv": SNV,
    "msc": MSC,
    "emsc": EMSC,
    "unit_length": UnitLength,
    "unit_area": UnitArea,
    "normalise_band": NormaliseBand,
    "savitzky_golay": SavitzkyGolay,
    "gap_derivative": GapDerivative,
    "straight_baseline": StraightBaseline,
    "detrend": Detrend,
    "asymmetric_baseline": AsymmetricBaseline,
    "orthogonal_removal": OrthogonalRemoval,
    "mean_centre": MeanCentre,
    "scale_columns": ScaleColumns,
}

CORRECTIONS: dict[str, type[Step]] = {"spectral_map": SpectralMap}
"""Steps that no recipe asks for, but a model corrected after service carries."""
