"""Purity by difference, from predictions of every measured impurity in the same samples."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.result import CalibrationResult
from quant.checks import name_some
from quant.errors import NotEnoughDataError, SampleMismatchError
from quant.prediction.applicability import NOT_APPLICABLE
from quant.prediction.result import Prediction, PredictionResult
from quant.result import Result, documented
from quant.statistics.purity import UPPER_BOUND, purity_by_difference
from quant.text_table import format_columns

FROM_LEFT_OUT = "correlations from errors of left-out samples"
LARGEST_POSSIBLE = "correlations not known: taken as 1, which gives the largest possible uncertainty"
FEWEST_COMMON = 10  # samples from which a correlation can be had: below, its 95 % interval spans more than 1.2


@dataclass(frozen=True, kw_only=True)
class SamplePurity(Result):
    """Purity of one sample by difference: an upper bound."""

    sample: str = documented("Sample ID")
    value: float | None = documented("Total less the impurities measured; an upper bound", "unit of the contents")
    standard_uncertainty: float | None = documented("Of the sum of the impurities measured", "unit of the contents")
    note: str = documented("Why there is no value, or empty")


@dataclass(frozen=True, kw_only=True)
class PurityResult(Result):
    """Purity of samples by difference."""

    unit: str = documented("Unit of the contents")
    impurities: tuple[str, ...] = documented("Impurities measured; what is not among them is counted as pure")
    total: float = documented("The whole", "unit of the contents")
    statement: str = documented("What the figures mean")
    correlation_source: str = documented("Where the correlations of the errors come from")
    samples: tuple[SamplePurity, ...] = documented("One entry a sample")

    def __getitem__(self, sample: str) -> SamplePurity:
        """Return the purity of a sample by its ID."""
        for row in self.samples:
            if row.sample == sample:
                return row
        raise KeyError(f"No sample {sample!r}; there are {', '.join(row.sample for row in self.samples)}.")

    def __str__(self) -> str:
        """Statement, then a table: sample, purity at most, standard uncertainty, note."""
        rows = [(row.sample, row.value, self.unit, row.standard_uncertainty, row.note) for row in self.samples]
        head = f"Purity by difference from {', '.join(self.impurities)}: {self.statement}; {self.correlation_source}"
        return f"{head}\n{format_columns(('sample', 'at most', 'unit', 'std uncertainty', 'note'), rows)}"


def purity(
    predictions: Sequence[PredictionResult], calibrations: CalibrationResult | None = None, *, total: float = 100.0
) -> PurityResult:
    """Take every measured impurity from the whole.

    Parameters
    ----------
    predictions : sequence of PredictionResult
        One for each impurity, of the same samples and in one unit.
    calibrations : CalibrationResult, optional
        The calibrations behind them: errors of left-out samples tell how the impurities' errors go together. Without
        them, errors are taken to go together completely.
    total : float
        The whole: 100 for percent. [unit of the contents]

    Raises
    ------
    NotEnoughDataError
        No prediction.
    SampleMismatchError
        Units or samples differ, or an impurity comes twice.
    """
    if not predictions or not all(result.predictions for result in predictions):
        raise NotEnoughDataError("There is no prediction; purity by difference needs one result an impurity.")
    first = [result.predictions[0] for result in predictions]
    names, units = tuple(row.analyte for row in first), dict.fromkeys(row.unit for row in first)
    if len(units) > 1 or len(set(names)) < len(names):
        raise SampleMismatchError(
            f"Impurities {name_some(names)} in {name_some(map(repr, units))}; expected different ones in one unit."
        )
    samples = [row.sample for row in predictions[0].predictions]
    for result in predictions[1:]:
        if {row.sample for row in result.predictions} != set(samples):
            raise SampleMismatchError("The impurities were predicted in different samples; expected the same ones.")
    known = None if calibrations is None else _correlations(calibrations, names)
    return PurityResult(
        unit=first[0].unit,
        impurities=names,
        total=total,
        statement=UPPER_BOUND,
        correlation_source=LARGEST_POSSIBLE if known is None else FROM_LEFT_OUT,
        samples=tuple(_of_sample([result[sample] for result in predictions], known, total=total) for sample in samples),
    )


def _of_sample(rows: Sequence[Prediction], correlations: FloatArray | None, *, total: float) -> SamplePurity:
    strange = [row.analyte for row in rows if row.applicability == NOT_APPLICABLE]
    if strange:
        note = f"the calibration of {name_some(strange)} is not applicable to this spectrum"
        return SamplePurity(sample=rows[0].sample, value=None, standard_uncertainty=None, note=note)
    whole = np.ones((len(rows), len(rows))) if correlations is None else correlations
    found = purity_by_difference([row.value for row in rows], [row.standard_error for row in rows], whole, total)
    return SamplePurity(
        sample=rows[0].sample, value=found.value, standard_uncertainty=found.standard_uncertainty, note=""
    )


def _correlations(calibrations: CalibrationResult, names: Sequence[str]) -> FloatArray | None:
    """Correlations of left-out errors over the samples that all calibrations share; None where they are too few."""
    columns = []
    for name in names:
        crossed = calibrations[name].cross_validation
        errors = crossed.left_out_predictions(calibrations[name].factors) - crossed.reference
        columns.append(dict(zip(crossed.sample_ids, errors.tolist(), strict=True)))
    common = [sample for sample in columns[0] if all(sample in column for column in columns)]
    if len(common) < FEWEST_COMMON:
        return None
    errors = np.array([[column[sample] for sample in common] for column in columns])
    return np.atleast_2d(np.corrcoef(errors)) if (errors.std(axis=1) > 0).all() else None
