"""``quant plan``."""

from pathlib import Path

import click

from quant.files import refuse_overwriting, write_text


@click.command("plan")
@click.argument("plan_file", metavar="[PLAN]", required=False, type=click.Path(path_type=Path))
@click.option("--out", "design", type=click.Path(path_type=Path), help="CSV table of the standards to write.")
@click.option("--validation", type=click.Path(path_type=Path), help="CSV table of the validation samples to write.")
@click.option("--json", "json_file", type=click.Path(path_type=Path), help="Write everything as JSON, too.")
@click.option(
    "--judge", "existing", type=click.Path(path_type=Path), help="Judge the standards of this CSV table instead."
)
@click.option("--decimal", type=click.Choice([".", ","]), default=".", help="Decimal sign of the table to judge.")
def command(
    plan_file: Path | None,
    design: Path | None,
    validation: Path | None,
    json_file: Path | None,
    existing: Path | None,
    decimal: str,
) -> None:
    """Design the standards that PLAN describes: composition, weighings, validation samples, expected error.

    With --judge, say what standards that exist already are worth: against PLAN, or by themselves if no PLAN is given.
    """
    if existing is not None:
        if design is not None or validation is not None:
            raise click.UsageError("--judge makes no design: leave --out and --validation out.")
        if json_file is not None:
            refuse_overwriting("--json", json_file, [existing, *([plan_file] if plan_file else [])])
        _judge(existing, plan_file, decimal, json_file)
        return
    if plan_file is None:
        raise click.UsageError("Missing PLAN; expected a TOML file that describes the standards, or --judge TABLE.csv.")
    from quant.planning.load import load_plan  # deferred, as the next: --help needs none of it
    from quant.planning.plan import plan
    from quant.planning.pure_spectra import pure_files
    from quant.readers.read import find_files

    wanted = load_plan(plan_file)
    read = [plan_file, *(find_files(pure_files(wanted)) if wanted.pure_spectra else [])]
    targets = [("--out", design), ("--validation", validation), ("--json", json_file)]
    for option, path in targets:
        if path is not None:
            refuse_overwriting(option, path, read)
    named = [path.resolve() for _, path in targets if path is not None]
    if len(set(named)) < len(named):
        raise click.UsageError("--out, --validation and --json name one file twice; expected a file each.")
    if validation is not None and wanted.validation.samples == 0:
        raise click.UsageError("--validation: the plan has [validation] samples = 0; leave the option out.")
    result = plan(wanted)
    click.echo(str(result))
    written = [("standards", design, result.to_csv()), ("validation", validation, result.to_csv("validation"))]
    written.append(("figures", json_file, result.to_json() + "\n"))
    for what, path, text in written:
        if path is not None:
            write_text(path, text)
            click.echo(f"{what:10}  {path}")


def _judge(existing: Path, plan_file: Path | None, decimal: str, json_file: Path | None) -> None:
    from quant.planning.existing import judge_file  # deferred, as the next: --help needs none of it
    from quant.planning.load import load_plan

    result = judge_file(existing, None if plan_file is None else load_plan(plan_file), decimal=decimal)
    click.echo(f"Judgement of {existing.name}\n{result}")
    if json_file is not None:
        write_text(json_file, result.to_json() + "\n")
