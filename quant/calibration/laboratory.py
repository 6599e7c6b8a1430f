"""The standard error of the laboratory: stated in the recipe, or found from repeated determinations."""

from dataclasses import dataclass, replace

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.result import Result, documented
from quant.spectra.reference_table import Analyte
from quant.spectra.sample_set import SampleSet
from quant.statistics.repeatability import standard_error_of_means

STATED = "stated in the recipe"
FROM_REPEATS = "from repeated determinations"
FEW_DEGREES_OF_FREEDOM = 10  # below it the 95 % interval of a standard deviation reaches beyond 0.7 to 1.8 times itself


@dataclass(frozen=True, kw_only=True, eq=False)
class LaboratoryResult(Result):
    """What repeated determinations say of the laboratory's error."""

    unit: str = documented("Unit of the analyte")
    standard_deviation: float = documented(
        "Standard deviation of a single determination, pooled over the samples of the reference table",
        "unit of the analyte",
    )
    degrees_of_freedom: int = documented("Its degrees of freedom")
    n_samples: int = documented("Samples determined more than once")
    determinations: IntArray = documented("Determinations behind the value of each calibration sample")
    standard_errors: FloatArray = documented("Standard error of each of these means", "unit of the analyte")
    standard_error: float = documented(
        "Root mean square of the standard errors of the calibration samples' values", "unit of the analyte"
    )
    used: bool = documented(
        "Whether it serves as the laboratory error; else the recipe states one, or all repeats agree"
    )

    def remarks(self) -> tuple[str, ...]:
        """Say what was found and what it is used for."""
        fewest, most = int(self.determinations.min()), int(self.determinations.max())
        count = f"{fewest}" if fewest == most else f"{fewest} to {most}"
        return (
            f"repeated determinations have a standard deviation of {_with_unit(self.standard_deviation, self.unit)} "
            f"({self.degrees_of_freedom} degrees of freedom, {self.n_samples} samples determined more than once); "
            f"values are means of {count} determinations, their root mean square standard error is "
            f"{_with_unit(self.standard_error, self.unit)}; {self._use()}",
        )

    def _use(self) -> str:
        if self.standard_deviation == 0:
            return "they agree to the last digit, so that they may be copies: not used as the laboratory error"
        if not self.used:
            return "the laboratory error is the one stated in the recipe"
        few = self.degrees_of_freedom < FEW_DEGREES_OF_FREEDOM
        return f"used as the laboratory error{' though known from few: repeat more samples' if few else ''}"


def laboratory_of(samples: SampleSet, name: str) -> tuple[Analyte, str, LaboratoryResult | None]:
    """Return an analyte with its laboratory error, where that comes from, and what repeats say of it.

    The recipe's figure comes first. Else it is s·√(mean of 1/m) for the pooled standard deviation s of a single
    determination and m determinations a calibration sample: repeatability only, so that it is rather too small, and the
    interval of the true value rather too wide.

    Parameters
    ----------
    samples : SampleSet
        Calibration samples, every one with a value of the analyte.
    name : str
        The analyte.
    """
    analyte, _ = samples.analyte(name)
    stated = analyte.laboratory_error is not None
    found = samples.repeatability.get(name)
    if found is None:
        return analyte, STATED if stated else "", None
    count = samples.determinations_of(name)
    error = standard_error_of_means(found.standard_deviation, count)
    used = not stated and error > 0
    result = LaboratoryResult(
        unit=analyte.printed_unit,
        standard_deviation=found.standard_deviation,
        degrees_of_freedom=found.degrees_of_freedom,
        n_samples=found.n_samples,
        determinations=np.array(count),
        standard_errors=found.standard_deviation / np.sqrt(count),
        standard_error=error,
        used=used,
    )
    if used:
        return replace(analyte, laboratory_error=error), FROM_REPEATS, result
    return analyte, STATED if stated else "", result


def _with_unit(value: float, unit: str) -> str:
    return f"{value:.3g} {unit}".rstrip()
