"""``quant predict``: the everyday command. Its path imports NumPy, click and the standard library only."""

from pathlib import Path

import click
from click.core import ParameterSource

from quant.errors import ExitCode
from quant.files import refuse_overwriting, write_text
from quant.model.storage import load_model
from quant.prediction.predict import predict
from quant.readers.options import ReadingOptions
from quant.readers.read import find_files, read_spectra
from quant.spectra.sample_ids import expand_ids


@click.command("predict")
@click.argument("model", type=click.Path(path_type=Path))
@click.argument("files", nargs=-1, required=True)
@click.option("--out", "table", type=click.Path(path_type=Path), help="Table to write: .csv, or .json.")
@click.option("--samples", help='Only these samples: IDs and ranges, such as "51..60" or "A3, A7".')
@click.option("--sample-column", help="Text tables: the column of the sample ID, if not as in the calibration.")
@click.option("--sample-label", help="JCAMP-DX: the label that holds the sample ID, if not as in the calibration.")
@click.option("--sample-pattern", help="The pattern of the file names, if not as in the calibration.")
@click.option(
    "--note",
    "notes",
    multiple=True,
    metavar="NAME=VALUE",
    help='How the spectra were recorded, where the files do not say: "technique=ATR". Compared with the calibration.',
)
@click.option("--limit", type=float, help="Decide against this upper limit, in place of the model's own.")
@click.option("--lower-limit", type=float, help="Decide against this lower limit, in place of the model's own.")
@click.option("--risk", type=float, default=0.05, show_default=True, help="Risk accepted, with one of these limits.")
@click.pass_context
def command(
    ctx: click.Context,
    /,
    model: Path,
    files: tuple[str, ...],
    table: Path | None,
    samples: str | None,
    notes: tuple[str, ...],
    limit: float | None,
    lower_limit: float | None,
    risk: float,
    **naming: str | None,
) -> None:
    """Predict the spectra in FILES with a saved MODEL.

    FILES are read as the calibration's own files were. The exit code is 1 if the model does not apply to a sample, or
    if a sample is not accepted where there is a limit.
    """
    if table is not None and table.suffix.lower() not in (".csv", ".json"):
        raise click.UsageError(f"--out {table}: expected a name that ends in .csv or .json.")
    if limit is not None and lower_limit is not None:
        raise click.UsageError("--limit and --lower-limit were both given; expected one of them.")
    if limit is lower_limit is None and ctx.get_parameter_source("risk") is ParameterSource.COMMANDLINE:
        raise click.UsageError("--risk belongs to --limit or --lower-limit; expected one of them beside it.")
    calibration = load_model(model)
    rule, own = None, lower_limit if limit is None else limit
    if own is not None:
        from quant.prediction.decisions import decision_rule  # deferred: start-up

        rule = decision_rule(calibration, own, kind="lower" if limit is None else "upper", risk=risk)
    reading = dict(calibration.reading)
    if any(naming.values()):
        reading |= naming
    reading["notes"] = _notes(notes)
    options = ReadingOptions.from_dict(reading)
    if table is not None:
        refuse_overwriting("--out", table, find_files(files, options.format))
    spectra = read_spectra(list(files), options)
    if samples is not None:
        if not samples.strip():
            raise click.UsageError('--samples is empty; expected IDs or ranges, such as "51..60" or "A3, A7".')
        spectra = spectra.select(expand_ids(samples.split(",")))
    result = predict(calibration, spectra, rule=rule)
    click.echo(str(result))
    if table is not None:
        write_text(table, result.to_json() + "\n" if table.suffix.lower() == ".json" else result.to_csv())
        click.echo(f"\ntable   {table}")
    ctx.exit(int(ExitCode.DONE if result.accepted else ExitCode.NOT_ACCEPTED))


def _notes(texts: tuple[str, ...]) -> dict[str, str]:
    parts = [text.partition("=") for text in texts]
    wrong = [text for text, (name, _, value) in zip(texts, parts, strict=True) if not name.strip() or not value.strip()]
    if wrong:
        raise click.UsageError(f"--note {wrong[0]}: expected a name, =, and a value, such as technique=ATR.")
    return {name.strip(): value.strip() for name, _, value in parts}
