"""Remedies side by side, each judged on standards that its fit had not seen."""

from dataclasses import dataclass, replace

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.errors import QuantError
from quant.model.calibration import Calibration
from quant.revalidation.judgements import RemedyRow
from quant.revalidation.remedies.table import NOTHING, REMEDIES, Remedy
from quant.revalidation.standards import Standards, not_applicable

SHARE_OUTSIDE = 0.25  # of the standards to which a corrected model may fail to apply (one at least)


@dataclass(frozen=True, eq=False)
class Judged:
    """A remedy with its left-out values."""

    row: RemedyRow
    predicted: FloatArray  # left-out predictions, shape (n,); empty where it is not available
    residual: FloatArray
    leverage: FloatArray


def judge_remedies(standards: Standards) -> tuple[Judged, ...]:
    """Fit every remedy with each standard left out in turn; propose the simplest within one standard error of the best.

    The first row is "none": the model as it is. Differences are counted from the predictions from before the
    visit, in which errors of laboratory and samples cancel, or else from the reference values.

    Parameters
    ----------
    standards : Standards

    References
    ----------
    .. [1] The one-standard-error rule: L. Breiman et al., Classification and Regression Trees (1984); from memory.
    """
    unchanged = Remedy(NOTHING, "leave the model as it is", NOTHING, lambda s, _: s.model)
    judged = [_judge(standards, remedy) for remedy in (unchanged, *REMEDIES)]
    qualified = [entry.row for entry in judged[1:] if entry.row.qualifies]
    if not qualified:
        return tuple(judged)
    best = min(qualified, key=lambda row: row.rmse or 0.0)
    bound = (best.rmse or 0.0) ** 2 + (best.standard_error or 0.0)
    near = [row.name for row in qualified if (row.rmse or 0.0) ** 2 <= bound]
    return tuple(
        replace(
            entry,
            row=replace(entry.row, within_one_se=entry.row.name in near, proposed=entry.row.name == near[0]),
        )
        for entry in judged
    )


def _judge(standards: Standards, remedy: Remedy) -> Judged:
    n = len(standards)
    note = remedy.lacking(standards)
    values, residual, leverage, outside = np.empty(0), np.empty(0), np.empty(0), 0
    if not note:
        try:
            values, residual, leverage, outside = _left_out(standards, remedy)
        except QuantError as problem:
            note = str(problem)
    available = not note
    squared = (values - standards.yardstick) ** 2 if available else np.empty(0)
    error = values - standards.reference if available else np.empty(0)
    row = RemedyRow(
        name=remedy.name,
        words=remedy.words,
        kind=remedy.kind,
        available=available,
        note=note,
        rmse=float(np.sqrt(squared.mean())) if available else None,
        rmse_reference=float(np.sqrt(np.mean(error**2))) if available else None,
        bias=float(np.mean(values - standards.yardstick)) if available else None,
        standard_error=float(squared.std(ddof=1) / np.sqrt(n)) if available else None,
        not_applicable=outside if available else None,
        qualifies=available and remedy.name != NOTHING and outside <= max(1, int(SHARE_OUTSIDE * n)),
        within_one_se=False,
        proposed=False,
    )
    return Judged(row, values, residual, leverage)


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
