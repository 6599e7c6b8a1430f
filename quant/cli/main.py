"""The command ``quant``: a table of commands, each loaded when it is called."""

import errno
import io
import sys
from importlib import import_module
from typing import Any

import click

from quant.errors import ExitCode, QuantError

# Name, module, and the line that --help shows without loading the module.
COMMANDS = {
    "plan": ("quant.cli.plan", "Design the standards to prepare, or judge those that exist."),
    "inspect": ("quant.cli.inspect", "Look over the spectra and reference values that a recipe names."),
    "screen": ("quant.cli.screen", "Compare many candidate recipes, honestly; write the winner as a recipe."),
    "calibrate": (
        "quant.cli.calibrate",
        "Make, cross-validate and validate the calibrations of a recipe; write the report.",
    ),
    "predict": ("quant.cli.predict", "Predict new spectra with a saved model."),
    "revalidate": (
        "quant.cli.revalidate",
        "After a service visit: does the calibration hold, and what restores it with the least work.",
    ),
    "recipe": ("quant.cli.recipe", "Print the keys a recipe may have: JSON schema, or defaults with comments."),
}


class LazyGroup(click.Group):
    """A group that imports a command's module only when the command is called."""

    def list_commands(self, ctx: click.Context) -> list[str]:  # noqa: ARG002 (click's signature)
        """Return the commands in the order of a working day."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, name: str) -> click.Command | None:  # noqa: ARG002 (click's signature)
        """Load one command."""
        if name not in COMMANDS:
            return None
        command: click.Command = import_module(COMMANDS[name][0]).command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:  # noqa: ARG002
        """List the commands without loading them."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, line) for name, (_, line) in COMMANDS.items()])

    def invoke(self, ctx: click.Context) -> Any:
        """Run a command; an expected error or Ctrl-C is told in words and becomes an exit code."""
        try:
            return super().invoke(ctx)
        except QuantError as error:
            click.echo(f"{click.style('Error', fg='red', bold=True)}: {error}", err=True)
            ctx.exit(int(error.exit_code))
        except (KeyboardInterrupt, click.Abort):
            click.echo("\nInterrupted. Files named above were written whole; nothing else was.", err=True)
            ctx.exit(int(ExitCode.INTERRUPTED))
        except OSError as problem:  # of streams: files have their own words
            if problem.errno == errno.EPIPE:  # nobody reads on, as behind "| head"
                raise
            place = f" ({problem.filename})" if problem.filename else ""
            click.echo(
                f"Error: the system refused to read or write{place}: {problem.strerror or problem}. Make room or "
                "choose another place, and run the command again.",
                err=True,
            )
            ctx.exit(int(ExitCode.USAGE))


def _tell_version(ctx: click.Context, _: click.Parameter, asked: bool) -> None:  # noqa: FBT001 (click's signature)
    if asked:
        from quant.model.versions import own_version  # deferred: start-up

        click.echo(f"quant {own_version()}")
        ctx.exit()


@click.group(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"]})
@click.option(
    "--version", is_flag=True, expose_value=False, is_eager=True, callback=_tell_version, help="Tell the version."
)
def cli() -> None:
    """Make, defend and use a quantitative infrared calibration.

    Exit codes: 0 done; 1 done, but the verdict is "not accepted"; 2 wrong usage or recipe; 3 unreadable data;
    130 interrupted.
    """


def main() -> None:
    """Run the command line."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):  # cm⁻¹ and ± on consoles that default to another code page
            stream.reconfigure(encoding="utf-8", errors="replace")
    cli(prog_name="quant")
