"""``quant inspect``."""

from pathlib import Path

import click

from quant.files import write_text


@click.command("inspect")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.option("--json", "json_file", type=click.Path(path_type=Path), help="Write what was found as JSON, too.")
def command(recipe: Path, json_file: Path | None) -> None:
    """Look over the spectra and reference values that RECIPE names: what was read, paired, left unpaired."""
    from quant.inspection.inspect import inspect  # deferred, as the next: --help needs none of it
    from quant.recipe.load import load_recipe

    result = inspect(load_recipe(recipe))
    click.echo(str(result))
    if json_file is not None:
        write_text(json_file, result.to_json() + "\n")
