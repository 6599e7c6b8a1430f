"""``quant recipe``: the schema and the defaults, as they stand."""

import json
import tomllib
from importlib.resources import files

from quant.recipe.schema import Recipe
from quant.recipe.steps import steps_schema


def test_the_schema_is_printed(project) -> None:
    result = project.run("recipe")
    assert result.exit_code == 0
    expected = Recipe.model_json_schema()
    expected["properties"]["preprocessing"]["items"] = steps_schema()
    assert json.loads(result.stdout) == expected
    assert project.run("recipe", "--schema").stdout == result.stdout


def test_the_defaults_are_printed_with_their_comments(project) -> None:
    result = project.run("recipe", "--defaults")
    text = files("quant.recipe").joinpath("defaults.toml").read_text("utf-8")
    assert result.exit_code == 0
    assert result.stdout.rstrip() == text.rstrip()
    assert tomllib.loads(result.stdout)["regression"]["factors"] == "one_standard_error"
    assert "# auto: leave one batch out" in result.stdout
