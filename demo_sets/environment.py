"""The project's own virtual environment, for the commands that start on a fresh clone: tests/run.py, demo_sets/run.py.

The environment lies in .venv at the top of the project. It is made at the first start, and again when pyproject.toml,
the Python or the place of the project has changed; every other start finds it ready. Standard library only, and no
syntax newer than Python 3.7, so that an old Python reaches the message that names it too old.
"""

from __future__ import annotations

import hashlib
import importlib.util
import json
import os
import shutil
import signal
import subprocess
import sys
import sysconfig
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Sequence

ROOT = Path(__file__).resolve().parent.parent
OLDEST_PYTHON = (3, 11)  # as `requires-python` in pyproject.toml; a house test compares the two
LINES_SHOWN = 15  # of what pip said last, when it fails


class CannotPrepare(Exception):  # noqa: N818 (a message for the person at the keyboard, not an error of the program)
    """The environment cannot be made; the text says what is missing and what to do."""


class Environment:
    """One virtual environment of one project.

    Parameters
    ----------
    root : Path
        The project: the folder that holds pyproject.toml.
    """

    def __init__(self, root: Path = ROOT) -> None:
        self.root = root
        self.folder = root / ".venv"
        self.programs = self.folder / ("Scripts" if os.name == "nt" else "bin")
        self.python = self.programs / ("python.exe" if os.name == "nt" else "python")
        self._stamp = self.folder / "prepared.json"
        self._lock = self.folder / "prepared.lock"

    def prepare(self, extras: Iterable[str] = ()) -> None:
        """Make the environment, or bring it up to date; return at once when it already holds what is asked for.

        Parameters
        ----------
        extras : iterable of str
            Optional dependencies by their names in pyproject.toml. Those installed earlier stay.

        Raises
        ------
        CannotPrepare
            Python is too old, a part of it is missing, the folder is somebody else's, or pip failed.
        """
        check_python(sys.version_info[:2])
        wanted = set(extras)
        if self._holds(wanted):
            return
        if self.folder.is_dir() and any(self.folder.iterdir()) and not self._lock.exists():
            raise CannotPrepare(
                f"{self.folder} holds something that this program did not make. Rename or remove it, then start again."
            )
        self.folder.mkdir(exist_ok=True)
        with locked(self._lock):
            if not self._holds(wanted):  # another start may have made it while this one waited
                self._build(wanted)

    def run(self, command: Sequence[str | Path]) -> int:
        """Run a program of the environment from the top of the project, its output passing straight through.

        Parameters
        ----------
        command : sequence of str or Path
            A name, looked up among the environment's programs, and its arguments.

        Returns
        -------
        int
            Its exit code; 128 + the signal's number when a signal ended it.
        """
        program, *arguments = command
        sys.stdout.flush()
        # Ctrl-C goes to the program as well, which ends in its own way; leaving first would cut off its last words.
        # A handler, unlike SIG_IGN, is not inherited by it.
        before = signal.signal(signal.SIGINT, lambda *_: None)
        try:
            code = subprocess.run(
                [str(self.programs / program), *map(str, arguments)], cwd=self.root, env=self._variables(), check=False
            ).returncode
        finally:
            signal.signal(signal.SIGINT, before)
        return code if code >= 0 else 128 - code

    def fingerprint(self) -> str:
        """Return what the environment depends on, hashed: pyproject.toml, the Python, and where the project lies."""
        # The place counts because scripts and the editable install hold it: a copied .venv would test the original.
        parts = [sys.version, sysconfig.get_platform(), str(self.folder)]
        digest = hashlib.sha256("\n".join(parts).encode())
        digest.update((self.root / "pyproject.toml").read_bytes())
        return digest.hexdigest()

    def _holds(self, extras: set[str]) -> bool:
        stamp = self._read_stamp()
        return self.python.exists() and stamp["fingerprint"] == self.fingerprint() and extras <= set(stamp["extras"])

    def _read_stamp(self) -> dict[str, Any]:
        try:
            stamp = json.loads(self._stamp.read_text(encoding="utf-8"))
            return {"fingerprint": str(stamp["fingerprint"]), "extras": list(stamp["extras"])}
        except (OSError, ValueError, KeyError, TypeError):  # absent, or cut short: the same as never made
            return {"fingerprint": "", "extras": []}

    def _build(self, extras: set[str]) -> None:
        fingerprint, stamp = self.fingerprint(), self._read_stamp()
        if self.python.exists() and stamp["fingerprint"] == fingerprint:
            extras = extras | set(stamp["extras"])
        else:
            self._make_afresh()
        what = ".[" + ",".join(sorted(extras)) + "]" if extras else "."
        say("Installing quant and what it needs (this once; a minute or two) ...")
        pip = [str(self.python), "-m", "pip", "--disable-pip-version-check", "--no-input", "install", "-q", "-e", what]
        call(pip, "pip could not install what quant needs", self.root, self._variables())
        written = self._stamp.with_suffix(".new")
        written.write_text(json.dumps({"fingerprint": fingerprint, "extras": sorted(extras)}), encoding="utf-8")
        written.replace(self._stamp)

    def _make_afresh(self) -> None:
        say(f"Making a virtual environment in {self.folder} ...")
        self._stamp.unlink(missing_ok=True)  # first: from here on nobody may take the environment for finished
        for entry in self.folder.iterdir():
            if entry == self._lock:
                continue
            if entry.is_dir() and not entry.is_symlink():
                shutil.rmtree(entry)
            else:
                entry.unlink()
        # The base Python, because the one running may be the .venv's own that was just removed.
        base = getattr(sys, "_base_executable", None) or sys.executable
        call([base, "-m", "venv", str(self.folder)], "Python could not make a virtual environment", self.root, None)

    def _variables(self) -> dict[str, str]:
        kept = {name: value for name, value in os.environ.items() if name not in ("PYTHONPATH", "PYTHONHOME")}
        path = os.pathsep.join([str(self.programs), os.environ.get("PATH", os.defpath)])
        return {**kept, "PATH": path, "VIRTUAL_ENV": str(self.folder)}


def check_python(version: tuple[int, ...], has: Callable[[str], object] = importlib.util.find_spec) -> None:
    """Check that this Python is new enough and can make virtual environments.

    Parameters
    ----------
    version : tuple of int
        (major, minor).
    has : callable
        Says whether a module can be found.

    Raises
    ------
    CannotPrepare
        It is too old, or `venv` or `ensurepip` is missing.
    """
    found, needed = ".".join(map(str, version)), ".".join(map(str, OLDEST_PYTHON))
    if tuple(version) < OLDEST_PYTHON:
        raise CannotPrepare(
            f"This is Python {found} ({sys.executable}); quant needs {needed} or newer. "
            f"Start it with a newer one, for instance: python{needed} {' '.join(sys.argv)}"
        )
    missing = [name for name in ("venv", "ensurepip") if not has(name)]
    if missing:
        raise CannotPrepare(
            f"Python {found} ({sys.executable}) lacks its module {' and '.join(missing)}, so that it cannot make a "
            f"virtual environment. On Debian and Ubuntu: apt install python{found}-venv. Then start again."
        )


def call(command: Sequence[str], failure: str, folder: Path, variables: dict[str, str] | None) -> None:
    """Run a command quietly.

    Raises
    ------
    CannotPrepare
        It returned another exit code than 0; the text ends with the last lines that it printed.
    """
    done = subprocess.run(
        command, cwd=folder, env=variables, stdin=subprocess.DEVNULL, stdout=subprocess.PIPE, stderr=subprocess.STDOUT,
        encoding="utf-8", errors="replace", check=False,
    )  # fmt: skip
    if done.returncode:
        last = "\n".join("    " + line for line in done.stdout.strip().splitlines()[-LINES_SHOWN:])
        raise CannotPrepare(
            f"{failure} (exit code {done.returncode}). Its last lines:\n{last}\nMend that, then start again."
        )


@contextmanager
def locked(path: Path) -> Iterator[None]:
    """Hold a lock that ends with the process at the latest, waiting for any other process that holds it."""
    with path.open("a+b") as file:
        if sys.platform == "win32":
            import msvcrt

            file.seek(0)
            while True:
                try:
                    msvcrt.locking(file.fileno(), msvcrt.LK_LOCK, 1)  # gives up after ten seconds
                    break
                except OSError:
                    continue
        else:
            import fcntl

            try:
                fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except BlockingIOError:
                say("Another start is preparing the environment; waiting for it ...")
                fcntl.flock(file, fcntl.LOCK_EX)
        yield  # closing the file gives the lock back


def say(text: str) -> None:
    """Print one line at once."""
    print(text, flush=True)


def prepared(extras: Iterable[str] = ()) -> Environment:
    """Return the project's environment, ready for use, or leave with exit code 2 and say why not."""
    environment = Environment()
    try:
        environment.prepare(extras)
    except CannotPrepare as problem:
        print(problem, file=sys.stderr)
        sys.exit(2)
    except KeyboardInterrupt:
        print("Stopped; the next start begins again where needed.", file=sys.stderr)
        sys.exit(130)
    return environment
