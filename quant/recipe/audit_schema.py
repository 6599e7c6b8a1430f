"""[decision], [acceptance] and [uncertainty]: what a recipe demands of a calibration and decides with it."""

from collections.abc import Sequence
from typing import Annotated, Any, Literal, Protocol

from pydantic import BeforeValidator, Field, model_validator

from quant.recipe.table import DEFAULTS, Table, Text, as_list


class DecisionTable(Table):
    """[decision]: the limit that results are decided against; [[decision]] with analyte where there are several."""

    analyte: Text | None = Field(None, description="Which [[analyte]]; not needed if there is one.")
    limit: float | None = Field(None, allow_inf_nan=False, description="The limit. [unit of the analyte]")
    solvent: Text | None = Field(
        None, description="Instead of limit: a residual solvent of the built-in table of ICH Q3C, in % m/m or mg/kg."
    )
    dose: float | None = Field(None, gt=0, description="solvent: daily dose that the limit is for; default 10. [g]")
    kind: Literal["upper", "lower"] = Field(
        DEFAULTS["decision"]["kind"], description="upper: not to be exceeded; lower: not to be fallen below."
    )
    risk: float = Field(
        DEFAULTS["decision"]["risk"],
        gt=0,
        le=0.5,
        description="Accepted probability that a result just accepted does not conform.",
    )
    name: Text | None = Field(None, description="What the limit is called.")
    source: Text | None = Field(None, description="Where it comes from: specification, in-process control ...")

    @model_validator(mode="after")
    def _one_limit(self) -> "DecisionTable":
        given = [key for key in ("limit", "solvent") if getattr(self, key) is not None]
        if len(given) != 1:
            raise ValueError(f"{' and '.join(given) or 'nothing'} given; expected exactly one of limit, solvent")
        if self.dose is not None and self.solvent is None:
            raise ValueError("dose goes with solvent")
        if self.solvent is not None and self.kind != "upper":
            raise ValueError('the limit of a solvent is an upper one; remove kind = "lower"')
        return self


class AcceptanceTable(Table):
    """[acceptance]: what validation has to show, fixed before its values are read; a list for several analytes."""

    analyte: Text | None = Field(None, description="Which [[analyte]]; not needed if there is one.")
    max_rmsep: float | None = Field(None, gt=0, description="Largest RMSEP. [unit of the analyte]")
    max_bias: float | None = Field(None, gt=0, description="Largest bias, its sign gone. [unit of the analyte]")
    max_sep: float | None = Field(None, gt=0, description="Largest SEP. [unit of the analyte]")
    min_r2: float | None = Field(None, le=1, description="Smallest R² of determination.")
    min_rpd: float | None = Field(None, gt=0, description="Smallest RPD.")
    slope_within: float | None = Field(None, gt=0, description="Largest distance of the slope from 1.")
    min_samples: int | None = Field(None, ge=1, description="Fewest validation samples.")
    min_inside: float | None = Field(
        None, gt=0, le=1, description="Smallest share of reference values inside their 95 % interval."
    )
    bias_not_significant: bool = Field(
        DEFAULTS["acceptance"]["bias_not_significant"], description="Whether the t test may not find a bias."
    )

    @model_validator(mode="after")
    def _something(self) -> "AcceptanceTable":
        if not self.model_fields_set - {"analyte"}:
            raise ValueError("no criterion given; expected one at least, such as max_rmsep = 0.1")
        return self


class UncertaintyTable(Table):
    """[uncertainty]: which intervals the model carries, and which notes tell replicates and conditions apart."""

    distribution_free: bool = Field(
        DEFAULTS["uncertainty"]["distribution_free"],
        description="Whether the model carries what jackknife+ or CV+ intervals are made of.",
    )
    probability: float = Field(
        DEFAULTS["uncertainty"]["probability"],
        ge=0.5,
        lt=1,
        description="Marginal coverage that those intervals are made for.",
    )
    packing: Text | None = Field(
        None, description="Note of the spectra that tells re-packed samples from re-scanned ones."
    )
    condition: Text | None = Field(
        None, description="Note whose values are the conditions of intermediate precision: day, operator, instrument."
    )


Decisions = Annotated[
    list[DecisionTable], BeforeValidator(as_list, json_schema_input_type=DecisionTable | list[DecisionTable])
]
Acceptances = Annotated[
    list[AcceptanceTable], BeforeValidator(as_list, json_schema_input_type=AcceptanceTable | list[AcceptanceTable])
]


class OfAnalyte(Protocol):
    """A table that may name its analyte."""

    @property
    def analyte(self) -> str | None:
        """Which analyte; not needed if there is one."""


def check_analytes(name: str, tables: Sequence[OfAnalyte], analytes: Sequence[str]) -> None:
    """Refuse tables whose analyte is not there, is not told, or is told twice.

    Raises
    ------
    ValueError
        As pydantic expects it.
    """
    for table in tables:
        if table.analyte is None and len(analytes) > 1:
            raise ValueError(f"[[{name}]] without analyte; expected one of {', '.join(analytes)}")
        if table.analyte is not None and table.analyte not in analytes:
            raise ValueError(f"[[{name}]] names the analyte {table.analyte!r}; expected one of {', '.join(analytes)}")
    named = [table.analyte or analytes[0] for table in tables]
    twice = sorted({each for each in named if named.count(each) > 1})
    if twice:
        raise ValueError(f"more than one [[{name}]] of {', '.join(twice)}; expected one each")


def table_of(tables: Sequence[Any], analyte: str) -> Any:
    """Return the table of an analyte, or None."""
    return next((table for table in tables if table.analyte in (None, analyte)), None)
