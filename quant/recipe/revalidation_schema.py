"""[revalidation]: what the calibration may lose before it has to be corrected."""

from typing import Annotated

from pydantic import BeforeValidator, Field

from quant.recipe.table import Table, Text, as_list


class RevalidationTable(Table):
    """[revalidation]; [[revalidation]] with analyte where there are several. Stored in the model."""

    analyte: Text | None = Field(None, description="Which [[analyte]]; not needed if there is one.")
    allowed_bias: float | None = Field(
        None, gt=0, description="Largest bias, its sign gone; default: one validated SEP. [unit of the analyte]"
    )
    allowed_sep: float | None = Field(
        None, gt=0, description="Largest SEP; default: twice the validated one. [unit of the analyte]"
    )


Revalidations = Annotated[
    list[RevalidationTable],
    BeforeValidator(as_list, json_schema_input_type=RevalidationTable | list[RevalidationTable]),
]
