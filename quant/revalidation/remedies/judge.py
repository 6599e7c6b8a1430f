"""Remedies side by side, each judged on standards that its fit had not seen."""

from dataclasses import dataclass, replace

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.errors import QuantError
from quant.model.calibration import Calibration
from quant.revalidation.judgements import RemedyRow
from quant.revalidation.noise_cost import added_by_noise
from quant.revalidation.remedies.table import LIMITS, NOTHING, REMEDIES, Remedy
from quant.revalidation.standards import Standards, not_applicable

SHARE_OUTSIDE = 0.25  # of the standards to which a corrected model may fail to apply (one at least)

OF_NO_ACCOUNT = 1e-6  # of the SEP: a bias that only rounding makes


@dataclass(frozen=True, eq=False)
class Judged:
    """A remedy with its left-out values."""

    row: RemedyRow
    predicted: FloatArray  # left-out predictions, shape (n,); empty where it is not available
    residual: FloatArray
    leverage: FloatArray


def judge_remedies(standards: Standards) -> tuple[Judged, ...]:
    """Fit every remedy with each standard left out in turn; propose the simplest within one standard error of the best.

    The first row is "none": the model as it is. Proposed is one whose model applies to the standards again; only where
    no remedy does that, one whose limits of applicability have to be renewed as well.

    Parameters
    ----------
    standards : Standards

    References
    ----------
    .. [1] The one-standard-error rule: L. Breiman et al., Classification and Regression Trees (1984); from memory.
    """
    unchanged = Remedy(NOTHING, "leave the model as it is", NOTHING, lambda s, _: s.model)
    judged = [_judge(standards, remedy) for remedy in (unchanged, *REMEDIES)]
    rows = [entry.row for entry in judged[1:] if entry.row.available]
    candidates = [row for row in rows if row.qualifies] or rows
    if not candidates:
        return tuple(judged)
    best = min(candidates, key=lambda row: row.rmse or 0.0)
    bound = (best.rmse or 0.0) ** 2 + (best.standard_error or 0.0)
    near = [row.name for row in candidates if (row.rmse or 0.0) ** 2 <= bound]
    return tuple(
        replace(
            entry,
            row=replace(entry.row, within_one_se=entry.row.name in near, proposed=entry.row.name == near[0]),
        )
        for entry in judged
    )


def _judge(standards: Standards, remedy: Remedy) -> Judged:
    note = remedy.lacking(standards)
    if not note:
        try:
            return _judged(standards, remedy, *_left_out(standards, remedy))
        except QuantError as problem:
            note = str(problem)
    row = RemedyRow(
        name=remedy.name,
        words=remedy.words,
        kind=remedy.kind,
        available=False,
        note=note,
        rmse=None,
        rmse_reference=None,
        expected_sep=None,
        bias=None,
        standard_error=None,
        not_applicable=None,
        qualifies=False,
        within_one_se=False,
        proposed=False,
    )
    return Judged(row, np.empty(0), np.empty(0), np.empty(0))


def _judged(
    standards: Standards, remedy: Remedy, values: FloatArray, residual: FloatArray, leverage: FloatArray, outside: int
) -> Judged:
    n = len(standards)
    squared, bias = (values - standards.target) ** 2, float(np.mean(values - standards.target))
    row = RemedyRow(
        name=remedy.name,
        words=remedy.words,
        kind=remedy.kind,
        available=True,
        note="",
        rmse=float(np.sqrt(squared.mean())),
        rmse_reference=float(np.sqrt(np.mean((values - standards.reference) ** 2))),
        expected_sep=expected_sep(standards, remedy.fit(standards, np.arange(n)), values),
        bias=bias if abs(bias) > OF_NO_ACCOUNT * standards.validated_sep else 0.0,
        standard_error=float(squared.std(ddof=1) / np.sqrt(n)),
        not_applicable=outside,
        qualifies=remedy.name not in (NOTHING, LIMITS) and outside <= max(1, int(SHARE_OUTSIDE * n)),
        within_one_se=False,
        proposed=False,
    )
    return Judged(row, values, residual, leverage)


def expected_sep(standards: Standards, model: Calibration, values: FloatArray) -> float:
    """Return the SEP to expect of other samples: the validated one, and what the visit added.

    That is what differences from before scatter beyond the presentation of samples, or what noise adds, whichever is
    more. Unlike errors against a dozen of reference values, which laboratory and model dominate, these show what the
    visit did. Without them, or without the scatter of presenting samples, the left-out error against the references, if
    it is the larger.

    Parameters
    ----------
    standards : Standards
    model : Calibration
        With the remedy fitted to all standards.
    values : array of shape (n,)
        Left-out predictions after. [unit of the analyte]
    """
    if not standards.paired or standards.model.uncertainty.replicate_sd is None:
        return max(standards.validated_sep, float(np.sqrt(np.mean((values - standards.reference) ** 2))))
    left = float(np.mean((values - standards.before) ** 2)) - standards.difference_sd[0] ** 2
    return float(np.sqrt(standards.validated_sep**2 + max(left, added_by_noise(standards, model), 0.0)))


def _left_out(standards: Standards, remedy: Remedy) -> tuple[FloatArray, FloatArray, FloatArray, int]:
    """Predictions, residuals and leverages of left-out standards, and how many the model does not apply to."""
    n, outside = len(standards), 0
    found = np.empty((3, n))
    for i in range(n):
        kept: IntArray = np.delete(np.arange(n), i)
        model: Calibration = remedy.fit(standards, kept)
        one = standards.evaluated(model, np.array([i]))
        found[:, i] = one.value[0], one.residual[0], one.leverage[0]
        outside += not_applicable(model, one)
    return found[0], found[1], found[2], outside
