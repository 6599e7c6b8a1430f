"""Damaged files of every format: each gives spectra (or reference values) or an error of ours, soon, in little memory.

Valid files are damaged at random in the ways that files are: bytes flipped, inserted or lost, lines cut, doubled,
joined or exchanged, the end missing. The short run is part of the suite; the long one reads 100 000.
"""

import random
import resource
import signal
import zipfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from datetime import date
from io import BytesIO
from pathlib import Path
from types import FrameType

import numpy as np
import openpyxl
import pytest

from quant.errors import QuantError
from quant.readers.jcamp_dx.encode import FORMS
from quant.readers.jcamp_dx.writer import write_jcamp_dx
from quant.readers.matrix import write_matrix
from quant.readers.read import read_spectra
from quant.readers.reference_csv import ColumnOf, read_reference
from quant.readers.two_columns import write_two_columns
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.spectra_set import SpectraSet

SEED = 20261201
LONGEST = 2.0  # s of processor time for one file
MOST_MEMORY = 300 * 2**20  # bytes that the process may grow by

Mutation = Callable[[bytes, random.Random], bytes]


def flip_bytes(content: bytes, rng: random.Random) -> bytes:
    changed = bytearray(content)
    for _ in range(rng.choice((1, 1, 2, 8))):
        changed[rng.randrange(len(changed))] = rng.randrange(256)
    return bytes(changed)


def flip_one_bit(content: bytes, rng: random.Random) -> bytes:
    changed = bytearray(content)
    changed[rng.randrange(len(changed))] ^= 1 << rng.randrange(8)
    return bytes(changed)


def insert(content: bytes, rng: random.Random) -> bytes:
    place = rng.randrange(len(content) + 1)
    pieces = (
        b"\x00",
        b"\n",
        b"\r",
        b'"',
        b",",
        b";",
        b"\t",
        b" ",
        b"#",
        b"##",
        b"$$",
        b"1e999",
        b"9" * 400,
        b"-",
        b"=",
    )
    piece = rng.choice((*pieces, b"nan", b"inf", b"\xff\xfe", b"\xef\xbb\xbf", rng.randbytes(rng.randrange(1, 9))))
    return content[:place] + piece + content[place:]


def lose_bytes(content: bytes, rng: random.Random) -> bytes:
    place = rng.randrange(len(content))
    return content[:place] + content[place + rng.choice((1, 1, 2, 20)) :]


def truncate(content: bytes, rng: random.Random) -> bytes:
    return content[: rng.randrange(len(content))]


def cut_line(content: bytes, rng: random.Random) -> bytes:
    return _with_lines(content, lambda lines, i: [lines[i][: rng.randrange(len(lines[i]) + 1)]], rng)


def drop_line(content: bytes, rng: random.Random) -> bytes:
    return _with_lines(content, lambda lines, i: [], rng)


def double_line(content: bytes, rng: random.Random) -> bytes:
    return _with_lines(content, lambda lines, i: [lines[i]] * rng.choice((2, 2, 200)), rng)


def join_lines(content: bytes, rng: random.Random) -> bytes:
    lines = content.split(b"\n")
    place = rng.randrange(len(lines))
    return (
        b"\n".join(lines[:place]) + b"\n" + b"".join(lines[place : place + 2]) + b"\n" + b"\n".join(lines[place + 2 :])
    )


def exchange_lines(content: bytes, rng: random.Random) -> bytes:
    other = rng.choice(content.split(b"\n"))
    return _with_lines(content, lambda lines, i: [other], rng)


def copy_block(content: bytes, rng: random.Random) -> bytes:
    start, place = rng.randrange(len(content)), rng.randrange(len(content))
    return content[:place] + content[start : start + rng.randrange(1, 400)] + content[place:]


def _with_lines(content: bytes, change: Callable[[list[bytes], int], list[bytes]], rng: random.Random) -> bytes:
    lines = content.split(b"\n")
    place = rng.randrange(len(lines))
    return b"\n".join([*lines[:place], *change(lines, place), *lines[place + 1 :]])


MUTATIONS: tuple[Mutation, ...] = (
    flip_bytes,
    flip_one_bit,
    insert,
    lose_bytes,
    truncate,
    cut_line,
    drop_line,
    double_line,
    join_lines,
    exchange_lines,
    copy_block,
)


def in_zip(content: bytes, change: Callable[[bytes], bytes]) -> bytes:
    """Damage the members of an archive and pack them again, so that what is read behind the check sums is damaged."""
    stream = BytesIO()
    with zipfile.ZipFile(BytesIO(content)) as before, zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as after:
        for member in before.infolist():
            after.writestr(member.filename, change(before.read(member)))
    return stream.getvalue()


def mutated(content: bytes, rng: random.Random) -> bytes:
    """Return damaged content: one mutation, sometimes more."""
    for _ in range(rng.choice((1, 1, 1, 2, 5))):
        mutation = rng.choice(MUTATIONS)
        if not content:
            break
        content = mutation(content, rng)
    return content


def damaged(content: bytes, name: str, rng: random.Random) -> bytes:
    """Return a damaged file."""
    if not name.endswith((".zip", ".xlsx")) or rng.random() < 0.4:
        return mutated(content, rng)
    return in_zip(content, lambda member: mutated(member, rng) if member and rng.random() < 0.3 else member)


@pytest.fixture(scope="module")
def valid_files(tmp_path_factory: pytest.TempPathFactory) -> dict[str, bytes]:
    """Files of every format, each of which reads without an error."""
    folder = tmp_path_factory.mktemp("valid")
    axis = np.linspace(1800, 1700, 51)
    values = 0.1 + np.exp(-(((axis - np.array([[1740], [1745], [1750]])) / 8) ** 2))
    notes = [{"batch": f"B{i}", "date": "2026-11-30", "resolution": "4"} for i in range(3)]
    spectra = SpectraSet(values, SpectralAxis(axis, "cm-1"), ["S1", "S2", "S2"], notes=notes)
    for form in FORMS:
        write_jcamp_dx(spectra[:1], folder / f"{form}.dx", form)
    for number, (separator, decimal) in enumerate([(",", "."), (";", ","), ("tab", ","), ("space", ".")]):
        write_matrix(spectra, folder / f"matrix{number}.csv", separator, decimal)
        write_two_columns(spectra[:1], folder / f"pairs{number}.csv", separator, decimal)
    table = [["Wavenumber (cm-1)", "S1", "S2"], *zip(axis.tolist(), *values[:2].tolist(), strict=True)]
    text = "\n".join(";".join(map(str, row)) for row in table)
    (folder / "columns.csv").write_text(f"# exported\nY units;Absorbance\n\n{text}\n".replace(".", ","), "utf-16")
    (folder / "thousands.csv").write_text("nm;%T\n" + "".join(f"{1000 + i:,d}.5;{90 - i % 7}.25\n" for i in range(40)))
    (folder / "reference.csv").write_text(
        "sample;ethanol;water;batch;date\n" + "".join(f"S{i};0,{i};{i};B{i % 3};2026-11-{i + 10}\n" for i in range(15))
    )
    with zipfile.ZipFile(folder / "archive.zip", "w", zipfile.ZIP_DEFLATED) as archive:
        for name in ("DIFDUP.dx", "pairs0.csv"):
            archive.write(folder / name, f"deeper/{name}")
    book = openpyxl.Workbook()
    book.active.append(["Measured", date(2026, 11, 30)])
    for row in table:
        book.active.append(row)
    book.save(folder / "book.xlsx")
    files = {file.name: file.read_bytes() for file in sorted(folder.iterdir())}
    for name in files:
        read_one(folder / name)
    return files


def read_one(file: Path) -> SpectraSet | ReferenceTable:
    """Read spectra or reference values."""
    if file.name.startswith("reference"):
        return read_reference(file, [ColumnOf(Analyte("ethanol")), ColumnOf(Analyte("water"))], decimal=",")
    return read_spectra(file)


@contextmanager
def processor_time(limit: float) -> Iterator[None]:
    """Raise TimeoutError where the body takes more processor time than that."""

    def stop(number: int, frame: FrameType | None) -> None:
        raise TimeoutError(f"more than {limit} s")

    before = signal.signal(signal.SIGVTALRM, stop)
    signal.setitimer(signal.ITIMER_VIRTUAL, limit)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_VIRTUAL, 0)
        signal.signal(signal.SIGVTALRM, before)


def failures(files: dict[str, bytes], folder: Path, numbers: range) -> tuple[list[str], int]:
    """Damage and read files, one a number; return what went wrong, and how many were read in spite of the damage."""
    wrong, n_read = [], 0
    names = sorted(files)
    for number in numbers:
        rng = random.Random(SEED + number)
        name = names[number % len(names)]
        file = folder / name
        file.write_bytes(damaged(files[name], name, rng))
        try:
            with processor_time(LONGEST):
                result = read_one(file)
            assert len(result) > 0
            n_read += 1
        except QuantError:
            continue
        except Exception as problem:
            wrong.append(f"{name}, number {number}: {type(problem).__name__}: {problem}")
    return wrong, n_read


def check(files: dict[str, bytes], folder: Path, numbers: range) -> None:
    """Damage and read files, and look at what the process has grown by."""
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024
    wrong, n_read = failures(files, folder, numbers)
    grown = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024 - before
    assert not wrong, f"{len(wrong)} of {len(numbers)}:\n" + "\n".join(wrong[:20])
    assert 0.05 * len(numbers) < n_read < 0.95 * len(numbers), "the damage is too small or too large to test anything"
    assert grown < MOST_MEMORY


@pytest.mark.parametrize("start", range(0, 2000, 250))
def test_damaged_files_are_read_or_refused(start: int, valid_files: dict[str, bytes], tmp_path: Path) -> None:
    check(valid_files, tmp_path, range(start, start + 250))


@pytest.mark.long
def test_many_damaged_files_are_read_or_refused(valid_files: dict[str, bytes], tmp_path: Path) -> None:
    check(valid_files, tmp_path, range(100_000))


def test_a_reader_that_hangs_or_fails_is_seen(
    valid_files: dict[str, bytes], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def spin(file: Path) -> None:
        while True:
            pass

    with pytest.raises(TimeoutError), processor_time(0.05):
        spin(tmp_path)
    monkeypatch.setitem(globals(), "read_one", lambda file: [][0])
    assert len(failures(valid_files, tmp_path, range(3))[0]) == 3
