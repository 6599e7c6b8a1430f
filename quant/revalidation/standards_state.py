"""Are the check standards still what the label says?"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np
from scipy import special

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import SampleMismatchError
from quant.model.calibration import Calibration
from quant.result import Result, documented
from quant.revalidation.multiple_tests import holm_adjusted
from quant.spectra.sample_set import SampleSet, mean_by_sample
from quant.text_table import format_columns

PREPARED = ("assayed", "reassayed", "prepared", "made", "prepared_on")
"""Notes of the reference table that date a value; the latest of those given counts. Dates as 2026-12-31."""

MEASURED = ("measured", "date", "day")
"""Notes that date the spectrum."""

EXPIRES = ("expires", "use_by")
SEALED = "sealed"  # yes or no: was the vial closed since its value was determined
YES = ("yes", "true", "1", "sealed", "closed")
REASSAYED = ("reassayed", "assayed")
SIGNIFICANCE = 0.05  # of both questions, low and worse with age; both have to answer yes
FEWEST = 4


@dataclass(frozen=True, kw_only=True, eq=False)
class StandardState(Result):
    """One check standard."""

    sample: str = documented("Sample ID")
    error: float | None = documented("Predicted minus reference, in the analyte's unit; null without a value")
    age: int | None = documented("Days from the value's date to the measurement; null where either is not stated")
    sealed: bool | None = documented("Whether it was closed since; null where not stated")
    reassayed: bool = documented("Whether a later assay is stated")
    expired: bool | None = documented("Whether it was measured after its use-by date; null where none is stated")


@dataclass(frozen=True, kw_only=True, eq=False)
class StandardsEvidence(Result):
    """Whether the standards themselves, rather than the instrument, may have changed."""

    standards: tuple[StandardState, ...] = documented("The check standards, in the order they were read")
    mean_error: float | None = documented("Mean of predicted minus reference, in the analyte's unit")
    all_low: bool = documented("Whether every standard is predicted below its value")
    low_p: float | None = documented("Probability by chance of a mean as low (one-sided t)")
    age_slope: float | None = documented("Change of the error for each day of age, in the analyte's unit a day")
    age_p: float | None = documented("Probability by chance of errors falling so steeply with age (one-sided t)")
    loss_suspected: bool = documented("Whether errors are low and fall with age, as evaporation makes them")
    trustworthy: bool = documented("Whether nothing speaks against the standards: no loss, none expired")
    words: tuple[str, ...] = documented("The findings in words")

    def __str__(self) -> str:
        """The findings, then the standards."""
        header = ("standard", "error", "age, days", "sealed", "assayed again", "expired")
        unknown = "not stated"
        rows = [
            (s.sample, s.error, s.age, _or(s.sealed, unknown), s.reassayed, _or(s.expired, unknown))
            for s in self.standards
        ]
        return "\n".join([*self.words, format_columns(header, rows)])


def standards_evidence(model: Calibration, samples_after: SampleSet) -> StandardsEvidence:
    """Look whether the check standards may have changed, before the instrument is blamed.

    Parameters
    ----------
    model : Calibration
    samples_after : SampleSet
        Check standards measured after the visit, with reference values and, in their notes, dates (`PREPARED`,
        `MEASURED`, `EXPIRES`), and whether they were `sealed`.

    Raises
    ------
    SampleMismatchError
        The reference values are of another analyte, or a date cannot be read.
    AxisMismatchError, QuantityError
        The spectra do not fit the model.
    """
    errors = _errors(model, samples_after)
    states = tuple(
        _state(sample, notes, error)
        for sample, notes, error in zip(samples_after.sample_ids, samples_after.notes, errors.tolist(), strict=True)
    )
    known = np.array([s.error for s in states if s.error is not None])
    dated = [(s.age, s.error) for s in states if s.age is not None and s.error is not None]
    low_p = _low_p(known)
    slope, age_p = _age_trend(np.array(dated, dtype=np.float64).reshape(-1, 2))
    tested = [p for p in (low_p, age_p) if p is not None]
    loss = len(tested) == 2 and bool((holm_adjusted(tested) <= SIGNIFICANCE).all())
    expired = [s.sample for s in states if s.expired]
    return StandardsEvidence(
        standards=states,
        mean_error=float(known.mean()) if known.size else None,
        all_low=bool(known.size and (known < 0).all()),
        low_p=low_p,
        age_slope=slope,
        age_p=age_p,
        loss_suspected=loss,
        trustworthy=not loss and not expired,
        words=(_loss_words(states, known, low_p, age_p, slope, model, loss=loss), *_label_words(states, expired)),
    )


def _errors(model: Calibration, samples: SampleSet) -> FloatArray:
    """Predicted minus reference of every sample; NaN where there is no value."""
    names = [analyte.name for analyte in samples.analytes]
    if model.analyte.name not in names:
        raise SampleMismatchError(
            f"The reference values are of {name_some(names)}; expected {model.analyte.name}, which the model predicts. "
            "Name its column in the recipe."
        )
    spectra = samples.spectra.on_axis(model.axis, resample=bool(model.reading.get("resample", False)))
    processed = mean_by_sample(model.process(spectra.values), samples.sample_index, len(samples))
    values = samples.values[:, names.index(model.analyte.name)]
    return np.asarray(model.method.predict(processed) - values)


def _state(sample: str, notes: Mapping[str, str], error: float) -> StandardState:
    valued = [d for d in (_date(sample, notes, key) for key in PREPARED) if d is not None]
    measured = next((d for d in (_date(sample, notes, key) for key in MEASURED) if d is not None), None)
    expires = next((d for d in (_date(sample, notes, key) for key in EXPIRES) if d is not None), None)
    word = notes.get(SEALED, "").strip().lower()
    return StandardState(
        sample=sample,
        error=None if np.isnan(error) else error,
        age=(measured - max(valued)).days if valued and measured else None,
        sealed=word in YES if word else None,
        reassayed=any(notes.get(key) for key in REASSAYED),
        expired=measured > expires if measured and expires else None,
    )


def _date(sample: str, notes: Mapping[str, str], key: str) -> date | None:
    text = notes.get(key, "").strip().replace("/", "-")
    if not text:
        return None
    try:
        return date.fromisoformat(text[:10])
    except ValueError:
        raise SampleMismatchError(
            f"Standard {sample}: {key} is {text!r}; expected a date such as 2026-12-31."
        ) from None


def _low_p(errors: FloatArray) -> float | None:
    """One-sided p of a mean below zero."""
    n = errors.size
    if n < FEWEST:
        return None
    error = float(errors.std(ddof=1) / np.sqrt(n))
    return float(special.stdtr(n - 1, errors.mean() / error)) if error > 0 else float(errors.mean() >= 0)


def _age_trend(pairs: FloatArray) -> tuple[float | None, float | None]:
    """Slope of errors over age, and the one-sided p of its being below zero; None where ages do not differ."""
    if len(pairs) < FEWEST or np.ptp(pairs[:, 0]) == 0:
        return None, None
    age = pairs[:, 0] - pairs[:, 0].mean()
    spread = float(age @ age)
    slope = float(age @ pairs[:, 1]) / spread
    rest = pairs[:, 1] - pairs[:, 1].mean() - slope * age
    error = float(np.sqrt(rest @ rest / (len(pairs) - 2) / spread))
    return slope, float(special.stdtr(len(pairs) - 2, slope / error)) if error > 0 else float(slope >= 0)


def _loss_words(
    states: Sequence[StandardState],
    errors: FloatArray,
    low_p: float | None,
    age_p: float | None,
    slope: float | None,
    model: Calibration,
    *,
    loss: bool,
) -> str:
    unit = model.analyte.printed_unit
    if low_p is None:
        return f"{errors.size} standard(s) with values: too few to look for losses"
    if loss:
        return (
            f"The standards are predicted low, {errors.mean():+.2g} {unit} on average, and the lower the older they "
            f"are ({slope or 0.0:+.2g} {unit} a day): the sign of evaporation or of leaking vials. Have them assayed "
            "again before the instrument is blamed"
        )
    if low_p <= SIGNIFICANCE and age_p is None:
        return (
            f"The standards are predicted low, {errors.mean():+.2g} {unit} on average; without ages that differ a loss "
            "of the standards cannot be told from a change of the instrument. Have some assayed again"
        )
    if low_p <= SIGNIFICANCE:
        return (
            f"The standards are predicted low, {errors.mean():+.2g} {unit} on average, but not more so with age: "
            "this speaks for the instrument rather than for losses"
        )
    return f"No sign of losses in {len(states)} standards"


def _label_words(states: Sequence[StandardState], expired: Sequence[str]) -> list[str]:
    words = []
    if expired:
        words.append(f"Measured after their use-by date: {name_some(expired)}. Have them assayed again")
    opened = [s.sample for s in states if s.sealed is False and not s.reassayed]
    if opened:
        words.append(f"Opened since their value was determined, and not assayed again: {name_some(opened)}")
    undated = [s.sample for s in states if s.age is None]
    if undated:
        words.append(
            f"No age known for {len(undated)} of {len(states)} standards ({name_some(undated)}): that takes a date of "
            f"the value ({PREPARED[0]} or {PREPARED[2]}) and one of the spectrum ({MEASURED[0]} or {MEASURED[1]})"
        )
    return words


def _or(value: object, unknown: str) -> object:
    return unknown if value is None else value
