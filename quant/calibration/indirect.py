"""Whether a calibration predicts its analyte, or something else that went along with it in the standards.

Left-out predictions are regressed on the reference values of the analyte and of what might be predicted in its place.
If the model sees the analyte, its predictions follow the analyte where the others stand still; if it does not, they
follow the others.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.evidence import Evidence
from quant.checks import name_some
from quant.errors import RecipeError
from quant.readers.reference_column import MISSING
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet
from quant.statistics.quantiles import t_quantile
from quant.text_table import format_number

DIRECT, INDIRECT, UNKNOWN = "predicts the analyte", "predicts indirectly", "cannot be told"
HALF = 0.5  # of the slope: a model that owes more than this to the interferents predicts them
MOST_LOST = 1 / 3  # of the variance with the others held: above, taking the laboratory's error out amplifies chance
FEWEST_FREEDOM = 5  # degrees of freedom, below which intervals say nothing
CONFIDENCE = 0.95
FIXED = 1e-6  # smallest singular value of the quantities, each of length 1: below, they go along exactly


@dataclass(frozen=True, kw_only=True)
class PartialEffect(Result):
    """How left-out predictions follow one quantity while the others are held."""

    name: str = documented("Analyte or interferent")
    coefficient: float = documented("Partial regression coefficient", "unit of the analyte per unit of the quantity")
    low: float = documented("Lower end of its 95 % interval")
    high: float = documented("Upper end of it")
    share: float = documented("Part of the slope of predictions on the analyte that goes this way; parts sum to 1")
    correlation: float = documented("Correlation of the quantity with the analyte over the samples")

    @property
    def significant(self) -> bool:
        """Whether the interval leaves out zero."""
        return self.low > 0 or self.high < 0


@dataclass(frozen=True, kw_only=True)
class IndirectTest(Result):
    """The test whether predictions are indirect."""

    verdict: str = documented("predicts the analyte; predicts indirectly; cannot be told")
    through: str = documented("Interferent that the predictions follow, or empty")
    reason: str = documented("What the verdict rests on")
    n_samples: int = documented("Samples with a value of every quantity")
    slope: float | None = documented("Slope of left-out predictions on the analyte alone, or none")
    effects: tuple[PartialEffect, ...] = documented("The analyte first, then the interferents; empty where not tested")
    laboratory_error: float | None = documented(
        "Standard error of a reference value that was taken out of the coefficients, or none", "unit of the analyte"
    )


def indirect_test(evidence: Evidence, interferents: Sequence[str]) -> IndirectTest | None:
    """Test left-out predictions of a calibration against its analyte and the interferents that the recipe names.

    Parameters
    ----------
    evidence : Evidence
    interferents : sequence of str
        Other analytes, or columns of the reference table. Samples without a value of one take no part.

    Returns
    -------
    IndirectTest or None
        None where no interferent is named.

    Raises
    ------
    RecipeError
        A column that is not there, or that holds no numbers.
    """
    if not interferents:
        return None
    training, decimal = evidence.training, evidence.recipe.reference.decimal
    others = np.column_stack([_values_of(training, name, decimal) for name in interferents])
    with_all = np.isfinite(others).all(axis=1)
    return partial_test(
        evidence.left_out[with_all],
        evidence.values[with_all],
        others[with_all],
        names=(evidence.model.analyte.name, *interferents),
        laboratory_errors=[
            evidence.model.analyte.laboratory_error,
            *(_error_of(training, each) for each in interferents),
        ],
    )


def partial_test(
    predicted: FloatArray,
    reference: FloatArray,
    others: FloatArray,
    *,
    names: Sequence[str],
    laboratory_errors: Sequence[float | None] | None = None,
) -> IndirectTest:
    """Regress predictions on the analyte's and the interferents' values, and judge.

    "Predicts indirectly" if the analyte's partial coefficient, with its 95 % interval, lies below half the slope that
    predictions have on the analyte alone; "predicts the analyte" if it lies above; else it cannot be told.

    Errors of the laboratory make the partial coefficient of a quantity too small and give to the others what it lacks,
    the more so the closer they go along with each other. Where their size is known, they are taken out by the method
    of moments; the errors of an interferent are known if it is an [[analyte]] itself.

    Parameters
    ----------
    predicted, reference : arrays of shape (n,)
        Left-out predictions and reference values of the analyte. [unit of the analyte]
    others : array of shape (n, k)
        Values of the interferents. [any units]
    names : sequence of str
        Of the analyte, then of the interferents.
    laboratory_errors : sequence of float or None, optional
        Standard error of one value of each quantity, as in `names`; None where not known. [unit of each]

    References
    ----------
    W. A. Fuller, Measurement Error Models, 1987, section 2.2 (method of moments), from memory.
    """
    design, p = np.column_stack([reference, others]), predicted
    n, errors = len(design), np.array([each or 0.0 for each in laboratory_errors or [None] * len(names)])
    if reason := _why_not(design, names, errors):
        return IndirectTest(
            verdict=UNKNOWN, through="", reason=reason, n_samples=n, slope=None, effects=(), laboratory_error=None
        )
    design, p = design - design.mean(axis=0), p - p.mean()
    moments = design.T @ design
    variance = moments[0, 0] - (n - 1) * errors[0] ** 2
    slope = float(design[:, 0] @ p) / variance  # of the predictions on the analyte alone
    rest = p - slope * design[:, 0]
    slope_error = t_quantile((1 + CONFIDENCE) / 2, n - 2) * float(np.sqrt(rest @ rest / ((n - 2) * variance)))
    towards = np.array([1.0, *(moments[0, 1:] / variance)])  # change of each quantity with the analyte
    coefficients, half = _coefficients(design, p, errors)
    correlations = moments[0] / np.sqrt(moments[0, 0] * np.diag(moments))
    effects = tuple(
        PartialEffect(
            name=name,
            coefficient=float(coefficients[j]),
            low=float(coefficients[j] - half[j]),
            high=float(coefficients[j] + half[j]),
            share=float(coefficients[j] * towards[j] / slope) if slope else 0.0,
            correlation=float(correlations[j]),
        )
        for j, name in enumerate(names)
    )
    verdict, through, reason = _judged(effects, slope, slope_error)
    if verdict == INDIRECT and not errors[0]:
        reason += _unless(float(1 / np.linalg.inv(moments)[0, 0]) / (n - 1), effects[0], slope)
    return IndirectTest(
        verdict=verdict,
        through=through,
        reason=reason,
        n_samples=n,
        slope=slope,
        effects=effects,
        laboratory_error=float(errors[0]) or None,
    )


def _why_not(quantities: FloatArray, names: Sequence[str], errors: FloatArray) -> str:
    """Say why the values cannot tell, or return an empty text."""
    n, k = quantities.shape
    if n - k - 1 < FEWEST_FREEDOM:
        return f"{n} samples have all the values; at least {FEWEST_FREEDOM + k + 1} are needed"
    if same := [name for name, spread in zip(names, np.ptp(quantities, axis=0), strict=True) if spread == 0]:
        return f"{name_some(same)} has the same value in all samples"
    centred = quantities - quantities.mean(axis=0)
    length = np.linalg.norm(centred, axis=0)
    if np.linalg.matrix_rank(centred / length, tol=FIXED) < k:
        return "the standards vary these quantities in one fixed proportion"
    # Share of the variance, in the direction where it is largest, that is the laboratory's error.
    lost = np.linalg.inv(centred.T @ centred) * np.outer(errors, errors) * (n - 1)
    if np.linalg.eigvalsh(lost)[-1] > MOST_LOST:
        worst = names[int(np.argmax(np.diag(lost)))]
        return f"with the others held, {worst} varies little more than the error of the laboratory"
    return ""


def _coefficients(design: FloatArray, p: FloatArray, errors: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return partial coefficients, the laboratory's errors taken out of the moments, and half their 95 % intervals."""
    n, k = design.shape
    moments = design.T @ design
    inverse = np.linalg.inv(moments - (n - 1) * np.diag(errors**2))
    coefficients = inverse @ (design.T @ p)
    freedom = n - k - 1
    variance = np.sum((p - design @ coefficients) ** 2) / freedom
    spread = np.sqrt(variance * np.diag(inverse @ moments @ inverse))
    return coefficients, t_quantile((1 + CONFIDENCE) / 2, freedom) * spread


def _judged(effects: Sequence[PartialEffect], slope: float, slope_error: float) -> tuple[str, str, str]:
    own, others = effects[0], effects[1:]
    names = name_some(effect.name for effect in others)
    coefficient, low, high = (format_number(value, 3) for value in (own.coefficient, own.low, own.high))
    between = (
        f"with {names} held, predictions follow {own.name} with a slope of {coefficient} (95 %: {low} to {high}; "
        f"{format_number(slope, 3)} without holding)"
    )
    if slope - slope_error <= 0:
        return UNKNOWN, "", f"left-out predictions do not follow {own.name} at all (slope {format_number(slope, 3)})"
    if own.high < HALF * slope:
        followed = [effect for effect in others if effect.significant and effect.share > 0]
        if followed:
            strongest = max(followed, key=lambda effect: effect.share).name
            return INDIRECT, strongest, f"{between}; they follow {strongest} instead"
    if own.low > HALF * slope:
        also = name_some(effect.name for effect in others if effect.significant)
        return DIRECT, "", between + (f"; {also} moves them, too" if also else "")
    return UNKNOWN, "", f"{between}: the standards do not vary {own.name} and {names} independently enough"


def _unless(apart: float, own: PartialEffect, slope: float) -> str:
    """Name the laboratory error from which the verdict would fall: λ at which the interval reaches half the slope."""
    reliable = max(own.high, 0.0) / (HALF * slope)
    error = float(np.sqrt(apart * (1 - reliable)))
    return (
        f". That holds unless the standard error of one laboratory value is above {error:.2g}; state it as "
        "laboratory_error"
    )


def _error_of(training: SampleSet, name: str) -> float | None:
    return training.analyte(name)[0].laboratory_error if name in _analytes(training) else None


def _analytes(training: SampleSet) -> list[str]:
    return [analyte.name for analyte in training.analytes]


def _values_of(training: SampleSet, name: str, decimal: str) -> FloatArray:
    """Return the values of an interferent, one a sample, NaN where there is none."""
    if name in _analytes(training):
        return training.analyte(name)[1]
    known = sorted({key for row in training.notes for key in row})
    if name not in known:
        there = [*_analytes(training), *known]
        raise RecipeError(
            f"[chemistry]: the interferent {name!r} is no [[analyte]] and no column of the reference table; there are "
            f"{name_some(map(repr, there), 10)}. Name one of these, or add the column."
        )
    return np.array([_number(name, row.get(name, ""), decimal) for row in training.notes])


def _number(name: str, cell: str, decimal: str) -> float:
    text = cell.strip()
    if text.lower() in MISSING or text.startswith(("<", "≤")):
        return float("nan")
    try:
        return float(text if decimal == "." else text.replace(decimal, "."))
    except ValueError:
        raise RecipeError(
            f"[chemistry]: found {text!r} in column {name!r} of the interferent; expected a number. Name a column of "
            "values."
        ) from None
