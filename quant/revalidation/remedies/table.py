"""All remedies, the simplest first."""

from collections.abc import Callable
from dataclasses import dataclass

from quant.arrays import IntArray
from quant.model.calibration import Calibration
from quant.regression.band_area import BandArea
from quant.regression.factor_regression import FactorRegression
from quant.revalidation.remedies.axis_correction import correct_axis
from quant.revalidation.remedies.refit import recalibrate, remove_difference
from quant.revalidation.remedies.standardisation import (
    remove_mean_difference,
    standardise_directly,
    standardise_piecewise,
)
from quant.revalidation.remedies.values import correct_bias, correct_slope_and_bias
from quant.revalidation.standards import Standards

NOTHING, LIMITS = "none", "limits"
CORRECTION, TRANSFER, RECALIBRATION = "correction", "transfer", "recalibration"


@dataclass(frozen=True)
class Remedy:
    """One way to restore a calibration.

    Attributes
    ----------
    name, words : str
        As the command line takes it, and what it does.
    kind : str
    fit : callable
        (standards, rows it may see) -> corrected model.
    moves_values : bool
        It corrects predicted values, which only regressions on factors can carry.
    needs_before, needs_training : bool
        It needs spectra of the standards from before; the calibration's own spectra.
    """

    name: str
    words: str
    kind: str
    fit: Callable[[Standards, IntArray], Calibration]
    moves_values: bool = False
    needs_before: bool = False
    needs_training: bool = False

    def lacking(self, standards: Standards) -> str:
        """Say why the remedy cannot be fitted, or return an empty text."""
        method = standards.model.method
        if self.moves_values and not isinstance(method, FactorRegression):
            return f"{type(method).__name__} carries no correction of its values"
        if self.needs_before and not standards.paired:
            return "needs spectra of the standards from before the visit"
        if self.needs_training and standards.training is None:
            return "needs the calibration's own spectra: name its recipe"
        if self.needs_training and (isinstance(method, BandArea) or method.companions):
            return f"is not made for {type(method).__name__}; calibrate anew"
        return ""


REMEDIES = (
    Remedy(LIMITS, "keep the model, renew its limits of applicability", CORRECTION, lambda s, _: s.model),
    Remedy("bias", "take the mean difference off every result", CORRECTION, correct_bias, moves_values=True),
    Remedy("slope_bias", "put every result on a new line", CORRECTION, correct_slope_and_bias, moves_values=True),
    Remedy(
        "axis", "move the spectra back along the axis (shift and stretch)", CORRECTION, correct_axis, needs_before=True
    ),
    Remedy(
        "mean_spectrum",
        "take the mean difference off the spectra",
        CORRECTION,
        remove_mean_difference,
        needs_before=True,
    ),
    Remedy("direct", "map whole spectra onto those of before", TRANSFER, standardise_directly, needs_before=True),
    Remedy("piecewise", "map each point from its neighbours", TRANSFER, standardise_piecewise, needs_before=True),
    Remedy(
        "orthogonal",
        "fit anew at right angles to the difference",
        TRANSFER,
        remove_difference,
        needs_before=True,
        needs_training=True,
    ),
    Remedy(
        "recalibration",
        "fit anew with the new standards added",
        RECALIBRATION,
        recalibrate,
        needs_training=True,
    ),
)
