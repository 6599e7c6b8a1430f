"""Samples of which the laboratory only knows that they lie below a limit: one-sided checks of a calibration."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.checks import name_some
from quant.model.calibration import Calibration
from quant.prediction.applicability import check_acquisition
from quant.prediction.predict import evaluate
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet


@dataclass(frozen=True, kw_only=True, eq=False)
class BelowLimitResult(Result):
    """Predictions of samples left out of the fit because their value lies below a detection limit.

    Such a sample contradicts the calibration if even the lower end of its 95 % interval lies above the limit.
    """

    unit: str = documented("Unit of the analyte")
    sample_ids: tuple[str, ...] = documented("Sample IDs")
    limit: FloatArray = documented("Upper limits that the laboratory gave", "unit of the analyte")
    predicted: FloatArray = documented("Predictions", "unit of the analyte")
    low: FloatArray = documented("Lower ends of the 95 % intervals for the reference results", "unit of the analyte")
    contradicts: BoolArray = documented("Whether the interval lies above the limit as a whole")
    lowest_calibrated: float = documented("Lower end of the calibrated range", "unit of the analyte")

    @property
    def contradicting(self) -> tuple[str, ...]:
        """Samples predicted above their limit."""
        return tuple(sample for sample, bad in zip(self.sample_ids, self.contradicts, strict=True) if bad)

    def remarks(self) -> tuple[str, ...]:
        """Say how the check ended, and ask for what would make it needless."""
        limit = f"{self.limit.max():.4g} {self.unit}".rstrip()
        lowest = f"{self.lowest_calibrated:.4g} {self.unit}".rstrip()
        failed = (
            f"predicted above it even at the lower end of the 95 % interval: {name_some(self.contradicting)} (check "
            "labels, laboratory values, interference)"
            if self.contradicting
            else "none of them is predicted above its limit"
        )
        n = len(self.sample_ids)
        return (
            f"{n} sample(s) below a detection limit of at most {limit} took no part in the fit; {failed}",
            f"leaving them out cuts off the low end at {lowest}: prepare blanks and low standards by weighing, measure "
            "them, and add them with their known values",
        )


def check_below_limit(model: Calibration, sets: Sequence[SampleSet]) -> BelowLimitResult | None:
    """Predict samples that only have an upper limit, and compare with it; None where there is no such sample.

    Parameters
    ----------
    model : Calibration
    sets : sequence of SampleSet
        Sets whose samples all have an upper limit of the model's analyte.

    Raises
    ------
    AxisMismatchError, QuantityError, AcquisitionMismatchError
        The spectra were not recorded as the calibration's were.
    """
    if not sets:
        return None
    parts = []
    for samples in sets:
        check_acquisition(model, samples.spectra)
        aligned = samples.spectra.on_axis(model.axis, resample=bool(model.reading.get("resample", False)))
        parts.append(evaluate(model, model.process(aligned.values), samples.sample_index, len(samples)))
    limit = np.concatenate([samples.upper_limits(model.analyte.name) for samples in sets])
    low = np.concatenate([part.low for part in parts])
    return BelowLimitResult(
        unit=model.analyte.printed_unit,
        sample_ids=tuple(sample for samples in sets for sample in samples.sample_ids),
        limit=limit,
        predicted=np.concatenate([part.value for part in parts]),
        low=low,
        contradicts=low > limit,
        lowest_calibrated=model.limits.lowest,
    )
