"""Zip archives as folders of files: members in memory, within limits, never written to disk."""

import struct
import zipfile
import zlib
from collections.abc import Iterator
from io import BytesIO
from lzma import LZMAError
from pathlib import Path, PurePosixPath

from quant.errors import FileFormatError
from quant.files import LARGEST_FILE

MOST_MEMBERS = 10_000
SUSPICIOUS_SIZE = 16 * 2**20  # bytes; below it any compression is harmless
LARGEST_RATIO = 100  # spectra as text shrink three- to tenfold, workbooks up to fiftyfold

# What the standard library raises on damaged archives, a method of compression that it does not know, or a password.
_DAMAGE = (zipfile.BadZipFile, zlib.error, LZMAError, struct.error, OSError, EOFError, RuntimeError, ValueError)


def is_zip(head: bytes) -> bool:
    """Tell whether a file starts like a zip archive (workbooks do, too)."""
    return head.startswith((b"PK\x03\x04", b"PK\x05\x06"))


def open_archive(path: Path, content: bytes) -> zipfile.ZipFile:
    """Open an archive after a look at its directory.

    Raises
    ------
    FileFormatError
        Damaged, too many members, members that unpack to more than `quant.files.LARGEST_FILE` bytes together or to a
        hundred times their packed size, or a password.
    """
    try:
        archive = zipfile.ZipFile(BytesIO(content))
        members = archive.infolist()
    except _DAMAGE as problem:
        raise _damaged(path, problem) from problem
    if len(members) > MOST_MEMBERS:
        raise FileFormatError(path, f"{len(members)} members; expected at most {MOST_MEMBERS}. Split the archive.")
    total = sum(member.file_size for member in members)
    if total > LARGEST_FILE:
        raise FileFormatError(
            path,
            f"it unpacks to {total / 2**20:.0f} MiB; expected at most {LARGEST_FILE / 2**20:.0f} MiB. "
            "Split the archive.",
        )
    for member in members:
        if member.flag_bits & 1:
            raise FileFormatError(
                path, f"member {member.filename!r} needs a password; expected an open archive. Unpack it yourself."
            )
        if member.file_size > max(SUSPICIOUS_SIZE, LARGEST_RATIO * member.compress_size):
            raise FileFormatError(
                path,
                f"member {member.filename!r} unpacks to {member.file_size / 2**20:.0f} MiB, over {LARGEST_RATIO} times "
                "its packed size; expected spectra. Unpack it yourself if it is right.",
            )
    return archive


def members_of(path: Path, content: bytes) -> Iterator[tuple[str, bytes]]:
    """Yield names and contents of the files in an archive, as a folder would show them: without hidden ones.

    Raises
    ------
    FileFormatError
        See `open_archive`; or a member that is damaged or longer than the directory says.
    """
    with open_archive(path, content) as archive:
        for member in archive.infolist():
            parts = PurePosixPath(member.filename).parts
            if member.is_dir() or any(part.startswith((".", "__MACOSX", "~$")) for part in parts):
                continue
            try:
                with archive.open(member) as stream:
                    data = stream.read(member.file_size + 1)
            except _DAMAGE as problem:
                raise _damaged(path, problem, member.filename) from problem
            if len(data) != member.file_size:
                raise _damaged(path, "its length is not the one stated", member.filename)
            yield member.filename, data


def _damaged(path: Path, problem: object, member: str = "") -> FileFormatError:
    place = f"member {member!r}" if member else "the archive"
    return FileFormatError(path, f"{place} is damaged or packed in an unknown way ({problem}). Fetch or pack it again.")
