"""Reader and writer of one spectrum a file: two columns of numbers, position and ordinate."""

import re
from itertools import chain
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import one_of
from quant.errors import FileFormatError, ParameterError
from quant.files import decode_text, write_text
from quant.readers import delimited, naming
from quant.readers.matrix import decode_head, number_texts, table_text
from quant.readers.options import DECIMALS, SEPARATORS, ReadingOptions
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import source_of
from quant.spectra.spectra_set import SpectraSet

_NOT_PLAIN = re.compile(r"[^0-9+\-.eE \t]")


def recognises_two_columns(head: bytes, file_name: str) -> bool:  # noqa: ARG001  the table of readers calls all alike
    """Tell whether a file holds, after lines of text, lines of two numbers and nothing else. Never raises."""
    lines = decode_head(head).split("\n")
    for decimal in DECIMALS:
        start = _first_pair(lines, decimal, None)
        if start is not None:
            separator = delimited.separator_of(lines[start], decimal)
            return all(
                _is_pair(line, separator, decimal) for line in lines[start:-1] if line.strip()
            )  # the last may be cut
    return False


def read_two_columns(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read one spectrum: lines of text, perhaps the names of the two columns, then position and ordinate a line.

    Raises
    ------
    FileFormatError
        A line that is not two numbers; file and line, what was found and what was expected.
    ParameterError
        A way of finding the sample ID that is made for other formats.
    """
    if options.sample_column is not None or options.sample_label is not None:
        raise ParameterError(
            f"{path.name} holds one spectrum in two columns, where sample_column and sample_label find no sample ID; "
            "use sample_pattern, or name the files by their samples."
        )
    lines = decode_text(path, content).replace("\r\n", "\n").replace("\r", "\n").split("\n")
    start = _first_pair(lines, options.decimal, options.separator)
    if start is None:
        raise FileFormatError(path, _no_pairs(lines, options))
    separator = delimited.separator_of(lines[start], options.decimal, options.separator)
    positions, ordinates = _numbers(path, lines, start, separator, options.decimal)
    unit, quantity = _names(next((line for line in reversed(lines[:start]) if line.strip()), ""), separator)
    try:
        axis = SpectralAxis(positions, naming.agreed_axis_unit(path, unit, options))
    except ParameterError as problem:
        raise FileFormatError(path, f"{problem} The first column gives the axis.") from problem
    values, named = naming.as_quantity(path, ordinates[np.newaxis], naming.agreed_quantity(path, quantity, options))
    notes = naming.from_file_name(path, options)
    sample = notes.pop("sample", path.stem)
    return SpectraSet(values, axis, [sample], named, [notes], [source_of(path, content)])


def write_two_columns(spectra: SpectraSet, path: str | Path, separator: str = ",", decimal: str = ".") -> None:
    """Write one spectrum as two columns under their names; numbers read back to the same double.

    The sample ID is not in the file: name the file by it.

    Raises
    ------
    ParameterError
        More than one spectrum, or one sign for two purposes.
    """
    one_of("separator", separator, SEPARATORS)
    one_of("decimal", decimal, DECIMALS)
    if separator == decimal:
        raise ParameterError(f"separator and decimal are both {decimal!r}; expected two different signs.")
    if len(spectra) != 1:
        raise ParameterError(f"{len(spectra)} spectra; expected one. Write several with write_matrix.")
    columns = (number_texts(spectra.axis.values, decimal), number_texts(spectra.values[0], decimal))
    table = [[spectra.axis.unit, spectra.quantity], *(list(pair) for pair in zip(*columns, strict=True))]
    write_text(path, table_text(table, separator))


def _first_pair(lines: list[str], decimal: str, given: str | None) -> int | None:
    """Return the first of two lines that are pairs of numbers: a lone pair may be part of the text above."""
    pairs = (
        (i, _is_pair(line, delimited.separator_of(line, decimal, given), decimal))
        for i, line in enumerate(lines)
        if line.strip()
    )
    before: int | None = None
    for number, is_pair in pairs:
        if is_pair and before is not None:
            return before
        before = number if is_pair else None
    return None


def _is_pair(line: str, separator: str, decimal: str) -> bool:
    cells = delimited.split_line(line, separator)
    return len(cells) == 2 and all(_number(cell, decimal) is not None for cell in cells)


def _number(cell: str, decimal: str) -> float | None:
    number = delimited.number_from(cell, decimal)
    return float("nan") if number is None and cell.lower() == "nan" else number


def _numbers(path: Path, lines: list[str], start: int, separator: str, decimal: str) -> FloatArray:
    """Return the two columns from line `start` on, shape (2, n_points)."""
    rows = [line.split(None if separator == " " else separator) for line in lines[start:] if line.strip()]
    together = "".join(chain.from_iterable(rows))
    if decimal == "." and not _NOT_PLAIN.search(together) and all(len(row) == 2 for row in rows):
        try:
            return np.array(list(map(float, chain.from_iterable(rows)))).reshape(-1, 2).T
        except ValueError:
            pass  # read again below, line by line, to name the one that is wrong
    kept = [(number, line) for number, line in enumerate(lines[start:], start + 1) if line.strip()]
    return np.array([_pair(path, number, line, separator, decimal) for number, line in kept]).T


def _pair(path: Path, number: int, line: str, separator: str, decimal: str) -> tuple[float, float]:
    cells = delimited.split_line(line, separator)
    if len(cells) != 2:
        raise FileFormatError(
            path,
            f"found {len(cells)} cell(s), {line.strip()[:40]!r}; expected two numbers: position, ordinate.",
            line=number,
        )
    values = [_number(cell, decimal) for cell in cells]
    for cell, value in zip(cells, values, strict=True):
        if value is None:
            raise FileFormatError(path, delimited.not_a_number(cell, decimal, "where a number should be"), line=number)
    return values[0], values[1]  # type: ignore[return-value]  # None was refused above


def _no_pairs(lines: list[str], options: ReadingOptions) -> str:
    """Say why no data were found; if the other decimal sign finds them, name it."""
    other = "," if options.decimal == "." else "."
    given = None if options.separator == other else options.separator
    start = _first_pair(lines, other, given)
    if start is not None:
        return f'line {start + 1} is {lines[start].strip()[:40]!r}: set decimal = "{other}".'
    return (
        "no two lines of two numbers each; expected position and ordinate a line. Check the separator and the export."
    )


def _names(line: str, separator: str) -> tuple[str | None, str | None]:
    """Return axis unit and ordinate named in the line above the numbers."""
    cells = [cell.strip('"') for cell in delimited.split_line(line, separator)]
    if len(cells) != 2:
        return None, None
    return naming.axis_unit_in(cells[0]), naming.quantity_in(cells[1])
