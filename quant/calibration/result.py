"""What calibrating leaves: everything that the report shows."""

from dataclasses import dataclass, field

from quant.arrays import FloatArray
from quant.calibration.audit import AuditResult
from quant.calibration.below_limit import BelowLimitResult
from quant.calibration.chemistry import ChemistryResult
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.calibration.laboratory import LaboratoryResult
from quant.calibration.picture import Picture
from quant.calibration.split import LeftOut
from quant.calibration.validate import ValidationResult
from quant.model.calibration import Calibration, Limits, Uncertainty
from quant.result import Result, documented
from quant.statistics.figures import Figures
from quant.text_table import Row, format_rows

NOT_PROVEN = "no validation samples: how it does on new material is not proven"


@dataclass(frozen=True, kw_only=True, eq=False)
class AnalyteResult(Result):
    """One analyte's calibration with all that was found on the way."""

    analyte: str = documented("Name of the analyte")
    unit: str = documented("Unit of the analyte")
    model: Calibration = field(metadata={"json": False})
    factors: int = documented("Number of factors of the model")
    rule: str = documented("The rule that chose it")
    n_samples: int = documented("Calibration samples")
    n_spectra: int = documented("Calibration spectra")
    limits: Limits = documented("Limits of applicability")
    uncertainty: Uncertainty = documented("What the intervals are made of")
    sample_ids: tuple[str, ...] = documented("Calibration samples")
    origins: tuple[str, ...] = documented("Their origins: process, spiked, blended, or not stated")
    reference: FloatArray = documented("Their reference values", "unit of the analyte")
    fitted: FloatArray = documented("Their fitted values", "unit of the analyte")
    calibration: Figures = documented("Figures of merit of the fit")
    cross_validation: CrossValidationResult = documented("Left-out predictions with every number of factors")
    rmsecv_by_origin: dict[str, float] = documented(
        "RMSECV of the samples of each origin, where more than one is stated", "unit of the analyte"
    )
    validation: ValidationResult | None = documented("Predictions of samples that took no part, or none")
    criteria: bool = documented("Whether the recipe has criteria of acceptance")
    left_out: tuple[LeftOut, ...] = documented("Samples left out, and why")
    laboratory: LaboratoryResult | None = documented("What repeated determinations say, or none")
    below_limit: BelowLimitResult | None = documented("Check of samples below a detection limit, or none")
    remarks: tuple[str, ...] = documented("What else should be known of the samples")
    audit: AuditResult = documented("Diagnostics, uncertainty, detection, standards, seal and decision limit")
    chemistry: ChemistryResult | None = documented("Where the predictions come from; none for a band area without it")
    picture: Picture = documented("The numbers behind the pictures")

    @property
    def accepted(self) -> bool:
        """False where the recipe has criteria of acceptance and independent validation does not meet them all."""
        if not self.criteria:
            return True
        return self.validation is not None and self.validation.accepted

    def rows(self) -> list[Row]:
        """The few figures that matter first."""
        crossed, position = self.cross_validation, self.cross_validation.factor_counts.index(self.factors)
        rows: list[Row] = [
            ("calibration samples", self.n_samples, f"({self.n_spectra} spectra)"),
            ("range", f"{self.limits.lowest:g} to {self.limits.highest:g}", self.unit),
            ("factors", self.factors, f"({self.rule})"),
            ("RMSEC", self.calibration.rmse, self.unit),
            ("SEC", self.calibration.sec, self.unit),
            ("RMSECV", float(crossed.rmsecv[position]), self.unit),
            ("Q²", float(crossed.q2[position]), ""),
        ]
        if self.validation is None:
            return [*rows, ("validation", NOT_PROVEN, "")]
        found = self.validation.figures
        return [
            *rows,
            (self.validation.kind, found.n_samples, "samples"),
            ("RMSEP", found.rmse, f"{self.unit} (95 %: {found.rmse_low:.3g} to {found.rmse_high:.3g})"),
            ("bias", found.bias, f"{self.unit} {_significance(found)}"),
            ("SEP", found.sep, self.unit),
            ("R²", found.r2_determination, ""),
            ("RPD", found.rpd, ""),
        ]

    def __str__(self) -> str:
        """Heading, the main figures, what was left out."""
        left_out = [f"left out: {item.sample} ({item.reason})" for item in self.left_out]
        return "\n".join(
            [
                f"Calibration of {self.analyte}",
                format_rows(self.rows()),
                *self.cross_validation.guard_notes,
                *left_out,
                *self.remarks,
                *self._chemistry_told(),
            ]
        )

    def _chemistry_told(self) -> list[str]:
        """The verdict where the recipe says something of chemistry."""
        found = self.chemistry
        return [str(found)] if found is not None and (found.declared or found.test is not None) else []


@dataclass(frozen=True, kw_only=True, eq=False)
class CalibrationResult(Result):
    """All calibrations of one recipe."""

    title: str = documented("Title of the recipe")
    recipe: str = documented("The recipe as text")
    analytes: tuple[AnalyteResult, ...] = documented("One entry an analyte")
    spectra_without_values: tuple[str, ...] = documented("Samples with spectra but no row in the reference table")
    values_without_spectra: tuple[str, ...] = documented("Samples in the reference table that have no spectrum")

    def __getitem__(self, analyte: str) -> AnalyteResult:
        """Return the result of an analyte by its name."""
        for result in self.analytes:
            if result.analyte == analyte:
                return result
        raise KeyError(f"No analyte {analyte!r}; there are {', '.join(r.analyte for r in self.analytes)}.")

    @property
    def model(self) -> Calibration:
        """The model of the first analyte: of the only one, mostly."""
        return self.analytes[0].model

    def __str__(self) -> str:
        """Title, then one block an analyte."""
        return "\n\n".join([self.title, *map(str, self.analytes)])

    @property
    def accepted(self) -> bool:
        """False where criteria of acceptance were not met, or nothing was there to hold against them."""
        return all(result.accepted for result in self.analytes)


def _significance(figures: Figures) -> str:
    test = figures.bias_test
    if test is None:
        return "(not tested)"
    return f"({'significant' if test.significant else 'not significant'}, p = {test.p:.2g})"
