"""``quant screen``."""

from pathlib import Path

import click

from quant.errors import ExitCode
from quant.files import refuse_overwriting, require_writable, write_text


@click.command("screen")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.option(
    "--out",
    "folder",
    required=True,
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for winner, table, picture.",
)
@click.option("--analyte", help="The analyte to search for; default: the recipe's first.")
@click.option("--workers", "n_workers", type=int, default=1, show_default=True, help="Processes; -1: one a core.")
@click.option("--cluster", metavar="ADDRESS", help="Let a running Dask cluster do the work (extra: quant[cluster]).")
@click.pass_context
def command(
    ctx: click.Context, /, recipe: Path, folder: Path, analyte: str | None, n_workers: int, cluster: str | None
) -> None:
    """Compare the alternatives that RECIPE names under [screen]; leave the winner as a recipe for calibrate.

    Also left: candidates.csv (the whole table), screen.json, and windows.svg where windows were searched. Ctrl-C keeps
    what was found. The exit code is 1 if the search does not do better than chance.
    """
    from quant.recipe.load import load_recipe  # deferred, as those below: --help needs none of it
    from quant.screening.screen import screen

    wanted = load_recipe(recipe)
    refuse_overwriting("--out: the winner would become", folder / "winner.toml", [recipe])
    require_writable(folder)
    result = screen(wanted, analyte=analyte, n_workers=n_workers, cluster=cluster)
    written = [
        ("winner", "winner.toml", result.recipe_text(folder)),
        ("table", "candidates.csv", result.to_csv()),
        ("figures", "screen.json", result.to_json() + "\n"),
    ]
    if result.windows is not None:
        from quant.plots.screening import plot_windows
        from quant.plots.svg import to_svg

        text = "RMSECV over the middle and the width of windows."
        written.append(("picture", "windows.svg", to_svg(plot_windows(result), "windows", text) + "\n"))
    click.echo(str(result))
    click.echo()
    for what, file, text in written:
        write_text(folder / file, text)
        click.echo(f"{what:7} {folder / file}")
    ctx.exit(int(ExitCode.DONE if result.better_than_chance else ExitCode.NOT_ACCEPTED))
