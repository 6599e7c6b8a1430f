"""Plans from TOML files."""

import tomllib
from pathlib import Path

from pydantic import ValidationError

from quant.errors import RecipeError
from quant.recipe.load import recipe_text
from quant.recipe.messages import problems
from quant.recipe.plan_schema import Plan


def load_plan(path: str | Path) -> Plan:
    """Read a plan of standards.

    Parameters
    ----------
    path : str or Path
        TOML file; the paths inside it count from its folder.

    Raises
    ------
    RecipeError
        No text, no valid TOML, an unknown key (with a guess of what was meant), a missing key, or values that
        contradict each other.
    FileFormatError
        The file cannot be read.
    """
    file = Path(path)
    return plan_from_text(recipe_text(file), name=file.name, folder=file.parent)


def plan_from_text(text: str, *, name: str = "plan", folder: str | Path = ".") -> Plan:
    """Return the plan that TOML text describes; see `load_plan`.

    Raises
    ------
    RecipeError
        As in `load_plan`.
    """
    try:
        plan = Plan.model_validate(tomllib.loads(text))
    except tomllib.TOMLDecodeError as problem:
        raise RecipeError(f"{name} is no valid TOML: {problem}. Check quotes and brackets at that place.") from None
    except ValidationError as error:
        raise RecipeError(problems(error, name, Plan)) from None
    plan._folder = str(folder)
    return plan
