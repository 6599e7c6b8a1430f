"""``quant calibrate``."""

from pathlib import Path

import click

from quant.checks import name_some
from quant.errors import ExitCode, ModelFileError, RecipeError, UsageError
from quant.files import require_writable


@click.command("calibrate")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.option(
    "--out",
    "folder",
    required=True,
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for model and report.",
)
@click.pass_context
def command(ctx: click.Context, /, recipe: Path, folder: Path) -> None:
    """Make the calibrations of RECIPE; leave model, report.html and calibration.json in a folder.

    Looks at validation samples are counted in validation-looks.json there. The exit code is 1 if the recipe's criteria
    of acceptance are not met.
    """
    from quant.calibration.calibrate import calibrate  # deferred, as those below: --help needs none of it
    from quant.calibration.sealed import open_ledger
    from quant.model.storage import save_model
    from quant.recipe.load import load_recipe
    from quant.reports.write import write_report

    wanted = load_recipe(recipe)
    names = model_files([table.name for table in wanted.analyte])
    require_writable(folder)
    for name in names.values():
        _refuse_replacing(folder / name)
    ledger = open_ledger(folder)
    result = calibrate(wanted, ledger=ledger)
    report = write_report(result, folder)  # takes longest: an interruption leaves neither report nor model
    models = [save_model(entry.model, folder / names[entry.analyte]) for entry in result.analytes]
    click.echo(str(result))
    click.echo()
    for path in models:
        click.echo(f"model   {path}")
    click.echo(f"report  {report.html}")
    click.echo(f"figures {report.json}")
    if ledger.looks:
        click.echo(f"looks   {ledger.path}")
    ctx.exit(int(ExitCode.DONE if result.accepted else ExitCode.NOT_ACCEPTED))


def _refuse_replacing(path: Path) -> None:
    """Refuse to write over a model that is more than a draft; a damaged one is nothing to keep."""
    from quant.model.calibration import ModelState  # deferred, as the next: --help needs none of it
    from quant.model.storage import load_model

    if not path.exists():
        return
    try:
        state = load_model(path).state
    except ModelFileError:
        return
    if state.name != ModelState().name:
        raise UsageError(f"{path} holds a model that is {state}; it would be lost. Choose another folder.")


def model_files(analytes: list[str]) -> dict[str, str]:
    """Return the name of each analyte's model file.

    Raises
    ------
    RecipeError
        Two names that would give one file.
    """
    names = {analyte: f"{file_name(analyte)}.model" for analyte in analytes}
    folded = [name.casefold() for name in names.values()]  # some file systems know no capitals
    alike = [analyte for analyte, name in names.items() if folded.count(name.casefold()) > 1]
    if alike:
        raise RecipeError(
            f"The models of {name_some(map(repr, alike))} would have one file name ({names[alike[0]]}); expected names "
            "that differ in letters or digits. Rename one [[analyte]]."
        )
    return names


def file_name(analyte: str) -> str:
    """Return an analyte's name as a file name: letters, digits and dashes.

    >>> file_name("ethyl acetate")
    'ethyl-acetate'
    """
    words = "".join(c if c.isalnum() else " " for c in analyte).split()
    return "-".join(words) or "analyte"
