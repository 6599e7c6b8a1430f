#!/usr/bin/env python3
"""Run the tests, on a fresh clone too: `python3 tests/run.py [arguments of pytest]`.

The first start makes the project's virtual environment (see demo_sets/environment.py); later ones begin at once.
Tests are spread over the cores, except where the arguments ask for figures that neighbours would disturb (-m long,
-m benchmark), for a debugger, or say themselves how to spread. Paths are taken from where the command was started,
else from the top of the project. The exit code is pytest's.
"""

from __future__ import annotations

import argparse
import os
import re
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
sys.path.insert(0, str(ROOT / "demo_sets"))

import environment  # noqa: E402 (its folder had to be named first)

ONE_THREAD = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")


def main(arguments: list[str]) -> int:
    """Run pytest with `arguments`, and return its exit code."""
    place = environment.prepared(extras=["dev"])
    spread = [] if runs_alone(arguments) else spreading(cores())
    if spread:  # workers already fill the cores; linear algebra with threads of its own would only be in their way
        for name in ONE_THREAD:
            os.environ.setdefault(name, "1")
    return place.run(["python", "-m", "pytest", *spread, *(from_here(argument, Path.cwd()) for argument in arguments)])


def spreading(workers: int) -> list[str]:
    """Return the arguments that spread tests over so many workers; none for a single one."""
    return ["-n", str(workers), "--dist", "worksteal"] if workers > 1 else []


def runs_alone(arguments: list[str]) -> bool:
    """Return whether the tests asked for have to run one after the other, or the user decides about that."""
    parser = argparse.ArgumentParser(add_help=False, allow_abbrev=False)
    parser.add_argument("-m", dest="marks", default="")
    parser.add_argument("-n", "--numprocesses", "--dist", dest="spreading")
    parser.add_argument("--pdb", "--trace", "--co", "--collect-only", "--markers", dest="watched", action="store_true")
    asked, _ = parser.parse_known_args(arguments)
    measures = re.search(r"(?<!not )\b(long|benchmark)\b", asked.marks)
    return bool(measures or asked.spreading or asked.watched)


def from_here(argument: str, here: Path) -> str:
    """Return a path to tests (`file` or `file::test`) made absolute where it exists from `here`; all else unchanged."""
    path, mark, name = argument.partition("::")
    if argument.startswith("-") or not path or (ROOT / path).exists() or not (here / path).exists():
        return argument
    return f"{(here / path).resolve()}{mark}{name}"


def cores() -> int:
    """Return how many cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
