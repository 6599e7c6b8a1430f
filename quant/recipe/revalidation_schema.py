"""[revalidation]: what the calibration may lose before it has to be corrected."""

from collections.abc import Sequence
from typing import Annotated, Any

from pydantic import BeforeValidator, Field

from quant.recipe.table import Table, Text


class RevalidationTable(Table):
    """[revalidation]; [[revalidation]] with analyte where there are several. Stored in the model."""

    analyte: Text | None = Field(None, description="Which [[analyte]]; not needed if there is one.")
    allowed_bias: float | None = Field(
        None, gt=0, description="Largest bias, its sign gone; default: one validated SEP. [unit of the analyte]"
    )
    allowed_sep: float | None = Field(
        None, gt=0, description="Largest SEP; default: twice the validated one. [unit of the analyte]"
    )


def _as_list(value: Any) -> Any:
    return [value] if isinstance(value, dict) else value


Revalidations = Annotated[
    list[RevalidationTable],
    BeforeValidator(_as_list, json_schema_input_type=RevalidationTable | list[RevalidationTable]),
]


def check_revalidation(tables: Sequence[RevalidationTable], analytes: Sequence[str]) -> None:
    """Refuse tables whose analyte is not there, is not told, or is told twice.

    Raises
    ------
    ValueError
        As pydantic expects it.
    """
    for table in tables:
        if table.analyte is None and len(analytes) > 1:
            raise ValueError(f"[[revalidation]] without analyte; expected one of {', '.join(analytes)}")
        if table.analyte is not None and table.analyte not in analytes:
            raise ValueError(
                f"[[revalidation]] names the analyte {table.analyte!r}; expected one of {', '.join(analytes)}"
            )
    named = [table.analyte or analytes[0] for table in tables]
    if len(set(named)) < len(named):
        raise ValueError("more than one [[revalidation]] of one analyte; expected one each")
