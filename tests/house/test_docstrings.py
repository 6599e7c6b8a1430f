"""Everything public explains itself, and names the errors that it raises.

Public is what no underscore in the path to it hides. A `raise` of an error by its class has to be met by that class
under "Raises" of the function it stands in; `raise` alone (the same error again) and NotImplementedError are left out,
and so is what called functions raise: that cannot be told from the text of one file. Commands are left out too, since
their docstring is what --help prints.
"""

import ast
import re
from collections.abc import Iterator
from pathlib import Path

FunctionNode = ast.FunctionDef | ast.AsyncFunctionDef
COMMANDS = {"command", "group"}
REPEATS = {"overload", "override", "setter", "deleter"}  # the docstring stands at what they repeat


def docstring_faults(source: str, file: str) -> list[str]:
    """Return what in the text of one file is public and unexplained."""
    tree = ast.parse(source)
    faults = [] if ast.get_docstring(tree) else [f"{file}: the module has no docstring"]
    for name, node in public_nodes(tree):
        place = f"{file}:{node.lineno}: {name}"
        docstring = ast.get_docstring(node)
        if not docstring:
            faults.append(f"{place} has no docstring")
        elif isinstance(node, FunctionNode) and COMMANDS.isdisjoint(map(_last_name, node.decorator_list)):
            section = re.search(r"^Raises\n-{6}\n((?:.*\n?)+?)(?=^\S.*\n-{3,}$|\Z)", docstring, re.MULTILINE)
            listed = set(re.findall(r"\w+", section[1])) if section else set()
            faults += [f"{place} raises {error}; not listed under Raises" for error in sorted(raised(node) - listed)]
    return faults


def public_nodes(node: ast.AST, path: str = "") -> Iterator[tuple[str, FunctionNode | ast.ClassDef]]:
    """Yield the public classes, functions and methods with their names, not looking into functions."""
    for child in ast.iter_child_nodes(node):
        if isinstance(child, FunctionNode | ast.ClassDef):
            if not child.name.startswith("_") and REPEATS.isdisjoint(map(_last_name, child.decorator_list)):
                yield path + child.name, child
                if isinstance(child, ast.ClassDef):
                    yield from public_nodes(child, f"{path}{child.name}.")
        elif isinstance(child, ast.If | ast.Try | ast.With):  # definitions may stand under a condition
            yield from public_nodes(child, path)


def raised(function: FunctionNode) -> set[str]:
    """Return the names of the error classes that a function itself raises."""
    names = set()
    waiting: list[ast.AST] = list(function.body)
    while waiting:
        node = waiting.pop()
        if isinstance(node, FunctionNode | ast.ClassDef | ast.Lambda):
            continue  # raises in its own name
        if isinstance(node, ast.Raise) and node.exc is not None:
            name = _last_name(node.exc)
            if name[:1].isupper() and name != "NotImplementedError":
                names.add(name)
        waiting += ast.iter_child_nodes(node)
    return names


def _last_name(node: ast.expr) -> str:
    """Return `C` of C, C(...), a.C and a.C(...)."""
    match node:
        case ast.Call(func=func):
            return _last_name(func)
        case ast.Attribute(attr=name) | ast.Name(id=name):
            return name
    return ""


def test_everything_public_has_a_docstring(repository: Path) -> None:
    files = sorted((repository / "quant").rglob("*.py"))
    faults = [
        fault
        for file in files
        for fault in docstring_faults(file.read_text(encoding="utf-8"), file.relative_to(repository).as_posix())
    ]
    assert files, "no file found: the test looked in the wrong place"
    assert not faults, "\n" + "\n".join(faults)


def test_what_is_unexplained_is_seen() -> None:
    source = "class C:\n    def f(self): ...\n    def _g(self): ...\n"
    source += "if True:\n    def h(): ...\ndef _i():\n    def j(): ...\n"
    assert docstring_faults(source, "a.py") == [
        "a.py: the module has no docstring",
        "a.py:1: C has no docstring",
        "a.py:2: C.f has no docstring",
        "a.py:5: h has no docstring",
    ]


RAISING = '''"""A module."""
def f(x):
    """Do.

    Raises
    ------
    ValueError
        Always.
{more}    """
    def inner():
        raise OSError
    if x:
        raise errors.{error}(f"no") from None
    raise ValueError
'''


def test_an_unlisted_error_is_seen() -> None:
    assert docstring_faults(RAISING.format(error="ValueError", more=""), "a.py") == []
    faults = ["a.py:2: f raises DataError; not listed under Raises"]
    assert docstring_faults(RAISING.format(error="DataError", more=""), "a.py") == faults
    notes = "\n    Notes\n    -----\n    No DataError.\n"
    assert docstring_faults(RAISING.format(error="DataError", more=notes), "a.py") == faults


def test_a_missing_raises_section_is_seen() -> None:
    source = '"""M."""\ndef f():\n    """Raise ValueError."""\n    raise ValueError\n'
    assert docstring_faults(source, "a.py") == ["a.py:2: f raises ValueError; not listed under Raises"]


def test_a_command_explains_itself_to_its_user() -> None:
    source = '"""M."""\n@click.command("x")\ndef f():\n    """Do."""\n    raise click.UsageError("no")\n'
    assert docstring_faults(source, "a.py") == []
    assert docstring_faults(source.replace("command", "other"), "a.py") != []


def test_the_same_error_again_needs_no_mention() -> None:
    source = '"""M."""\ndef f():\n    """Do."""\n    try:\n        g()\n    except ValueError as e:\n        raise\n'
    assert docstring_faults(source, "a.py") == []
