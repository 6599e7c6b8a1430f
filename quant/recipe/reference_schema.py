"""What a recipe may say of reference values: the table, its columns, their units and basis."""

from typing import Literal

from pydantic import Field, model_validator

from quant.errors import ParameterError
from quant.readers.reference_column import MOISTURE_UNIT, ColumnOf
from quant.recipe.table import DEFAULTS, Table, Text
from quant.spectra.reference_table import Analyte


class ReferenceSection(Table):
    """[reference]: the table of laboratory values."""

    file: Text = Field(description="CSV file or workbook (.xlsx), counted from the recipe's own folder.")
    sample_column: Text | None = Field(None, description="Column of the sample ID; default: sample, sample_id or id.")
    sheet: Text | None = Field(None, description="Workbooks: the sheet; default: the first.")
    separator: Literal[",", ";", "tab", "space"] | None = Field(None, description="What parts the cells.")
    decimal: Literal[".", ","] = Field(
        DEFAULTS["reference"]["decimal"], description="Decimal sign; in workbooks, of texts such as <0,05."
    )
    unmatched: Literal["refuse", "drop"] = Field(
        DEFAULTS["reference"]["unmatched"], description="Spectra without a row: an error, or left out and named."
    )
    missing: Literal["refuse", "drop"] = Field(
        DEFAULTS["reference"]["missing"], description="Rows without a value: an error, or left out for that analyte."
    )
    replicates: Literal["refuse", "average"] = Field(
        DEFAULTS["reference"]["replicates"],
        description="Several rows of one sample: an error, or repeated determinations whose mean is taken.",
    )
    date_column: Text | None = Field(
        None, description="Column of dates, which becomes the note date in ISO form; default: the one called date."
    )
    date_order: Literal["dmy", "mdy", "ymd"] | None = Field(
        None, description="Order of day, month and year in dates such as 03/04/2026, where the column does not tell."
    )


class AnalyteTable(Table):
    """[[analyte]]: one quantity to predict; each gets a model of its own."""

    name: Text = Field(description="As printed and as the model's file is called.")
    column: Text | None = Field(None, description="Column of the reference table; default: the name.")
    unit: str = Field("", description="Unit of the results, as printed: % m/m, mg/kg ...")
    column_unit: Text | None = Field(
        None, description="Unit of the column, if another: its values are converted. ppm and ppb are by mass."
    )
    density: float | None = Field(
        None, gt=0, description="Density of the samples, to convert between % m/m or mg/kg and g/L or mol/L. [g/mL]"
    )
    molar_mass: float | None = Field(
        None, gt=0, description="Molar mass of the analyte, to convert from or to mol/L. [g/mol]"
    )
    basis: Literal["wet", "dry"] | None = Field(
        None, description="What a mass fraction is a fraction of: the sample as it is, or its dry matter."
    )
    column_basis: Literal["wet", "dry"] | None = Field(
        None, description="Basis of the column, if another: its values are converted by moisture_column."
    )
    moisture_column: Text | None = Field(
        None, description="Column of the moisture of each wet sample, to convert from one basis to the other."
    )
    moisture_unit: Text | None = Field(None, description="Unit of moisture_column; default: % m/m.")
    detection_limit: float | None = Field(
        None, gt=0, description='What "nd" in the column means: below this limit. [unit of the column]'
    )
    laboratory_error: float | None = Field(
        None,
        ge=0,
        description="Standard error of one reported reference value; default: from repeated determinations, if there "
        "are any. [unit of the analyte]",
    )

    @model_validator(mode="after")
    def _can_be_converted(self) -> "AnalyteTable":
        try:
            self.column_of()
        except ParameterError as problem:
            raise ValueError(str(problem).removesuffix(".")) from None
        if self.moisture_unit is not None and self.moisture_column is None:
            raise ValueError("moisture_unit goes with moisture_column")
        return self

    def column_of(self) -> ColumnOf:
        """Return where the analyte's values stand, and what they are converted from."""
        return ColumnOf(
            Analyte(self.name, self.unit, self.laboratory_error, self.basis or ""),
            self.column or "",
            unit=self.column_unit or "",
            basis=self.column_basis or "",
            density=self.density,
            molar_mass=self.molar_mass,
            moisture_column=self.moisture_column or "",
            moisture_unit=self.moisture_unit or MOISTURE_UNIT,
            detection_limit=self.detection_limit,
        )
