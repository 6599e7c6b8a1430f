"""The calibration: everything that a prediction needs, and nothing else."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from quant.arrays import FloatArray
from quant.errors import QuantityError
from quant.estimator.base import Step
from quant.model.decision_rule import DecisionRule
from quant.model.left_out_models import LeftOutModels
from quant.model.lineage import Lineage
from quant.model.revalidation_basis import RevalidationBasis
from quant.regression.method import Method
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source
from quant.spectra.reference_table import Analyte

STATES = ("draft", "approved", "provisional", "retired")


@dataclass(frozen=True, kw_only=True)
class ModelState:
    """Whether the model may be used: draft, approved, provisional or retired; who said so, when, and why."""

    name: str = "draft"
    by: str = ""
    on: str = ""
    why: str = ""

    def __str__(self) -> str:
        return f"{self.name} by {self.by} on {self.on}: {self.why}" if self.by else self.name


@dataclass(frozen=True, kw_only=True)
class Limits:
    """Beyond what a spectrum is unlike those of the calibration.

    All come from samples that were left out of the fit. "warn" is passed by 95 % of good new samples; all "stop"
    limits together by 99 %.
    """

    residual_warn: float  # sum of squares of the residual spectrum [(ordinate)²]
    residual_stop: float
    leverage_warn: float  # 1/n included
    leverage_stop: float
    lowest: float  # calibrated range [unit of the analyte]
    highest: float
    margin_t: float  # a value beyond the range by more than margin_t standard errors is outside it for certain


@dataclass(frozen=True, kw_only=True)
class Uncertainty:
    """What intervals are made of.

    s0² is the mean of e²/(1 + h) over left-out samples; the interval of a new reference result is
    ŷ ± t·s0·√(1 + h). Band-area models use the interval of the inverted line instead, with the same t.
    """

    s0: float  # [unit of the analyte]
    t: float  # Student's t(0.975, degrees of freedom)
    degrees_of_freedom: int
    laboratory_error: float | None  # standard error of one reference value [unit of the analyte]
    replicate_sd: float | None  # SD of predictions of replicate spectra about their mean [unit of the analyte]
    replicates: float  # spectra a sample in the calibration (harmonic mean)
    laboratory_error_source: str = ""  # where the laboratory error comes from, in words


@dataclass(frozen=True, kw_only=True, eq=False)
class Calibration:
    """One analyte's calibration, ready to predict.

    Attributes
    ----------
    analyte : Analyte
    axis : SpectralAxis
        Of the spectra as they are read, before the steps.
    quantity : str
        Of the spectra as they are read.
    reading : mapping
        How new files are read: the options the calibration's own files were read with.
    domain : mapping of str to tuple of str
        Acquisition notes (technique, resolution, accessory) and the values they had in the calibration.
    steps : tuple of Step
        Fitted preprocessing, in order.
    method : Method
        The fitted regression with the chosen number of factors.
    factors : int
        That number.
    n_samples : int
        Calibration samples.
    limits, uncertainty
        See there.
    figures : mapping
        Figures of merit to print with the model, by name. [unit of the analyte]
    state : ModelState
    test_spectra : array of shape (n_tests, n_points)
        Spectra as read, kept to prove at every load that the model still predicts what it did ...
    test_predictions : array of shape (n_tests,)
        ... namely this. [unit of the analyte]
    recipe : str
        The recipe as text; loading never parses it.
    training : tuple of Source
        Fingerprints of the files the calibration was made from.
    versions : mapping
        Versions of the programs that made it.
    decision : DecisionRule or None
        The limit that results are decided against.
    smallest_decidable : float or None
        The larger of limit of quantification and detection limit: a limit below it is never decided.
        [unit of the analyte]
    smallest_from : str
        Which of the two it is, in words.
    left_out : LeftOutModels or None
        What distribution-free intervals are made of ...
    left_out_note : str
        ... or why there are none.
    lineage : Lineage
        The model's number, and what it was made from.
    revalidation : RevalidationBasis or None
        What it is judged by after a service visit.
    """

    analyte: Analyte
    axis: SpectralAxis
    quantity: str
    reading: Mapping[str, Any]
    domain: Mapping[str, tuple[str, ...]]
    steps: tuple[Step, ...]
    method: Method
    factors: int
    n_samples: int
    limits: Limits
    uncertainty: Uncertainty
    test_spectra: FloatArray
    test_predictions: FloatArray
    figures: Mapping[str, float] = field(default_factory=dict)
    state: ModelState = field(default_factory=ModelState)
    recipe: str = ""
    training: tuple[Source, ...] = ()
    versions: Mapping[str, str] = field(default_factory=dict)
    decision: DecisionRule | None = None
    smallest_decidable: float | None = None
    smallest_from: str = ""
    left_out: LeftOutModels | None = None
    left_out_note: str = ""
    lineage: Lineage = field(default_factory=Lineage)
    revalidation: RevalidationBasis | None = None

    def __str__(self) -> str:
        """Analyte, method, size, calibrated range, state."""
        unit, limits = self.analyte.printed_unit, self.limits
        name = type(self.method).__name__
        kind = f"{name}, {self.factors} factors" if len(self.method.factor_counts_) > 2 else name
        numbered = f", model {self.lineage.number}" if self.lineage.number > 1 else ""
        return (
            f"{self.analyte.name}{numbered}: {kind}, {self.n_samples} samples, "
            f"{limits.lowest:g} to {limits.highest:g} {unit}, state: {self.state}"
        )

    def process(self, values: FloatArray) -> FloatArray:
        """Apply the preprocessing to spectra of shape (n, n_points) on the model's axis.

        Raises
        ------
        QuantityError
            A spectrum has missing points where the model needs them.
        """
        for step in self.steps:
            if not step.allow_nan:
                _refuse_missing(values)
            values = step.transform(values)
        _refuse_missing(values)
        return values

    def predict_values(self, values: FloatArray) -> FloatArray:
        """Predict spectra of shape (n, n_points) on the model's axis one by one, shape (n,). [unit of the analyte]"""
        return self.method.predict(self.process(values))


def _refuse_missing(values: FloatArray) -> None:
    lacking = int(np.isnan(values).any(axis=1).sum())
    if lacking:
        raise QuantityError(
            f"{lacking} of {len(values)} spectra have missing points; expected a number at every point that the "
            "model uses. Measure again."
        )
