"""What has no place in the package, or a place in one room only.

Pickle and its kin: loading such a file can run code, and none of them is readable in ten years. Matplotlib: only plots
knows it. Printing: only the command line talks to a screen.
"""

import ast
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

PICKLES = {"pickle", "_pickle", "cPickle", "cloudpickle", "dill", "shelve", "marshal", "jsonpickle"}
PICKLE_CALLS = {"read_pickle", "to_pickle"}


def imported(tree: ast.AST) -> Iterator[tuple[int, str]]:
    """Yield line and full dotted name of whatever is imported, anywhere in the file, by statement or by its name."""
    for node in ast.walk(tree):
        match node:
            case ast.Import(names=names):
                yield from ((node.lineno, alias.name) for alias in names)
            case ast.ImportFrom(module=str(module), names=names, level=0):
                yield from ((node.lineno, f"{module}.{alias.name}") for alias in names)
            case ast.Call(
                func=ast.Name(id="import_module" | "__import__") | ast.Attribute(attr="import_module"),
                args=[ast.Constant(value=str(module)), *_],
            ):
                yield node.lineno, module


def pickle_faults(source: str) -> list[str]:
    """Return where the text of a file uses pickle or its kin, joblib's and NumPy's uses of it included."""
    tree = ast.parse(source)
    faults = [
        f"{line}: imports {name}"
        for line, name in imported(tree)
        if name.partition(".")[0] in PICKLES or name in ("joblib.load", "joblib.dump")
    ]
    for node in ast.walk(tree):
        match node:
            case ast.Call(func=ast.Attribute(value=ast.Name(id="joblib"), attr="load" | "dump" as name)):
                faults.append(f"{node.lineno}: calls joblib.{name}")
            case ast.Call(func=ast.Attribute(value=ast.Name(id="np" | "numpy"), attr="load"), args=[_, _, _, *_]):
                faults.append(f"{node.lineno}: calls np.load with allow_pickle by position")
            case ast.Attribute(attr=name) if name in PICKLE_CALLS:
                faults.append(f"{node.lineno}: uses {name}")
            case ast.keyword(arg="allow_pickle", value=value) if not _is_false(value):
                faults.append(f"{value.lineno}: allow_pickle is not False")
    return faults


def _is_false(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value is False


def matplotlib_faults(source: str) -> list[str]:
    """Return where the text of a file imports matplotlib."""
    libraries = ("matplotlib", "mpl_toolkits", "pylab")
    found = imported(ast.parse(source))
    return [f"{line}: imports {name}" for line, name in found if name.partition(".")[0] in libraries]


def print_faults(source: str) -> list[str]:
    """Return where the text of a file prints."""
    return [
        f"{node.lineno}: {node.id}"
        for node in ast.walk(ast.parse(source))
        if isinstance(node, ast.Name) and node.id in ("print", "pprint")
    ]


@pytest.mark.parametrize(
    ("check", "allowed_in"), [(pickle_faults, None), (matplotlib_faults, "plots"), (print_faults, "cli")]
)
def test_the_package_is_free_of_it(repository: Path, check: Callable[[str], list[str]], allowed_in: str | None) -> None:
    package = repository / "quant"
    files = [file for file in sorted(package.rglob("*.py")) if file.relative_to(package).parts[0] != allowed_in]
    faults = [
        f"{file.relative_to(repository).as_posix()}:{fault}"
        for file in files
        for fault in check(file.read_text(encoding="utf-8"))
    ]
    assert files, "no file found: the test looked in the wrong place"
    assert not faults, "\n" + "\n".join(faults)


@pytest.mark.parametrize(
    "source",
    [
        "import pickle",
        "import marshal as m",
        "from dill import load",
        "def f():\n    from cloudpickle import dumps",
        "__import__('shelve')",
        "importlib.import_module('pickle')",
        "from joblib import load",
        "joblib.dump(model, 'm')",
        "np.load('m', allow_pickle=True)",
        "np.load('m', allow_pickle=choice)",
        "np.load('m', None, True)",
        "pd.read_pickle('m')",
        "frame.to_pickle('m')",
    ],
)
def test_each_kind_of_pickle_is_seen(source: str) -> None:
    assert len(pickle_faults(source)) == 1


def test_plain_numbers_and_text_are_left_alone() -> None:
    assert (
        pickle_faults("import json, joblib\nnp.load('m', allow_pickle=False)\njson.dump(x, f)\njoblib.Parallel(2)")
        == []
    )


@pytest.mark.parametrize(
    "source",
    [
        "import matplotlib.pyplot as plt",
        "def f():\n    from matplotlib.axes import Axes",
        "import_module('matplotlib')",
    ],
)
def test_matplotlib_is_seen(source: str) -> None:
    assert len(matplotlib_faults(source)) == 1
    assert matplotlib_faults("import matplotless") == []


@pytest.mark.parametrize("source", ["print(1)", "show = print", "from pprint import pprint\npprint({})"])
def test_printing_is_seen(source: str) -> None:
    assert len(print_faults(source)) == 1
    assert print_faults("text.print_area = imprint('print')") == []
