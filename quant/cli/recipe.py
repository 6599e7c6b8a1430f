"""``quant recipe``."""

import json
from importlib.resources import files

import click


@click.command("recipe")
@click.option(
    "--schema", "what", flag_value="schema", default=True, help="JSON schema, for editors that complete and check keys."
)
@click.option("--defaults", "what", flag_value="defaults", help="Every default, with comments.")
def command(what: str) -> None:
    """Print what a recipe may say."""
    if what == "defaults":
        click.echo(files("quant.recipe").joinpath("defaults.toml").read_text("utf-8").rstrip())
    else:
        from quant.recipe.schema import Recipe  # deferred: --help does not need pydantic
        from quant.recipe.steps import steps_schema

        schema = Recipe.model_json_schema()
        schema["properties"]["preprocessing"]["items"] = steps_schema()
        click.echo(json.dumps(schema, indent=2, ensure_ascii=False))
