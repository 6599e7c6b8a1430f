"""``quant calibrate``."""

from pathlib import Path

import click

from quant.calibration.calibrate import calibrate
from quant.model.storage import save_model
from quant.recipe.load import load_recipe
from quant.reports.report import write_report


@click.command("calibrate")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.option(
    "--out",
    "folder",
    required=True,
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for model and report.",
)
def command(recipe: Path, folder: Path) -> None:
    """Make the calibrations of RECIPE; leave model, report.html and calibration.json in a folder."""
    result = calibrate(load_recipe(recipe))
    models = [save_model(entry.model, folder / f"{file_name(entry.analyte)}.model") for entry in result.analytes]
    report = write_report(result, folder)
    click.echo(str(result))
    click.echo()
    for path in models:
        click.echo(f"model   {path}")
    click.echo(f"report  {report.html}")
    click.echo(f"figures {report.json}")


def file_name(analyte: str) -> str:
    """Return an analyte's name as a file name: letters, digits and dashes.

    >>> file_name("ethyl acetate")
    'ethyl-acetate'
    """
    words = "".join(c if c.isalnum() else " " for c in analyte).split()
    return "-".join(words) or "analyte"
