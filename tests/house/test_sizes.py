"""Files and functions stay small enough to be read in one sitting.

A function's code lines leave out its docstring, comments and blank lines; functions inside it count with it.
"""

import ast
import io
import tokenize
from pathlib import Path

LARGEST_FILE = 400  # lines; the aim is 150, to be split at 300
LARGEST_FUNCTION = 60  # code lines; the aim is 12
NO_CODE = {
    tokenize.COMMENT, tokenize.NL, tokenize.NEWLINE, tokenize.INDENT, tokenize.DEDENT, tokenize.ENCODING,
    tokenize.ENDMARKER,
}  # fmt: skip
FunctionNode = ast.FunctionDef | ast.AsyncFunctionDef


def size_faults(source: str, file: str) -> list[str]:
    """Return what in the text of one file is too large."""
    faults = []
    length = len(source.splitlines())
    if length > LARGEST_FILE:
        faults.append(f"{file}: {length} lines; at most {LARGEST_FILE}")
    code = code_lines(source)
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, FunctionNode):
            lines = len(code.intersection(range(node.lineno, (node.end_lineno or node.lineno) + 1)))
            if lines > LARGEST_FUNCTION:
                faults.append(f"{file}:{node.lineno}: {node.name} has {lines} code lines; at most {LARGEST_FUNCTION}")
    return faults


def code_lines(source: str) -> set[int]:
    """Return the numbers of the lines that hold code."""
    lines: set[int] = set()
    for token in tokenize.generate_tokens(io.StringIO(source).readline):
        if token.type not in NO_CODE:
            lines.update(range(token.start[0], token.end[0] + 1))
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, FunctionNode | ast.ClassDef | ast.Module) and ast.get_docstring(node) is not None:
            lines.difference_update(range(node.body[0].lineno, (node.body[0].end_lineno or 0) + 1))
    return lines


def test_files_and_functions_are_small(repository: Path) -> None:
    files = [file for folder in ("quant", "tests", "demo_sets") for file in sorted((repository / folder).rglob("*.py"))]
    faults = [
        fault
        for file in files
        for fault in size_faults(file.read_text(encoding="utf-8"), file.relative_to(repository).as_posix())
    ]
    assert files, "no file found: the test looked in the wrong place"
    assert not faults, "\n" + "\n".join(faults)


def test_a_large_file_is_seen() -> None:
    assert size_faults("x = 1\n" * LARGEST_FILE, "a.py") == []
    assert size_faults("x = 1\n" * (LARGEST_FILE + 1), "a.py") == ["a.py: 401 lines; at most 400"]


def test_a_long_function_is_seen() -> None:
    head = 'def f():\n    """Say.\n\n    More.\n    """\n'
    body = "    # a reason\n\n    x = 1\n"
    assert size_faults(head + body * (LARGEST_FUNCTION - 1), "a.py") == []
    assert size_faults(head + body * LARGEST_FUNCTION, "a.py") == ["a.py:1: f has 61 code lines; at most 60"]


def test_a_long_text_that_is_no_docstring_counts() -> None:
    source = 'class C:\n    async def f(self):\n        return """' + "\n" * LARGEST_FUNCTION + '"""\n'
    assert size_faults(source, "a.py") == ["a.py:2: f has 62 code lines; at most 60"]
