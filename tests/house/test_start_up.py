"""Starting is fast because little is loaded: nothing by the front door, only NumPy by everyday prediction."""

import json
import subprocess
import sys
from collections.abc import Iterable
from pathlib import Path

import pytest

EVERYDAY_ROOMS = ("estimator", "spectra", "readers", "preprocessing", "regression", "model", "prediction")
SCRIPT = """
import json, sys
before = set(sys.modules)
{statements}
# Without a specification: entered by hand, as Cython's run time is when NumPy's random numbers are loaded.
found = [name for name, module in sys.modules.items() if getattr(module, "__spec__", None) is not None]
print(json.dumps(sorted(set(found) - before)))
"""


def loaded_by(statements: str, folder: Path) -> set[str]:
    """Return the modules that the statements load in a fresh Python, in dotted form."""
    command = [sys.executable, "-c", SCRIPT.format(statements=statements)]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return set(json.loads(done.stdout.splitlines()[-1]))


def foreign(modules: Iterable[str], allowed: Iterable[str] = ()) -> list[str]:
    """Return the libraries among the modules that are neither ours, nor Python's, nor allowed."""
    libraries = {module.partition(".")[0] for module in modules}
    return sorted(libraries - {"quant", *allowed} - sys.stdlib_module_names)


def modules_of(room: str, repository: Path) -> list[str]:
    """Return the dotted names of all modules of a room."""
    files = [*(repository / "quant").glob(f"{room}.py"), *(repository / "quant" / room).rglob("*.py")]
    return [".".join(file.relative_to(repository).with_suffix("").parts).removesuffix(".__init__") for file in files]


def test_the_front_door_loads_no_library(repository: Path) -> None:
    assert foreign(loaded_by("import quant", repository)) == []


def test_the_front_door_opens_no_room(repository: Path) -> None:
    assert [module for module in loaded_by("import quant", repository) if module.startswith("quant.")] == []


@pytest.mark.parametrize("room", EVERYDAY_ROOMS)
def test_everyday_rooms_load_numpy_only(room: str, repository: Path) -> None:
    modules = modules_of(room, repository)
    assert modules, "no module found: the test looked in the wrong place"
    assert foreign(loaded_by(f"import {', '.join(modules)}", repository), allowed=["numpy"]) == []


def test_a_heavy_import_is_seen(repository: Path) -> None:
    assert foreign(loaded_by("import csv, numpy, click", repository), allowed=["numpy"]) == ["click"]
    assert "scipy" in foreign(loaded_by("import scipy.stats", repository), allowed=["numpy"])
