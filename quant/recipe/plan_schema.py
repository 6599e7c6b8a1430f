"""What a plan of standards may say: strict tables, each key with its meaning, default and unit."""

from typing import Annotated, Literal

from pydantic import Field, FiniteFloat, PrivateAttr, model_validator

from quant.readers.options import ReadingOptions
from quant.recipe.schema import SpectraTable
from quant.recipe.table import Table, Text

Above0 = Annotated[FiniteFloat, Field(gt=0)]
NotBelow0 = Annotated[FiniteFloat, Field(ge=0)]


class ComponentTable(Table):
    """[[component]]: one quantity that the standards vary."""

    name: Text = Field(description="As printed, and the column of the design.")
    low: NotBelow0 = Field(description="Lowest value the standards should reach. [unit]")
    high: Above0 = Field(description="Highest value the standards should reach. [unit]")
    levels: int | None = Field(None, ge=2, description="Number of equally spaced values; none: any value.")
    laboratory_error: NotBelow0 | None = Field(
        None, description="Standard error of one reference value; none: the standards are as good as weighed. [unit]"
    )

    @model_validator(mode="after")
    def _rises(self) -> "ComponentTable":
        if not self.low < self.high:
            raise ValueError(f"low = {self.low:g} and high = {self.high:g} of {self.name!r}; expected low below high")
        return self


class MixtureTable(Table):
    """[mixture]: the total is fixed, and one component, the balance, fills it up."""

    total: Above0 = Field(description="What all components add up to. [unit]")
    balance: Text = Field(description="Name of the component that makes up the rest; it has no [[component]].")
    balance_low: NotBelow0 = Field(0.0, description="Least of it. [unit]")
    balance_high: Above0 | None = Field(None, description="Most of it; none: the total. [unit]")

    @model_validator(mode="after")
    def _rises(self) -> "MixtureTable":
        if not self.balance_low <= self.most <= self.total:
            raise ValueError(
                f"balance_low = {self.balance_low:g}, balance_high = {self.most:g}, total = {self.total:g}; expected "
                "them in rising order"
            )
        return self

    @property
    def most(self) -> float:
        """Most of the balance component. [unit]"""
        return self.total if self.balance_high is None else self.balance_high


class WeighingTable(Table):
    """[weighing]: how much of each standard is made, and how well the balance weighs."""

    batch: Above0 = Field(description="Mass of one standard [g]; with free totals the volume it is made up to. [mL]")
    mass_uncertainty: NotBelow0 = Field(description="Standard uncertainty of one net weighing. [g]")
    volume_uncertainty: NotBelow0 = Field(0.0, description="Free totals: standard uncertainty of the volume. [mL]")
    largest_relative: Above0 = Field(
        0.01, lt=1, description="Relative standard uncertainty of a concentration beyond which is warned."
    )


class PlanValidationTable(Table):
    """[validation]: samples that are prepared apart, to prove the calibration."""

    samples: int = Field(20, ge=0, le=500, description="How many; they lie between the standards.")
    rmsep_within: Annotated[FiniteFloat, Field(ge=1, le=100)] = Field(
        30.0, description="How well RMSEP should be known: 95 % limits within ± so much of it. [%]"
    )

    @model_validator(mode="after")
    def _is_a_set(self) -> "PlanValidationTable":
        if self.samples == 1:
            raise ValueError("samples = 1; expected 0 for none, or at least 2. One sample proves nothing")
        return self


class PureSpectraTable(SpectraTable):
    """[pure_spectra]: one spectrum of each component, and the noise, from which the prediction error is foreseen."""

    concentration: Above0 = Field(description="Concentration the pure spectra stand for. [unit]")
    noise: Above0 = Field(
        description="Standard deviation of the noise at one point of a sample's mean spectrum. [ordinate]"
    )
    ranges: list[Annotated[list[FiniteFloat], Field(min_length=2, max_length=2)]] | None = Field(
        None, description="Ranges that the calibration will use; none: all points. [axis unit]"
    )
    quantity: Literal["absorbance", "log_reflectance", "arbitrary"] | None = Field(
        None, description="What the ordinate is, where the file does not say; it has to be linear in concentration."
    )

    def options(self) -> ReadingOptions:
        """Return the options for the readers."""
        return ReadingOptions(**self.model_dump(exclude={"files", "concentration", "noise", "ranges"}))


class Plan(Table):
    """A whole plan of standards."""

    title: Text = Field(description="What the standards are for.")
    unit: Text = Field(description="Unit of every component: % m/m, g/kg, mg/kg; with free totals g/L, mg/mL, mg/L.")
    standards: int = Field(ge=3, le=500, description="How many standards.")
    seed: int = Field(1, ge=0, description="Seed of the search: the same seed gives the same design.")
    constraints: list[Text] = Field(
        default_factory=list, description='What mixtures have to obey, such as "water <= 0.5 * ethanol".'
    )
    component: list[ComponentTable] = Field(min_length=1)
    mixture: MixtureTable | None = Field(None, description="A fixed total; without it the totals are free.")
    validation: PlanValidationTable = Field(default_factory=lambda: PlanValidationTable.model_validate({}))
    weighing: WeighingTable | None = None
    pure_spectra: PureSpectraTable | None = None

    _folder: str = PrivateAttr(default=".")

    @model_validator(mode="after")
    def _belongs_together(self) -> "Plan":
        names = self.names
        if twice := sorted({name for name in names if names.count(name) > 1}):
            raise ValueError(f"more than one component is called {', '.join(twice)}; expected one each")
        if reserved := sorted({name for name in names if name.strip().lower() in ("sample", "origin")}):
            raise ValueError(f"a component is called {', '.join(reserved)}, as a column of the design is; rename it")
        if len(self.component) + 2 > self.standards:
            raise ValueError(
                f"standards = {self.standards} for {len(self.component)} components; expected at least "
                f"{len(self.component) + 2}, since fewer cannot vary apart. Raise standards"
            )
        for table in self.component:
            if table.levels is not None and table.levels > self.standards:
                raise ValueError(
                    f"levels = {table.levels} of {table.name!r} but standards = {self.standards}; expected no more "
                    "levels than standards. Lower levels, or leave the key out for any value"
                )
        return self

    @property
    def names(self) -> tuple[str, ...]:
        """All components: those varied in their order, then the balance."""
        varied = tuple(table.name for table in self.component)
        return varied if self.mixture is None else (*varied, self.mixture.balance)

    @property
    def folder(self) -> str:
        """Folder that the plan's paths count from."""
        return self._folder
