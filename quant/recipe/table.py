"""What all tables of recipes and plans share."""

import tomllib
from importlib.resources import files
from typing import Annotated, Any

from pydantic import BaseModel, ConfigDict, Field

DEFAULTS: dict[str, dict[str, Any]] = tomllib.loads(files("quant.recipe").joinpath("defaults.toml").read_text("utf-8"))

Positive = Annotated[int, Field(ge=1)]
Text = Annotated[str, Field(min_length=1)]


def as_list(value: Any) -> Any:
    """Return one table as a list of one; for keys that take [table] and [[table]]."""
    return [value] if isinstance(value, dict) else value


class Table(BaseModel):
    """A table of a recipe: unknown keys and wrong types are errors."""

    model_config = ConfigDict(extra="forbid", strict=True, frozen=True, allow_inf_nan=False)
