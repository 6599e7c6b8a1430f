"""Read spectra from files, whatever their format."""

import glob
import io
import os
import re
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any, BinaryIO

from quant.checks import name_some
from quant.errors import AxisMismatchError, FileFormatError, ParameterError, QuantError, QuantityError
from quant.files import read_bytes
from quant.readers.archive import is_zip, members_of
from quant.readers.options import FIRST_LINES, HEAD, LARGEST_HEAD, ReadingOptions
from quant.readers.registry import READERS, Reader
from quant.spectra.spectra_set import SpectraSet, join_spectra

PathLike = str | os.PathLike[str]


def read_spectra(
    paths: PathLike | Iterable[PathLike], options: ReadingOptions | None = None, **keywords: Any
) -> SpectraSet:
    """Read spectra from files and put them on one axis.

    Parameters
    ----------
    paths : str, path, or sequence of them
        Files, patterns (``spectra/*.dx``), folders, or zip archives. Of a folder or an archive every file is read that
        a reader recognises; hidden files, workbooks and archives in it are left out. Files are read in natural order
        (2 before 10), each once.
    options : ReadingOptions, optional
        What the files leave unsaid.
    **keywords
        Fields of `ReadingOptions`, instead of `options` or on top of them.

    Returns
    -------
    SpectraSet
        Every spectrum has a note ``file`` (a member of an archive as ``archive.zip/folder/member``). The note
        ``reader`` says how a table was understood and why, or where a file departs from its format.

    Raises
    ------
    FileFormatError
        No file found, or a file that is damaged or of no known format.
    AxisMismatchError, QuantityError
        Files that do not fit each other, or not the options.
    ParameterError
        Options that are wrong.
    """
    chosen = _options(options, keywords)
    read = [pair for file in find_files(paths, chosen.format) for pair in _read_file(file, chosen)]
    return _join([file for file, _ in read], [spectra for _, spectra in read], chosen.resample)


def find_files(paths: PathLike | Iterable[PathLike], file_format: str = "auto") -> list[Path]:
    """Return the files that `paths` mean (see `read_spectra`), in natural order, each once.

    Raises
    ------
    FileFormatError
        A path, pattern or folder that gives no file.
    ParameterError
        No path at all.
    """
    listed = [paths] if isinstance(paths, str | os.PathLike) else list(paths)
    if not listed:
        raise ParameterError("No path given; expected files, patterns or folders.")
    files = [file for path in listed for file in _matches(os.fspath(path), file_format)]
    return sorted(dict.fromkeys(files), key=_natural)


def _options(options: ReadingOptions | None, keywords: dict[str, Any]) -> ReadingOptions:
    if options is None:
        return ReadingOptions.from_dict(keywords)
    ReadingOptions.from_dict(keywords)  # names an unknown keyword
    return replace(options, **keywords)


def _natural(path: Path) -> list[list[object]]:
    """Sort key: numbers in names count as numbers."""
    parts = [re.split(r"(\d+)", part.lower()) for part in path.parts]
    return [[*(int(word) if i % 2 else word for i, word in enumerate(part))] for part in parts] + [[str(path)]]


def _matches(path: str, file_format: str) -> Sequence[Path]:
    target = Path(path)
    if target.is_dir():
        return _in_folder(target, file_format)
    if target.exists() or not glob.has_magic(path):
        return [target]  # a file that is not there is refused when it is read
    found = glob.glob(path, recursive=True)  # noqa: PTH207  leaves hidden files out, unlike Path.glob
    files = [Path(name) for name in found if Path(name).is_file()]
    if not files:
        raise FileFormatError(path, f"no file matches this pattern; {_inventory(target.parent)}")
    return files


def _in_folder(folder: Path, file_format: str) -> list[Path]:
    present = [file for file in folder.iterdir() if file.is_file() and not file.name.startswith(".")]
    files = [file for file in present if _reader_inside(file.name, _head(file), file_format) is not None]
    if not files:
        raise FileFormatError(folder, f"no file in this folder is recognised as spectra; {_inventory(folder)}")
    return files


def _inventory(folder: Path) -> str:
    """Say what a folder holds."""
    if not folder.is_dir():
        return f"there is no folder {str(folder)!r}. Check the path (recipes count paths from their own folder)."
    names = sorted(file.name for file in folder.iterdir() if not file.name.startswith("."))
    return f"the folder holds {name_some(names) if names else 'nothing'}. Check the path and the names."


def _head(file: Path) -> bytes:
    try:
        with file.open("rb") as stream:
            return _head_of(stream)
    except OSError:
        return b""  # recognised by its name if at all; reading it then says what is wrong


def _head_of(stream: BinaryIO) -> bytes:
    """Return the first bytes of a file, and more where its first lines are longer."""
    head = stream.read(HEAD)
    while head.count(b"\n") < FIRST_LINES and len(head) < LARGEST_HEAD and (more := stream.read(HEAD)):
        head += more
    return head


def _reader_of(name: str, head: bytes, file_format: str) -> Reader | None:
    candidates = [reader for reader in READERS if file_format in ("auto", reader.name)]
    return next((reader for reader in candidates if reader.recognises(head, name)), None)


def _reader_inside(name: str, head: bytes, file_format: str) -> Reader | None:
    """Return the reader of a file in a folder or archive, or None if it is left out."""
    reader = _reader_of(name, head, file_format)
    return None if reader is None or (file_format == "auto" and not reader.in_folders) else reader


def _read_file(file: Path, options: ReadingOptions) -> Iterator[tuple[Path, SpectraSet]]:
    """Yield the spectra of a file, or of every member of an archive."""
    content = read_bytes(file)
    reader = _reader_of(file.name, _head_of(io.BytesIO(content)), options.format)
    if reader is None and is_zip(content):
        yield from _read_archive(file, content, options)
        return
    if reader is None and options.format != "auto":
        reader = next(each for each in READERS if each.name == options.format)
    if reader is None:
        raise FileFormatError(
            file,
            f"of no known format; expected one of {', '.join(reader.name for reader in READERS)}. "
            f"{_reason(file, content, options)}Name it as format to learn what is wrong with it.",
        )
    yield file, _named(reader.read(file, content, options), options, file.name)


def _reason(file: Path, content: bytes, options: ReadingOptions) -> str:
    """Say why a text is no table of spectra."""
    try:
        next(reader for reader in READERS if reader.name == "matrix").read(file, content, options)
    except QuantError as problem:
        return f"As a table: {str(problem).removeprefix(f'{file}: ').removeprefix(f'{file}, ')} "
    return ""


def _read_archive(file: Path, content: bytes, options: ReadingOptions) -> Iterator[tuple[Path, SpectraSet]]:
    left_out, n_read = [], 0
    for name, data in sorted(members_of(file, content), key=lambda member: _natural(Path(member[0]))):
        reader = _reader_inside(Path(name).name, _head_of(io.BytesIO(data)), options.format)
        if reader is None:
            left_out.append(name)
            continue
        place = file / name
        if not data:
            raise FileFormatError(place, "the file is empty; expected content. Fetch or export it again.")
        spectra = reader.read(place, data, options)
        shown = f"{file.name}/{name}"
        sources = tuple(replace(source, name=shown) for source in spectra.sources)
        yield place, _named(replace(spectra, sources=sources), options, shown)
        n_read += 1
    if not n_read:
        holds = name_some(left_out) if left_out else "nothing"
        raise FileFormatError(file, f"no file in this archive is recognised as spectra; it holds {holds}.")


def _named(spectra: SpectraSet, options: ReadingOptions, name: str) -> SpectraSet:
    return replace(spectra, notes=tuple({**options.notes, **row, "file": name} for row in spectra.notes))


def _join(files: Sequence[Path], sets: Sequence[SpectraSet], resample: bool) -> SpectraSet:  # noqa: FBT001
    try:
        return join_spectra(sets, resample=resample)
    except (AxisMismatchError, QuantityError):
        for file, spectra in zip(files, sets, strict=True):
            try:
                join_spectra([sets[0], spectra], resample=resample)
            except (AxisMismatchError, QuantityError) as problem:
                raise type(problem)(f"{file}: {problem} The first file is {files[0]}.") from None
        raise
