"""How a calibration does on samples that took no part in it."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.calibration.acceptance import check_acceptance
from quant.calibration.requirement import MET, Requirement
from quant.calibration.split import INDEPENDENT
from quant.model.calibration import Calibration
from quant.prediction.applicability import check_acquisition, judge
from quant.prediction.predict import evaluate
from quant.recipe.audit_schema import AcceptanceTable
from quant.result import Result, documented
from quant.spectra.concentration import refuse_other_scale
from quant.spectra.sample_set import NOT_STATED, SampleSet
from quant.statistics.figures import Figures, figures_of_merit
from quant.statistics.significance import PREDICTED_ON_REFERENCE, REFERENCE_ON_PREDICTED


@dataclass(frozen=True, kw_only=True, eq=False)
class ValidationResult(Result):
    """Predictions of validation samples beside their reference values."""

    analyte: str = documented("Name of the analyte")
    unit: str = documented("Unit of the analyte")
    kind: str = documented("independent validation (separate material) or internal test (a split of one set)")
    how: str = documented("How the samples were chosen")
    sample_ids: tuple[str, ...] = documented("Sample IDs")
    reference: FloatArray = documented("Reference values", "unit of the analyte")
    predicted: FloatArray = documented("Predictions", "unit of the analyte")
    low: FloatArray = documented("Lower ends of the 95 % intervals for the reference results", "unit of the analyte")
    high: FloatArray = documented("Upper ends of them", "unit of the analyte")
    leverage: FloatArray = documented("Leverages, 1/n included")
    residual: FloatArray = documented("Sums of squares of residual spectra")
    applicability: tuple[str, ...] = documented("Statement for each sample")
    inside: BoolArray = documented("Whether the interval holds the reference value")
    figures: Figures = documented("Figures of merit")
    by_origin: dict[str, Figures] = documented("The same for each origin of the samples, where more than one is stated")
    acceptance: tuple[Requirement, ...] = documented("The recipe's criteria, one entry each; empty without any")

    @property
    def accepted(self) -> bool:
        """True if all criteria are met; never for an internal test, which proves nothing about separate material."""
        return self.kind == INDEPENDENT and all(row.verdict == MET for row in self.acceptance)

    def __str__(self) -> str:
        """Kind, number of samples, figures of merit, criteria of acceptance."""
        inside = f"{int(self.inside.sum())} of {self.inside.size} reference values inside their 95 % interval"
        origins = [
            f"  {origin}: n {f.n_samples}, RMSEP {f.rmse:.4g}, bias {f.bias:.3g} {self.unit}"
            for origin, f in self.by_origin.items()
        ]
        title = f"{self.kind.capitalize()} of {self.analyte}: {self.how}"
        return "\n".join([title, str(self.figures), inside, *origins, *map(str, self.acceptance)])


def validate(
    model: Calibration,
    samples: SampleSet,
    *,
    kind: str = INDEPENDENT,
    how: str = "",
    acceptance: AcceptanceTable | None = None,
) -> ValidationResult:
    """Predict samples with known values and compare.

    Parameters
    ----------
    model : Calibration
    samples : SampleSet
        Samples that took no part in the calibration, every one with a value of the model's analyte.
    kind : str
        "independent validation" for separately prepared or sampled material, "internal test" for a split of one set.
    how : str
        How they were chosen, in words.
    acceptance : AcceptanceTable, optional
        Criteria, as under [acceptance] of a recipe.

    Raises
    ------
    AxisMismatchError, QuantityError, AcquisitionMismatchError
        The spectra were not recorded as the calibration's were.
    SampleMismatchError
        The values are in another unit or on another basis than the calibration's.
    """
    analyte, values = samples.analyte(model.analyte.name)
    refuse_other_scale(model.analyte, analyte)
    unit = model.analyte.printed_unit
    check_acquisition(model, samples.spectra)
    aligned = samples.spectra.on_axis(model.axis, resample=bool(model.reading.get("resample", False)))
    found = evaluate(model, model.process(aligned.values), samples.sample_index, len(samples))
    verdicts = tuple(
        judge(model.limits, residual=r, leverage=h, value=v, standard_error=s).verdict
        for r, h, v, s in zip(found.residual, found.leverage, found.value, found.standard_error, strict=True)
    )
    direction = regression_direction(model)
    inside = (found.low <= values) & (values <= found.high)
    figures = figures_of_merit(found.value, values, direction=direction, unit=unit, kind="RMSEP")
    origins = [origin for origin in dict.fromkeys(samples.origins) if origin != NOT_STATED]
    rows = {origin: np.flatnonzero(np.array(samples.origins) == origin) for origin in origins}
    return ValidationResult(
        analyte=analyte.name,
        unit=unit,
        kind=kind,
        how=how or f"{len(samples)} samples",
        sample_ids=samples.sample_ids,
        reference=values,
        predicted=found.value,
        low=found.low,
        high=found.high,
        leverage=found.leverage,
        residual=found.residual,
        applicability=verdicts,
        inside=inside,
        figures=figures,
        by_origin={
            origin: figures_of_merit(found.value[i], values[i], direction=direction, unit=unit, kind="RMSEP")
            for origin, i in rows.items()
        }
        if len(rows) > 1
        else {},
        acceptance=check_acceptance(acceptance, figures, inside) if acceptance else (),
    )


def regression_direction(model: Calibration) -> str:
    """Return which way the line of predicted and reference values is fitted for a model.

    Inverse predictions (PLS) scatter about the truth, so the reference is regressed on them; predictions of classical
    calibrations (band area, classical least squares) scatter about the reference: the other way round.
    """
    return PREDICTED_ON_REFERENCE if model.method.classical else REFERENCE_ON_PREDICTED
