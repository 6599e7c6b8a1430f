"""What a recipe may say: strict tables, each key with its meaning, default and unit."""

from typing import Any, Literal

from pydantic import Field, PrivateAttr, model_validator

from quant.preprocessing.registry import STEPS
from quant.readers.options import ReadingOptions
from quant.recipe.audit_schema import Acceptances, Decisions, UncertaintyTable, check_analytes
from quant.recipe.chemistry_schema import Chemistries, check_chemistry
from quant.recipe.reference_schema import AnalyteTable, ReferenceSection
from quant.recipe.regression_schema import RegressionTable, check_regression
from quant.recipe.revalidation_schema import Revalidations
from quant.recipe.screen_schema import ScreenTable
from quant.recipe.table import DEFAULTS, Positive, Table, Text


class SpectraTable(Table):
    """[spectra]: which files, and how to read them."""

    files: list[Text] = Field(
        min_length=1, description="Files, globs or folders, counted from the recipe's own folder."
    )
    format: Literal["auto", "jcamp_dx", "matrix", "two_columns", "spreadsheet"] = Field(
        DEFAULTS["spectra"]["format"], description="File format; auto judges by content."
    )
    sample_column: Text | None = Field(None, description="matrix: the column that holds the sample ID.")
    sample_label: Text | None = Field(None, description="JCAMP-DX: the label that holds the sample ID. Default TITLE.")
    sample_pattern: Text | None = Field(
        None,
        description="Regular expression on the file name; its group (?P<sample>...) is the sample ID, others notes.",
    )
    block: Text | Positive | None = Field(
        None, description="JCAMP-DX: title or number of the block to read where a file holds several. Default: all."
    )
    separator: Literal[",", ";", "tab", "space"] | None = Field(
        None, description="Delimited text: what parts the cells; found out when not given."
    )
    decimal: Literal[".", ","] | None = Field(
        None, description="Delimited text: decimal sign; found out when not given."
    )
    thousands: Literal[",", ".", "'", "space"] | None = Field(
        None, description="Delimited text: sign between groups of three digits; found out when not given."
    )
    orientation: Literal["spectra_in_rows", "spectra_in_columns"] | None = Field(
        None, description="Tables: axis in the header, or in the first column; found out when not given."
    )
    sheet: Text | None = Field(None, description="Workbooks: the sheet; default: the first.")
    axis_unit: Literal["cm-1", "nm", "um", "point"] | None = Field(
        None, description="Unit of the axis where the file has none."
    )
    quantity: (
        Literal[
            "absorbance",
            "transmittance",
            "percent_transmittance",
            "reflectance",
            "percent_reflectance",
            "log_reflectance",
            "arbitrary",
        ]
        | None
    ) = Field(None, description="What the ordinate is, where the file does not say.")
    notes: dict[str, str] = Field(
        default_factory=dict, description="Notes that all spectra share: technique, resolution [cm⁻¹], accessory ..."
    )
    resample: bool = Field(
        DEFAULTS["spectra"]["resample"], description="Interpolate differing axes onto the first one."
    )

    def options(self) -> ReadingOptions:
        """Return the options for the readers."""
        return ReadingOptions(**self.model_dump(exclude={"files"}))


class ExcludeTable(Table):
    """[[exclude]]: samples left out by name, with the reason that the report repeats."""

    samples: list[Text] = Field(min_length=1, description='Sample IDs; ranges such as "S08..S11" are written out.')
    reason: Text = Field(description="Why.")


class CrossValidationTable(Table):
    """[cross_validation]: how samples are left out in turn."""

    scheme: Literal[
        "auto", "leave_one_out", "random_folds", "contiguous_blocks", "interleaved", "leave_one_group_out"
    ] = Field(DEFAULTS["cross_validation"]["scheme"], description="How the folds are made.")
    folds: int = Field(DEFAULTS["cross_validation"]["folds"], ge=2, description="Number of folds.")
    repeats: Positive = Field(
        DEFAULTS["cross_validation"]["repeats"], description="random_folds: how often, drawn anew."
    )
    group: Text | None = Field(
        None, description="Note whose equal values are never split between folds (batch, duplicate)."
    )
    duplicates_together: bool = Field(
        DEFAULTS["cross_validation"]["duplicates_together"],
        description="Samples with exactly equal spectra are never split between folds, nor by a split.",
    )
    seed: int = Field(DEFAULTS["cross_validation"]["seed"], ge=0, description="Seed of random folds and random splits.")


class ValidationTable(Table):
    """[validation]: samples that take no part in the calibration. One of: samples; note and values; files; split."""

    samples: list[Text] | None = Field(None, description="Sample IDs of separately prepared or sampled material.")
    note: Text | None = Field(None, description="Note column that marks them ...")
    values: list[Text] | None = Field(None, description="... and the values that do.")
    files: list[Text] | None = Field(None, description="A separate folder: files, globs or folders.")
    reference_file: Text | None = Field(None, description="Their reference table; default: the one under [reference].")
    split: Literal["kennard_stone", "random"] | None = Field(
        None, description="Set aside a share of one set (an internal test, not an independent validation)."
    )
    fraction: float = Field(
        DEFAULTS["validation"]["fraction"], gt=0, lt=1, description="Share that a split sets aside."
    )

    @model_validator(mode="after")
    def _one_way(self) -> "ValidationTable":
        ways = [key for key in ("samples", "note", "files", "split") if getattr(self, key) is not None]
        if len(ways) != 1:
            raise ValueError(
                f"{' and '.join(ways) or 'nothing'} given; expected exactly one of samples, note, files, split"
            )
        if (self.note is None) != (self.values is None):
            raise ValueError('note and values go together: note = "subset", values = ["T"]')
        if self.reference_file is not None and self.files is None:
            raise ValueError("reference_file goes with files")
        if "fraction" in self.model_fields_set and self.split is None:
            raise ValueError("fraction goes with split")
        return self


class Recipe(Table):
    """A whole recipe."""

    title: Text = Field(description="What the calibration is for.")
    spectra: SpectraTable = Field(description="Which files, and how to read them.")
    reference: ReferenceSection = Field(description="The table of laboratory values.")
    analyte: list[AnalyteTable] = Field(min_length=1, description="What to predict; each gets a model of its own.")
    exclude: list[ExcludeTable] = Field(default_factory=list, description="Samples left out by name, and why.")
    preprocessing: list[dict[str, Any]] = Field(
        default_factory=list,
        description=f"Steps in order, each with step = one of {', '.join(STEPS)}, and its options.",
    )
    regression: RegressionTable = Field(
        default_factory=lambda: RegressionTable.model_validate({}), description="The method and its size."
    )
    cross_validation: CrossValidationTable = Field(
        default_factory=lambda: CrossValidationTable.model_validate({}), description="How samples are left out in turn."
    )
    validation: ValidationTable | None = Field(None, description="Samples that take no part in the calibration.")
    uncertainty: UncertaintyTable = Field(
        default_factory=lambda: UncertaintyTable.model_validate({}), description="Which intervals the model carries."
    )
    acceptance: Acceptances = Field(default_factory=list, description="What validation has to show.")
    decision: Decisions = Field(default_factory=list, description="The limit that results are decided against.")
    revalidation: Revalidations = Field(
        default_factory=list, description="What the calibration may lose before it has to be corrected."
    )
    chemistry: Chemistries = Field(default_factory=list, description="What is known of bands and interferents.")
    screen: ScreenTable | None = Field(None, description="Alternatives that `quant screen` compares.")

    @model_validator(mode="after")
    def _names_differ(self) -> "Recipe":
        names = [table.name for table in self.analyte]
        twice = sorted({name for name in names if names.count(name) > 1})
        if twice:
            raise ValueError(f"more than one [[analyte]] is called {', '.join(twice)}; expected one each")
        check_analytes("acceptance", self.acceptance, names)
        check_analytes("decision", self.decision, names)
        check_regression(self.regression, names, [str(table.get("step")) for table in self.preprocessing])
        check_chemistry(self.chemistry, names)
        check_analytes("revalidation", self.revalidation, names)
        return self

    _folder: str = PrivateAttr(default=".")
    _text: str = PrivateAttr(default="")
    _name: str = PrivateAttr(default="recipe")

    @property
    def folder(self) -> str:
        """Folder that the recipe's paths count from."""
        return self._folder

    @property
    def text(self) -> str:
        """The recipe as it was written."""
        return self._text

    @property
    def name(self) -> str:
        """File name of the recipe."""
        return self._name
