"""All preprocessing steps, by the name a recipe calls them."""

from quant.estimator import Step
from quant.preprocessing.absorbance import Absorbance
from quant.preprocessing.baseline import StraightBaseline
from quant.preprocessing.centre import MeanCentre
from quant.preprocessing.msc import MSC
from quant.preprocessing.ranges import KeepRanges, LeaveOutRanges
from quant.preprocessing.resample import Resample
from quant.preprocessing.savitzky_golay import SavitzkyGolay
from quant.preprocessing.scale import ScaleColumns
from quant.preprocessing.snv import SNV

STEPS: dict[str, type[Step]] = {
    "absorbance": Absorbance,
    "keep_ranges": KeepRanges,
    "leave_out_ranges": LeaveOutRanges,
    "resample": Resample,
    "snv": SNV,
    "msc": MSC,
    "savitzky_golay": SavitzkyGolay,
    "straight_baseline": StraightBaseline,
    "mean_centre": MeanCentre,
    "scale_columns": ScaleColumns,
}
