"""The command itself: its list of commands, how it tells errors, what it loads."""

import importlib.metadata
import json
import subprocess
import sys
from pathlib import Path

import click
import pytest

from quant.cli.main import COMMANDS, LazyGroup, cli
from quant.model.versions import NOT_INSTALLED

ROOT = Path(__file__).resolve().parents[2]
HEAVY = {"scipy", "sklearn", "pandas", "matplotlib", "pydantic", "jinja2", "rich", "joblib"}
SCRIPT = """
import json, sys
before = set(sys.modules)
from quant.cli.main import cli
try:
    cli({arguments}, prog_name="quant")
except SystemExit as end:
    code = end.code
print(json.dumps([code, sorted(set(sys.modules) - before)]))
"""


def loaded_by(*arguments: object) -> tuple[int, set[str], str]:
    """Run the command line in a fresh Python; return its exit code, the libraries loaded, and what it printed."""
    script = SCRIPT.format(arguments=[str(argument) for argument in arguments])
    done = subprocess.run([sys.executable, "-c", script], cwd=ROOT, capture_output=True, text=True, check=True)
    printed, _, last = done.stdout.rstrip("\n").rpartition("\n")
    code, modules = json.loads(last)
    # Cython enters its own run time as modules without a file, once NumPy's random numbers are loaded.
    libraries = {name.partition(".")[0] for name in modules if not name.startswith("_cython_")}
    return code, libraries - sys.stdlib_module_names, printed


@pytest.mark.parametrize("command", ["", *COMMANDS])
def test_help_loads_nothing_heavy(command: str) -> None:
    code, modules, printed = loaded_by(*([command] if command else []), "--help")
    assert code == 0
    assert printed.startswith(f"Usage: quant {command}".rstrip())
    assert modules <= {"quant", "click", "numpy"}


def test_a_heavy_command_is_seen(project) -> None:
    code, modules, _ = loaded_by("inspect", project.folder / "recipe.toml")
    assert code == 0
    assert {"pydantic", "scipy"} <= modules


def test_predicting_loads_numpy_and_click_only(project) -> None:
    model, spectra = project.make_model(), project.folder / "spectra.csv"
    for suffix in ("csv", "json"):
        table = project.folder / f"table.{suffix}"
        code, modules, printed = loaded_by("predict", model, spectra, "--samples", "S02", "--out", table)
        assert code == 0
        assert "S02" in printed
        assert table.exists()
        assert modules == {"quant", "click", "numpy"}


@pytest.mark.parametrize("name", COMMANDS)
def test_the_list_of_commands_and_the_commands_agree(project, name: str) -> None:
    listed = project.run("--help").stdout
    command = cli.get_command(click.Context(cli), name)
    assert command is not None
    assert command.name == name
    assert f"  {name}" in listed
    assert "Exit codes: 0 done; 1 done" in listed


def test_an_unknown_command_is_refused(project) -> None:
    result = project.run("calibrat")
    assert result.exit_code == 2
    assert "No such command 'calibrat'" in result.stderr
    assert LazyGroup().get_command(click.Context(cli), "calibrat") is None


def test_version(project) -> None:
    result = project.run("--version")
    try:
        expected = importlib.metadata.version("quant")
    except importlib.metadata.PackageNotFoundError:
        expected = NOT_INSTALLED
    assert (result.exit_code, result.stdout) == (0, f"quant {expected}\n")


def test_as_a_module(project) -> None:
    command = [sys.executable, "-m", "quant", "predict", str(project.folder / "no.model"), "x.csv"]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, encoding="utf-8", check=False)
    assert done.returncode == 3
    assert done.stderr.startswith("Error: ")
    assert "Traceback" not in done.stderr


def test_a_bug_is_not_hidden(project, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: object) -> None:
        raise ZeroDivisionError("a bug")

    monkeypatch.setattr("quant.recipe.load.load_recipe", broken)
    with pytest.raises(ZeroDivisionError, match="a bug"):
        project.run("inspect", project.folder / "recipe.toml")


def test_an_interruption_has_an_exit_code_of_its_own(project, monkeypatch) -> None:
    def interrupted(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("quant.inspection.inspect.inspect", interrupted)
    result = project.run("inspect", project.folder / "recipe.toml")
    assert result.exit_code == 130  # 1 would be "not accepted"
    assert "Interrupted." in result.stderr


def test_a_full_disk_behind_the_output_is_told(project, monkeypatch) -> None:
    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("quant.inspection.inspect.inspect", full)
    result = project.run("inspect", project.folder / "recipe.toml")
    assert result.exit_code == 2
    assert "Error: the system refused to read or write: No space left on device. Make room" in result.stderr
