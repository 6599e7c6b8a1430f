"""Where spectra and values came from."""

from dataclasses import dataclass
from pathlib import Path

from quant.files import fingerprint, read_bytes


@dataclass(frozen=True)
class Source:
    """One file that data were read from: its name, size in bytes, and the SHA-256 of its content."""

    name: str
    size: int
    sha256: str


def source_of(path: str | Path, content: bytes | None = None) -> Source:
    """Return name, size and fingerprint of a file (read it unless its `content` is at hand)."""
    data = read_bytes(path) if content is None else content
    return Source(Path(path).name, len(data), fingerprint(data))
