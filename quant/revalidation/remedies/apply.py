"""Applying a remedy: a new, numbered model in the state provisional. The old one is never touched."""

from dataclasses import replace

import numpy as np

from quant.errors import ParameterError
from quant.model.calibration import Calibration, Limits, ModelState
from quant.model.identity import as_ancestor
from quant.model.lineage import Lineage
from quant.revalidation.remedies.judge import Judged
from quant.revalidation.remedies.table import REMEDIES
from quant.revalidation.standards import Standards
from quant.spectra.provenance import Source

PROVISIONAL = "provisional"
NOT_CONFIRMED = "; not yet confirmed by independent standards"
NO_LEFT_OUT = "the model was corrected after a service visit; the left-out models are those of its parent"
WARN = 0.95  # share of good samples inside a warning limit, as in a calibration


def apply_remedy(
    standards: Standards, judged: tuple[Judged, ...], name: str, *, verdict: str, sources: tuple[Source, ...]
) -> Calibration:
    """Fit a remedy to all standards and return the new model.

    Intervals widen where left-out standards scattered more than the parent's samples did, and limits of applicability
    grow to hold the left-out standards. Distribution-free intervals are the parent's and are left away.

    Parameters
    ----------
    standards : Standards
    judged : tuple of Judged
        As `judge_remedies` returned them.
    name : str
        Which remedy.
    verdict : str
        What the lineage says of the reason.
    sources : tuple of Source
        Files of the spectra and values.

    Raises
    ------
    ParameterError
        An unknown remedy, or one that could not be fitted.
    """
    entry = next((entry for entry in judged if entry.row.name == name), None)
    remedy = next((remedy for remedy in REMEDIES if remedy.name == name), None)
    if entry is None or remedy is None:
        raise ParameterError(f"remedy {name!r}; expected one of {', '.join(r.name for r in REMEDIES)}.")
    if not entry.row.available:
        raise ParameterError(f"remedy {name!r} cannot be applied: {entry.row.note}.")
    parent = standards.model
    fitted = remedy.fit(standards, np.arange(len(standards)))
    errors = entry.predicted - standards.reference
    s0 = float(np.sqrt(np.mean(errors**2 / (1 + entry.leverage))))
    limits = _widened(parent.limits, entry)
    wider = limits.residual_stop / parent.limits.residual_stop
    caution = f"; residual spectra up to {wider:.3g} times the former limit now pass" if wider > 1 else ""
    return replace(
        fitted,
        limits=limits,
        uncertainty=replace(parent.uncertainty, s0=max(parent.uncertainty.s0, s0)),
        test_predictions=fitted.predict_values(fitted.test_spectra),
        figures={**parent.figures, "left-out RMSE of check standards": entry.row.rmse_reference or 0.0},
        state=ModelState(name=PROVISIONAL, why=f"{remedy.words}{caution}{NOT_CONFIRMED}"),
        left_out=None,
        left_out_note=NO_LEFT_OUT,
        lineage=Lineage(
            number=parent.lineage.number + 1,
            made_by=remedy.words,
            verdict=verdict,
            made_from=sources,
            samples=standards.sample_ids,
            ancestors=(*parent.lineage.ancestors, as_ancestor(parent)),
        ),
    )


def _widened(limits: Limits, entry: Judged) -> Limits:
    residual, leverage = entry.residual, entry.leverage
    return replace(
        limits,
        residual_warn=max(limits.residual_warn, float(np.quantile(residual, WARN))),
        residual_stop=max(limits.residual_stop, float(residual.max())),
        leverage_warn=max(limits.leverage_warn, float(np.quantile(leverage, WARN))),
        leverage_stop=max(limits.leverage_stop, float(leverage.max())),
    )
