"""The house plan: who may import whom.

Data enters on the lowest floor and leaves by the highest. A file imports only lower floors and its own room; rooms on
one floor do not know each other; inside a room there is no circle; nobody inside imports the front door. Imports in
functions and under TYPE_CHECKING count as any other. One exception: a library of others may be imported inside a
function to keep start-up fast, if the line says so.
"""

import ast
import graphlib
import re
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

FLOORS = (
    ("errors", "arrays"),
    ("units", "checks", "text_table", "estimator", "files", "later", "parallel", "result"),
    ("statistics", "spectra", "chemistry"),
    ("readers", "preprocessing", "regression"),
    ("model", "recipe"),
    ("prediction",),
    ("calibration",),
    ("inspection", "planning", "screening", "revalidation"),
    ("records",),
    ("plots",),
    ("reports",),
    ("desk",),
    ("cli",),
    ("__init__", "__main__"),  # the front door
)
FLOOR = {room: number for number, rooms in enumerate(FLOORS) for room in rooms}
DEFERRED = "# deferred: start-up"
LATER = re.compile(r"quant(\.\w+)+:\w+")  # an entry of a table that is imported when it is first used


@dataclass(frozen=True)
class Import:
    """One imported name: `from base import name`, or `import base` where there is no name."""

    line: int
    base: str
    name: str = ""
    in_function: bool = False

    @property
    def top(self) -> str:
        """The library: the first part of the dotted name."""
        return self.base.partition(".")[0]

    @property
    def path(self) -> str:
        """The dotted name in full."""
        return f"{self.base}.{self.name}" if self.name else self.base

    def is_front_door(self) -> bool:
        """Return whether this is `import quant` or `from quant import ...`."""
        return self.base == "quant"


def imports_of(source: str, package: str) -> list[Import]:
    """Return every import in the text of a file that lies in `package`, with relative ones made absolute."""
    return list(_imports(ast.parse(source), package.split("."), in_function=False))


def _imports(node: ast.AST, package: list[str], *, in_function: bool) -> Iterator[Import]:
    match node:
        case ast.Import(names=names):
            for alias in names:
                yield Import(node.lineno, alias.name, in_function=in_function)
        case ast.ImportFrom(module=module, names=names, level=level):
            above = package[: len(package) - level + 1] if level else []
            base = ".".join([*above, *([module] if module else [])])
            for alias in names:
                yield Import(node.lineno, base, alias.name, in_function=in_function)
        case ast.Call(
            func=ast.Name(id="import_module" | "__import__") | ast.Attribute(attr="import_module"),
            args=[ast.Constant(value=str(module)), *_],
        ) if not module.startswith("."):
            yield Import(node.lineno, module, in_function=in_function)
        case ast.Constant(value=str(place)) if LATER.fullmatch(place):
            base, _, name = place.partition(":")
            yield Import(node.lineno, base, name, in_function=in_function)
    inside = in_function or isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda)
    for child in ast.iter_child_nodes(node):
        yield from _imports(child, package, in_function=inside)


def room_of(module: str) -> str:
    """Return the room of a dotted module name; the front door's is `__init__`."""
    parts = module.split(".")
    return parts[1] if len(parts) > 1 else "__init__"


def floor_faults(source: str, module: str, package: str) -> list[str]:
    """Return what in the text of one file goes against the floors."""
    home = room_of(module)
    if home not in FLOOR:
        return [f"{module}: room {home!r} is not in the house plan"]
    faults = []
    for found in imports_of(source, package):
        if found.top != "quant":
            continue
        target = room_of(found.path)
        place = f"{module}:{found.line}"
        if found.is_front_door():
            faults.append(f"{place} imports the front door; import the room")
        elif target not in FLOOR:
            faults.append(f"{place} imports {found.path}; room {target!r} is not in the house plan")
        elif target != home and FLOOR[target] >= FLOOR[home]:
            faults.append(f"{place} ({home}, floor {FLOOR[home]}) imports {target} (floor {FLOOR[target]})")
    return faults


def deferral_faults(source: str, module: str, package: str) -> list[str]:
    """Return imports of other people's libraries inside functions that do not say why.

    The word stands in the line of the import, or in that of the first of several that follow on each other.
    """
    found = imports_of(source, package)
    marked = {n for n, line in enumerate(source.splitlines(), start=1) if DEFERRED in line}
    for line in sorted({each.line for each in found}):
        if line - 1 in marked:
            marked.add(line)
    return [
        f"{module}:{each.line} imports {each.path} in a function without {DEFERRED!r}"
        for each in found
        if each.in_function and each.top not in {"quant", *sys.stdlib_module_names} and each.line not in marked
    ]


def circle(sources: dict[str, str], packages: dict[str, str]) -> list[str]:
    """Return the modules of one import circle, first and last the same; empty where there is none."""
    graph: dict[str, set[str]] = {}
    for module, source in sources.items():
        names = {found.path if found.path in sources else found.base for found in imports_of(source, packages[module])}
        graph[module] = {name for name in names if name in sources}
    try:
        graphlib.TopologicalSorter(graph).prepare()
    except graphlib.CycleError as error:
        modules: list[str] = error.args[1]
        return modules
    return []


@pytest.fixture(scope="module")
def sources(repository: Path) -> dict[str, str]:
    """The text of every module of the package, by dotted name."""
    found = {}
    for file in sorted((repository / "quant").rglob("*.py")):
        parts = file.relative_to(repository).with_suffix("").parts
        found[".".join(parts[:-1] if parts[-1] == "__init__" else parts)] = file.read_text(encoding="utf-8")
    return found


@pytest.fixture(scope="module")
def packages(repository: Path, sources: dict[str, str]) -> dict[str, str]:
    """The package that each module's relative imports start from: itself for a folder, else the folder it lies in."""
    return {
        module: module if (repository / module.replace(".", "/")).is_dir() else module.rpartition(".")[0]
        for module in sources
    }


def test_a_file_imports_only_lower_floors(sources: dict[str, str], packages: dict[str, str]) -> None:
    faults = [fault for module, text in sources.items() for fault in floor_faults(text, module, packages[module])]
    assert sources, "no source found: the test looked in the wrong place"
    assert not faults, "\n" + "\n".join(faults)


def test_a_deferred_import_says_so(sources: dict[str, str], packages: dict[str, str]) -> None:
    faults = [fault for module, text in sources.items() for fault in deferral_faults(text, module, packages[module])]
    assert not faults, "\n" + "\n".join(faults)


def test_no_circle(sources: dict[str, str], packages: dict[str, str]) -> None:
    assert circle(sources, packages) == []


@pytest.mark.parametrize(
    ("module", "source"),
    [
        pytest.param("quant.spectra.axis", "from quant.readers.read import read_spectra", id="higher floor"),
        pytest.param("quant.spectra.axis", "from quant.statistics import figures", id="neighbour on the same floor"),
        pytest.param("quant.checks", "from quant.units import convert", id="neighbouring file on the same floor"),
        pytest.param("quant.readers.read", "def f():\n    from quant.model import load_model", id="in a function"),
        pytest.param("quant.readers.read", "if TYPE_CHECKING:\n    import quant.model.load", id="under TYPE_CHECKING"),
        pytest.param("quant.readers.read", "from ..model import load_model", id="relative"),
        pytest.param("quant.readers.read", "from .. import errors", id="front door, relative"),
        pytest.param("quant.readers.read", "import importlib\nimportlib.import_module('quant.cli')", id="by its name"),
        pytest.param("quant.cli.main", "import quant", id="front door"),
        pytest.param("quant.cli.main", "from quant import predict", id="front door, a name"),
        pytest.param("quant.cli.main", "from quant.attic import old", id="unknown room imported"),
        pytest.param("quant.attic.old", "", id="unknown room"),
    ],
)
def test_each_breach_of_the_floors_is_seen(module: str, source: str) -> None:
    assert len(floor_faults(source, module, module.rpartition(".")[0])) == 1


@pytest.mark.parametrize(
    ("module", "source"),
    [
        ("quant.readers.read", "from quant.spectra import SpectraSet\nfrom quant.errors import DataError"),
        ("quant.readers.read", "from . import options\nfrom .registry import READERS\nfrom ..spectra import axis"),
        ("quant.__main__", "from quant.cli.main import main"),
        ("quant.arrays", "import numpy as np\nimport quantities"),
    ],
)
def test_what_the_floors_allow_is_left_alone(module: str, source: str) -> None:
    assert floor_faults(source, module, module.rpartition(".")[0]) == []


def test_an_unmarked_deferral_is_seen() -> None:
    marked = f"def f():\n    import scipy.stats  {DEFERRED}\n    import pandas\n\n    import json\n"
    assert deferral_faults(marked, "quant.files", "quant") == []
    assert len(deferral_faults("def f():\n    import scipy.stats\n", "quant.files", "quant")) == 1
    assert len(deferral_faults(marked + "    import sklearn\n", "quant.files", "quant")) == 1


@pytest.mark.parametrize(
    ("load", "save"),
    [
        pytest.param("def f():\n    from . import save", "from quant.model.load import load_model", id="of two files"),
        pytest.param("from quant.model import Calibration", "", id="of a file and its own room"),
    ],
)
def test_a_circle_is_seen(load: str, save: str) -> None:
    sources = {"quant.model": "from quant.model.load import f", "quant.model.load": load, "quant.model.save": save}
    assert "quant.model.load" in circle(sources, dict.fromkeys(sources, "quant.model"))


def test_a_tree_is_no_circle() -> None:
    sources = {"quant.model": "from quant.model import load", "quant.model.load": "from quant.model.save import g"}
    sources["quant.model.save"] = "import quant.errors"
    assert circle(sources, dict.fromkeys(sources, "quant.model")) == []
