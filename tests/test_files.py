"""Reading within limits, writing whole or not at all."""

import stat
from pathlib import Path

import pytest

from quant.errors import FileFormatError, UsageError
from quant.files import (
    decode_text,
    fingerprint,
    read_bytes,
    refuse_overwriting,
    require_writable,
    whole_file,
    write_text,
)


def test_content_within_the_limit(tmp_path: Path) -> None:
    file = tmp_path / "a"
    file.write_bytes(b"abc")
    assert read_bytes(file) == b"abc"
    assert read_bytes(str(file), limit=3) == b"abc"
    with pytest.raises(FileFormatError, match="expected at most"):
        read_bytes(file, limit=2)


def test_what_cannot_be_read_is_named(tmp_path: Path) -> None:
    (tmp_path / "empty").touch()
    with pytest.raises(FileFormatError, match="empty: the file is empty") as refusal:
        read_bytes(tmp_path / "empty")
    assert refusal.value.path == tmp_path / "empty"
    with pytest.raises(FileFormatError, match="no such file"):
        read_bytes(tmp_path / "none")
    with pytest.raises(FileFormatError, match="cannot be read"):
        read_bytes(tmp_path)


def test_the_fingerprint_is_sha256() -> None:
    # FIPS 180-2, appendix B.1: the digest of "abc" (from memory).
    assert fingerprint(b"abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "latin-1"])
def test_text_in_any_of_the_encodings(encoding: str) -> None:
    assert decode_text("a", "Müller µm\n".encode(encoding)) == "Müller µm\n"


def test_binary_content_is_refused() -> None:
    with pytest.raises(FileFormatError, match=r"a\.bin: binary content"):
        decode_text("a.bin", b"PK\x03\x04\x00\x00")


def test_writing_replaces_the_whole_file_and_makes_folders(tmp_path: Path) -> None:
    file = tmp_path / "new" / "a.txt"
    write_text(file, "first, longer\n")
    write_text(file, "µ\n")
    assert file.read_bytes() == "µ\n".encode()
    assert [path.name for path in file.parent.iterdir()] == ["a.txt"]
    plain = tmp_path / "plain"
    plain.touch()
    assert stat.S_IMODE(file.stat().st_mode) == stat.S_IMODE(plain.stat().st_mode)


def test_a_failure_half_way_leaves_the_old_file(tmp_path: Path) -> None:
    file = tmp_path / "a.txt"
    write_text(file, "old")
    with pytest.raises(TypeError), whole_file(file) as stream:
        stream.writelines([b"new, but", None])  # type: ignore[list-item]  # what goes wrong after a first write
    assert file.read_text() == "old"
    assert [path.name for path in tmp_path.iterdir()] == ["a.txt"]


def test_a_file_that_is_read_is_not_written_over(tmp_path: Path) -> None:
    (tmp_path / "in.csv").write_text("1")
    (tmp_path / "link.csv").symlink_to(tmp_path / "in.csv")
    refuse_overwriting("--out", tmp_path / "out.csv", [tmp_path / "in.csv"])
    for name in ("in.csv", "link.csv", "none/../in.csv"):
        with pytest.raises(UsageError, match=r"^--out .*in\.csv|link\.csv: this file is read by the command"):
            refuse_overwriting("--out", tmp_path / name, [tmp_path / "in.csv"])


def test_a_folder_that_cannot_be_written_to_is_refused_and_nothing_is_left(tmp_path: Path) -> None:
    require_writable(tmp_path)
    require_writable(tmp_path / "new" / "deep")
    assert list(tmp_path.iterdir()) == []
    (tmp_path / "file").write_text("1")
    for place in (tmp_path / "file", tmp_path / "file" / "deep"):
        with pytest.raises(UsageError, match=r"cannot be written to \(Not a directory\); expected a folder"):
            require_writable(place)
