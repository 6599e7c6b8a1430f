"""Recipe options of a preprocessing step, derived from the signature of its class.

A parameter that takes spectra, such as `interferents`, becomes an option that names a file: `interferent_file`.
"""

import inspect
import json
import re
from collections.abc import Callable
from functools import cache
from typing import Any

from numpy.typing import ArrayLike
from pydantic import ConfigDict, Field, ValidationError, create_model

from quant.arrays import FloatArray
from quant.errors import RecipeError
from quant.estimator.base import Step
from quant.preprocessing.registry import STEPS
from quant.recipe.messages import did_you_mean, problems
from quant.recipe.table import Text

IN_A_FILE = (
    "A file, counted from the recipe's folder and read as those of [spectra]; its spectra go through the steps before "
    "this one, which have to be linear."
)


def parameter_docs(cls: type) -> dict[str, str]:
    """Return what a class's docstring says of each parameter, on one line."""
    text = inspect.getdoc(cls) or ""
    section = text.partition("Parameters\n----------\n")[2].partition("\n\n")[0]
    found: dict[str, str] = {}
    for entry in re.split(r"\n(?=\S)", section):
        head, _, body = entry.partition("\n")
        for key in head.partition(":")[0].split(","):
            found[key.strip()] = " ".join(body.split())
    return found


def steps_schema() -> dict[str, Any]:
    """Return the JSON schema of one ``[[preprocessing]]`` table: one of the steps, with its options."""
    schemas = []
    for name, cls in STEPS.items():
        schema = options_model(name).model_json_schema()
        summary = (inspect.getdoc(cls) or "").partition("\n")[0]
        schema["properties"] = {"step": {"const": name, "description": summary}, **schema.get("properties", {})}
        schemas.append({**schema, "title": name, "required": ["step"]})
    return {"oneOf": schemas}


@cache
def options_model(name: str) -> Any:
    """Return the pydantic model of a step's options: its constructor's parameters but the axis, files for spectra."""
    fields: dict[str, Any] = {}
    explained, files = parameter_docs(STEPS[name]), file_options(name)
    for key, parameter in inspect.signature(STEPS[name]).parameters.items():
        if key in files:
            fields[files[key]] = (Text | None, Field(None, description=f"{explained.get(key)} {IN_A_FILE}"))
        elif key != "axis":
            fields[key] = (parameter.annotation, Field(parameter.default, description=explained.get(key)))
    return create_model(f"{name}_options", __config__=ConfigDict(extra="forbid"), **fields)


def file_options(name: str) -> dict[str, str]:
    """Return the parameters of a step that take spectra, with the options that name their files."""
    parameters = inspect.signature(STEPS[name]).parameters.items()
    return {
        key: f"{key.removesuffix('s')}_file"
        for key, parameter in parameters
        if key != "axis" and parameter.annotation == (ArrayLike | None)
    }


def make_step(table: dict[str, Any], place: str, read: Callable[[str], FloatArray]) -> Step:
    """Return the step that a ``[[preprocessing]]`` table describes, not yet knowing its axis.

    Parameters
    ----------
    table : dict
        ``step`` and its options.
    place : str
        Where the table stands, for messages.
    read : callable
        Returns the spectra of a file that the step names, in the form in which spectra arrive at it.

    Raises
    ------
    RecipeError
        No such step, an unknown option, one of the wrong type, or one lacking that the step needs.
    """
    options = dict(table)
    name = options.pop("step", None)
    if not isinstance(name, str) or name not in STEPS:
        found = "no key 'step'" if name is None else f"unknown step {name!r}"
        raise RecipeError(f"{place}: {found}.{did_you_mean(str(name), STEPS)} Steps there are: {', '.join(STEPS)}.")
    model = options_model(name)
    try:
        # By way of JSON: strict there lets a list be a tuple, as TOML has no other, but no text or truth be a number.
        given = dict(model.model_validate_json(json.dumps(options, default=str), strict=True))
    except ValidationError as error:
        raise RecipeError(problems(error, f"{place}, step {name!r}", model)) from None
    options_of = file_options(name)
    lacking = [key for key in (options_of.get(each, each) for each in STEPS[name].required) if given[key] is None]
    if lacking:
        raise RecipeError(
            f"{place}, step {name!r}: the key {lacking[0]!r} is missing; expected it, since the step does nothing "
            "without. Add it, or remove the step."
        )
    for key, option in options_of.items():
        file = given.pop(option)
        given[key] = None if file is None else read(file)
    return STEPS[name](**given)
