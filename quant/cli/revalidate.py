"""``quant revalidate``."""

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from quant.checks import one_of
from quant.errors import ExitCode, ParameterError
from quant.files import require_writable

if TYPE_CHECKING:
    from quant.model.calibration import Calibration
    from quant.spectra.reference_table import ReferenceTable
    from quant.spectra.spectra_set import SpectraSet

_FILES: dict[str, Any] = {"multiple": True, "metavar": "FILES"}


@click.command("revalidate")
@click.argument("model", type=click.Path(path_type=Path))
@click.option("--after", required=True, help="Check standards measured now: file, folder or pattern.", **_FILES)
@click.option("--before", help="The same standards from before the visit.", **_FILES)
@click.option("--reference", required=True, type=click.Path(path_type=Path), help="Table of their reference values.")
@click.option("--film", help="Polystyrene film in transmission, now.", **_FILES)
@click.option("--film-before", help="The film in the instrument's last record.", **_FILES)
@click.option(
    "--film-certificate",
    type=click.Path(path_type=Path),
    help="Table of the film's certified positions and tolerances, instead of the pharmacopoeia's.",
)
@click.option("--blank", help="100 % lines, now.", **_FILES)
@click.option("--blank-before", help="100 % lines in the last record.", **_FILES)
@click.option(
    "--recipe",
    type=click.Path(path_type=Path),
    help="The calibration's recipe: its spectra let remedies fit anew.",
)
@click.option("--allowed-bias", type=float, help="Largest bias, instead of the one in the model.")
@click.option("--allowed-sep", type=float, help="Largest SEP, instead of the one in the model.")
@click.option("--sample-pattern", help="The pattern of the file names, if not as in the calibration.")
@click.option("--apply", "remedy", help='Make a new model by this remedy; "proposed": by the one proposed.')
@click.option(
    "--out", "folder", type=click.Path(path_type=Path, file_okay=False), help="Folder for page, figures and new model."
)
@click.pass_context
def command(
    ctx: click.Context,
    /,
    model: Path,
    reference: Path,
    recipe: Path | None,
    film_certificate: Path | None,
    allowed_bias: float | None,
    allowed_sep: float | None,
    sample_pattern: str | None,
    remedy: str | None,
    folder: Path | None,
    **files: tuple[str, ...],
) -> None:
    """Judge a saved MODEL by check standards after a service visit, and say what restores it with the least work.

    With --apply a new, numbered model is written, provisional until other standards confirm it; when they do, another
    is written. MODEL itself is never changed. The exit code is 1 unless MODEL was shown to hold.
    """
    if remedy is not None and folder is None:
        raise click.UsageError("--apply needs --out, the folder for the new model.")
    for now, last in (("film", "film_before"), ("blank", "blank_before")):
        if files[last] and not files[now]:
            raise click.UsageError(f"--{last.replace('_', '-')} is compared with --{now}; expected that beside it.")
    if film_certificate is not None and not files["film"]:
        raise click.UsageError("--film-certificate says where the bands of --film should be; expected that beside it.")
    from quant.model.storage import load_model, save_model  # deferred, as those below: --help needs none of it
    from quant.readers.film_certificate import read_film_certificate
    from quant.recipe.load import load_recipe
    from quant.revalidation.confirm import confirm_model, correct_model
    from quant.revalidation.gathered import InstrumentRecord
    from quant.revalidation.remedies.apply import PROVISIONAL
    from quant.revalidation.remedies.table import REMEDIES
    from quant.revalidation.revalidate import revalidate

    if folder is not None:
        require_writable(folder)
    if remedy not in (None, "proposed"):
        one_of("--apply", remedy, ("proposed", *(known.name for known in REMEDIES)))
    calibration = load_model(model)
    after = _standards(calibration, files["after"], sample_pattern)
    record = {name: _plain(files[name]) for name in ("film", "film_before", "blank", "blank_before")}
    certificate = read_film_certificate(film_certificate) if film_certificate else None
    result = revalidate(
        calibration,
        after,
        _reference(calibration, reference),
        before=_standards(calibration, files["before"], sample_pattern) if files["before"] else None,
        instrument=InstrumentRecord(**record, film_table=certificate),
        training=load_recipe(recipe) if recipe else None,
        allowed_bias=allowed_bias,
        allowed_sep=allowed_sep,
    )
    click.echo(str(result))
    if folder is not None:
        from quant.reports.write import write_revalidation

        new = None
        if remedy or (result.accepted and calibration.state.name == PROVISIONAL):
            # Refused, if at all, before the page of an earlier run is replaced.
            path = _place(calibration, model, folder)
            new = correct_model(result, remedy) if remedy else confirm_model(result)
        report = write_revalidation(result, folder)
        click.echo(f"\npage    {report.html}\nfigures {report.json}")
        if new is not None:
            click.echo(f"model   {save_model(new, path)} (model {new.lineage.number}, {new.state})")
    ctx.exit(int(ExitCode.DONE if result.accepted else ExitCode.NOT_ACCEPTED))


def _standards(model: "Calibration", files: tuple[str, ...], pattern: str | None) -> "SpectraSet":
    from quant.readers.options import ReadingOptions  # deferred: --help needs none of it
    from quant.readers.read import read_spectra

    naming = {"sample_column": None, "sample_label": None, "sample_pattern": pattern} if pattern else {}
    return read_spectra(list(files), ReadingOptions.from_dict({**model.reading, **naming}))


def _plain(files: tuple[str, ...]) -> "SpectraSet | None":
    """Read spectra that are no samples: their names are no IDs of the calibration's."""
    from quant.readers.read import read_spectra  # deferred: --help needs none of it

    return read_spectra(list(files)) if files else None


def _reference(model: "Calibration", file: Path) -> "ReferenceTable":
    """Read the table in the way of the model's own recipe."""
    from quant.recipe.load import recipe_from_text, reference_read_as  # deferred: --help needs none of it

    own = recipe_from_text(model.recipe, name="the model's recipe")
    columns = [table.column_of() for table in own.analyte if table.name == model.analyte.name]
    return reference_read_as(own, file, columns)


def _place(parent: "Calibration", file: Path, folder: Path) -> Path:
    """Return where the next model goes, beside the page; a model that is there already is never replaced."""
    number = parent.lineage.number
    path = folder / f"{file.stem.removesuffix(f'-{number}')}-{number + 1}.model"
    if path.exists():
        raise ParameterError(f"{path} exists already, and models are never replaced; choose another folder.")
    return path
