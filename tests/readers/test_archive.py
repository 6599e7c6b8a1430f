"""Zip archives as folders."""

import struct
import zipfile
from io import BytesIO
from pathlib import Path

import pytest

from quant.errors import FileFormatError
from quant.readers import archive
from quant.readers.archive import is_zip, members_of
from quant.readers.read import read_spectra


def pair(value: float) -> str:
    return f"nm,absorbance\n900,{value}\n902,0.5\n"


def zipped(members: dict[str, str | bytes], method: int = zipfile.ZIP_DEFLATED) -> bytes:
    stream = BytesIO()
    with zipfile.ZipFile(stream, "w", method) as packed:
        for name, content in members.items():
            packed.writestr(name, content)
    return stream.getvalue()


@pytest.fixture
def file(tmp_path: Path) -> Path:
    """An archive with S1, S2, S10 in two folders and other things."""
    members = {f"run {n % 2}/S{n}.csv": pair(n / 10) for n in (10, 1, 2)}
    others = {
        "README.md": "No spectrum.",
        ".hidden.csv": pair(7),
        "__MACOSX/S1.csv": pair(8),
        "run 0/.x/S.csv": pair(9),
    }
    path = tmp_path / "july.zip"
    path.write_bytes(zipped({**members, **others, "inner.zip": zipped({"S9.csv": pair(9)}), "folder/": b""}))
    return path


def test_members_are_read_like_a_folder_in_natural_order(file: Path) -> None:
    spectra = read_spectra(file)
    assert spectra.sample_ids == ("S2", "S10", "S1")  # run 0 comes before run 1
    assert spectra.values[:, 0].tolist() == [0.2, 1.0, 0.1]
    names = ["july.zip/run 0/S2.csv", "july.zip/run 0/S10.csv", "july.zip/run 1/S1.csv"]
    assert [row["file"] for row in spectra.notes] == names
    assert [source.name for source in spectra.sources] == names
    assert all(source.size == 30 for source in spectra.sources if "S10" not in source.name)


def test_a_pattern_finds_sample_ids_and_notes_in_names_of_members(file: Path) -> None:
    spectra = read_spectra(file, sample_pattern=r"S(?P<sample>\d)(?P<Day>\d?)")
    assert spectra.sample_ids == ("2", "1", "1")
    assert spectra.notes[1]["day"] == "0"


def test_patterns_match_archives_and_folders_leave_them_alone(file: Path) -> None:
    (file.parent / "S3.csv").write_text(pair(0.3))
    assert len(read_spectra(file.parent / "*.zip")) == 3
    assert read_spectra(file.parent).sample_ids == ("S3",)


def test_a_damaged_member_is_named(tmp_path: Path) -> None:
    file = tmp_path / "a.zip"
    file.write_bytes(zipped({"deeper/S1.csv": "sample,900,902\nS1,0.1\n"}))
    with pytest.raises(FileFormatError, match=r"a\.zip/deeper/S1\.csv, line 2: found 2 cells"):
        read_spectra(file)
    file.write_bytes(zipped({"S1.dx": b""}))
    with pytest.raises(FileFormatError, match=r"a\.zip/S1\.dx: the file is empty"):
        read_spectra(file)


def test_nothing_in_it_says_what_it_holds(tmp_path: Path) -> None:
    (tmp_path / "a.zip").write_bytes(zipped({"README.md": "text"}))
    with pytest.raises(FileFormatError, match=r"recognised as spectra; it holds README\.md"):
        read_spectra(tmp_path / "a.zip")
    (tmp_path / "a.zip").write_bytes(zipped({}))
    with pytest.raises(FileFormatError, match="it holds nothing"):
        read_spectra(tmp_path / "a.zip")


def test_damage_and_passwords_are_refused(tmp_path: Path) -> None:
    file = tmp_path / "a.zip"
    content = zipped({"S1.csv": pair(0.1)}, zipfile.ZIP_STORED)
    file.write_bytes(content[:-10])
    with pytest.raises(FileFormatError, match="the archive is damaged"):
        read_spectra(file)
    file.write_bytes(content.replace(b"902,0.5", b"902,0.6"))
    with pytest.raises(FileFormatError, match=r"member 'S1\.csv' is damaged .*CRC"):
        read_spectra(file)
    directory = content.index(b"PK\x01\x02")
    locked = bytearray(content)
    locked[directory + 8] |= 1  # flag "encrypted" in the directory's record
    file.write_bytes(bytes(locked))
    with pytest.raises(FileFormatError, match="needs a password"):
        read_spectra(file)


def test_bombs_are_refused_before_they_are_unpacked(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    bomb = zipped({"S1.csv": b"0" * (17 * 2**20)})
    assert len(bomb) < 2**15
    with pytest.raises(FileFormatError, match="unpacks to 17 MiB, over 100 times"):
        list(members_of(Path("a.zip"), bomb))
    monkeypatch.setattr(archive, "LARGEST_FILE", 100)
    with pytest.raises(FileFormatError, match="expected at most"):
        list(members_of(Path("a.zip"), zipped({f"{i}.csv": "0" * 60 for i in range(2)})))
    monkeypatch.setattr(archive, "MOST_MEMBERS", 2)
    with pytest.raises(FileFormatError, match="3 members; expected at most 2"):
        list(members_of(Path("a.zip"), zipped({f"{i}.csv": "0" for i in range(3)})))


def test_a_member_longer_than_its_directory_says_is_refused() -> None:
    content = bytearray(zipped({"S1.csv": b"0" * 2**20}))
    directory = content.index(b"PK\x01\x02")
    content[directory + 24 : directory + 28] = struct.pack("<I", 100)  # uncompressed size
    with pytest.raises(FileFormatError, match="damaged"):
        list(members_of(Path("a.zip"), bytes(content)))


def test_archives_are_told_by_their_first_bytes() -> None:
    assert is_zip(zipped({}))
    assert is_zip(zipped({"a": "b"}))
    assert not is_zip(b"PK")
