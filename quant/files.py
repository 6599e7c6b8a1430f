"""Reading within limits and writing whole or not at all."""

import hashlib
import os
import time
from collections.abc import Iterable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import BinaryIO

from quant.errors import FileFormatError, UsageError

LARGEST_FILE = 512 * 2**20  # bytes; a spectra file beyond this is a mistake, not a measurement


def read_bytes(path: str | Path, limit: int = LARGEST_FILE) -> bytes:
    """Return the content of a file.

    Raises
    ------
    FileFormatError
        No such file, a folder, not readable, empty, or larger than `limit` bytes.
    """
    file = Path(path)
    try:
        size = file.stat().st_size
        if size > limit:
            raise FileFormatError(
                file, f"{size / 2**20:.0f} MiB; expected at most {limit / 2**20:.0f} MiB. Split the file."
            )
        content = file.read_bytes()
    except FileFormatError:
        raise
    except FileNotFoundError:
        raise FileFormatError(
            file, "no such file. Check the path (recipes count paths from their own folder)."
        ) from None
    except OSError as problem:
        raise FileFormatError(file, f"cannot be read ({problem.strerror}); expected a readable file.") from problem
    if not content:
        raise FileFormatError(file, "the file is empty; expected content. Fetch or export it again.")
    return content


def fingerprint(content: bytes) -> str:
    """Return the SHA-256 of some bytes as hexadecimal text."""
    return hashlib.sha256(content).hexdigest()


def decode_text(path: str | Path, content: bytes) -> str:
    """Return text from bytes: UTF-8 (a byte-order mark is dropped), UTF-16 with a mark, else Latin-1.

    Raises
    ------
    FileFormatError
        The bytes are no text (they hold NUL characters).
    """
    if content[:2] in (b"\xff\xfe", b"\xfe\xff"):
        return content.decode("utf-16", errors="replace")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = content.decode("latin-1")  # every byte has a meaning there, so this cannot fail
    if "\x00" in text:
        raise FileFormatError(path, "binary content; expected a text file. Export the spectrum as JCAMP-DX or text.")
    return text


def refuse_overwriting(option: str, target: str | Path, read: Iterable[str | Path]) -> None:
    """Refuse to write over a file that was read.

    Parameters
    ----------
    option : str
        What named the target, such as ``--out``.
    target : str or Path
    read : iterable of str or Path

    Raises
    ------
    UsageError
        The target is one of those files.
    """
    place = Path(target).resolve()
    if any(Path(file).resolve() == place for file in read):
        raise UsageError(f"{option} {target}: this file is read by the command and would be lost. Name another file.")


def require_writable(folder: str | Path) -> None:
    """Refuse a folder that cannot be written to, before long work is done for it; nothing is left there.

    Raises
    ------
    UsageError
        The folder, or the nearest one above it that exists, cannot be written to.
    """
    target = Path(folder)
    there = next((place for place in (target, *target.resolve().parents) if place.exists()), target)
    trial = there / f".{os.getpid()}-{time.monotonic_ns()}"
    try:
        trial.mkdir()
        trial.rmdir()
    except OSError as problem:
        raise UsageError(
            f"{target} cannot be written to ({problem.strerror}); expected a folder that may be. Choose another place."
        ) from problem


@contextmanager
def whole_file(path: str | Path) -> Iterator[BinaryIO]:
    """Write a file whole or not at all: to a neighbour first, then renamed over the target.

    Whatever goes wrong before the end leaves the old file as it was.

    Raises
    ------
    UsageError
        The file cannot be written there.
    """
    target = Path(path)
    neighbour = target.with_name(f".{target.name}.{os.getpid()}-{time.monotonic_ns()}")
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        with neighbour.open("xb") as stream:
            yield stream
            stream.flush()
            os.fsync(stream.fileno())
        neighbour.replace(target)
    except BaseException as problem:
        with suppress(OSError):  # it may never have come into being
            neighbour.unlink()
        if isinstance(problem, OSError):
            raise UsageError(
                f"{target} cannot be written ({problem.strerror}); expected a folder that may be written to. "
                "Choose another place."
            ) from problem
        raise


def write_text(path: str | Path, text: str) -> None:
    """Write UTF-8 text whole or not at all."""
    with whole_file(path) as stream:
        stream.write(text.encode("utf-8"))
