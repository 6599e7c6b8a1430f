"""One style and strict types: what the tools say, with their settings in pyproject.toml."""

import subprocess
import sys
from pathlib import Path

import pytest


def complaints(tool: list[str], folder: Path) -> str:
    """Return what a tool finds to complain about; empty when it is content."""
    command = [sys.executable, "-m", *tool]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, encoding="utf-8", check=False)
    return "" if done.returncode == 0 else f"{' '.join(tool)}:\n{done.stdout}{done.stderr}"


@pytest.mark.parametrize("tool", ["ruff check --quiet", "ruff format --check --quiet", "mypy"])
def test_the_tools_are_content(tool: str, repository: Path) -> None:
    found = complaints(tool.split(), repository)
    assert not found, found


@pytest.mark.parametrize(
    ("tool", "source", "expected"),
    [
        ("ruff check", "import os\n", "F401"),
        ("ruff check", "def f(x=[]):\n    return x\n", "B006"),
        ("ruff format --check", "x=1\n", "would be reformatted"),
        ("mypy", "def f(x):\n    return x\n", "no-untyped-def"),
    ],
)
def test_each_tool_complains_where_it_should(
    tool: str, source: str, expected: str, tmp_path: Path, repository: Path
) -> None:
    (tmp_path / "pyproject.toml").write_bytes((repository / "pyproject.toml").read_bytes())
    (tmp_path / "quant").mkdir()
    (tmp_path / "quant" / "__init__.py").write_text(f'"""A module."""\n\n{source}', encoding="utf-8")
    assert expected in complaints(tool.split(), tmp_path)
