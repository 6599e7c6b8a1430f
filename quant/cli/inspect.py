"""``quant inspect``."""

from pathlib import Path

import click

from quant.errors import ExitCode
from quant.files import require_writable


@click.command("inspect")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.option(
    "--out",
    "folder",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for inspection.html (with pictures) and inspection.json.",
)
@click.pass_context
def command(ctx: click.Context, recipe: Path, folder: Path | None) -> None:
    """Look over the spectra and reference values that RECIPE names, and say what is wrong with them.

    Findings are told by gravity: stop (a calibration from this would be wrong), doubt (look before you go on), note.
    The exit code is 1 if there is a stop.
    """
    from quant.inspection.inspect import inspect  # deferred, as those below: --help needs none of it
    from quant.recipe.load import load_recipe

    wanted = load_recipe(recipe)
    if folder is not None:
        require_writable(folder)
    result = inspect(wanted)
    click.echo(str(result))
    if folder is not None:
        from quant.reports.write import write_inspection

        report = write_inspection(result, folder)
        click.echo(f"\npage    {report.html}\nfigures {report.json}")
    ctx.exit(int(ExitCode.DONE if result.accepted else ExitCode.NOT_ACCEPTED))
