"""Reader and writer of spectra as a table: one spectrum a row, the axis in the header."""

import csv
import io
from collections.abc import Sequence
from itertools import compress
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some, one_of
from quant.errors import FileFormatError, ParameterError
from quant.files import decode_text, write_text
from quant.readers import delimited, naming
from quant.readers.options import DECIMALS, SEPARATORS, STATED_QUANTITIES, ReadingOptions
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import source_of
from quant.spectra.spectra_set import SpectraSet

QUANTITY_COLUMN = "quantity"
"""A column of this name says what the ordinates are; all rows have to agree."""


def recognises_matrix(head: bytes, file_name: str) -> bool:  # noqa: ARG001  the table of readers calls all alike
    """Tell whether a file starts with a header of at least two axis positions and a text column. Never raises."""
    header = decode_head(head).lstrip("\n").partition("\n")[0]
    for decimal in DECIMALS:
        cells = delimited.split_line(header, delimited.separator_of(header, decimal))
        positions = sum(delimited.position_from(cell.strip('"'), decimal) is not None for cell in cells)
        if 2 <= positions < len(cells):
            return True
    return False


def decode_head(head: bytes) -> str:
    """Return the first bytes of a file as text with plain line ends, or nothing if they are no text."""
    try:
        return decode_text("", head).replace("\r\n", "\n").replace("\r", "\n")
    except FileFormatError:
        return ""


def read_matrix(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read a table of spectra: header cells that are numbers are axis positions, all other columns are notes.

    Raises
    ------
    FileFormatError
        A damaged row or header; file and line, what was found and what was expected.
    ParameterError
        A way of finding the sample ID that is made for one spectrum a file.
    """
    if options.sample_pattern is not None or options.sample_label is not None:
        raise ParameterError(
            f"{path.name} holds one spectrum a row, where sample_pattern and sample_label find no sample ID; "
            "name the column as sample_column."
        )
    text = decode_text(path, content)
    separator = delimited.separator_of(text.lstrip().partition("\n")[0], options.decimal, options.separator)
    rows = delimited.read_rows(path, text, separator)
    if len(rows) < 2:
        raise FileFormatError(path, f"{len(rows)} line(s); expected a header and at least one spectrum.")
    headings = [cell.strip() for cell in rows[0][1]]
    axis, is_point = _axis(path, headings, options)
    sample = delimited.sample_column_of(path, headings, options.sample_column)
    others = [place for place, point in enumerate(is_point) if not point and place != sample]
    _refuse_twice(path, [headings[place] for place in (sample, *others)])
    values = np.empty((len(rows) - 1, len(axis)))
    ids, notes = [], []
    for number, row in enumerate(rows[1:]):
        delimited.check_width(path, row, len(headings))
        line, cells = row
        ids.append(_sample_id(path, line, cells[sample], headings[sample]))
        notes.append(delimited.note_cells(cells, headings, others))
        values[number] = _ordinates(path, line, cells, headings, is_point, options.decimal)
    quantity = naming.agreed_quantity(path, _quantity(path, notes), options)
    ordinates, named = naming.as_quantity(path, values, quantity)
    return SpectraSet(ordinates, axis, ids, named, notes, [source_of(path, content)])


def write_matrix(
    spectra: SpectraSet,
    path: str | Path,
    separator: str = ",",
    decimal: str = ".",
    note_columns: Sequence[str] | None = None,
) -> None:
    """Write spectra as a table that `read_spectra` gives back: sample, notes, one column a point.

    Numbers are written so that they read back to the same double. Headers carry the unit of the axis; a column
    ``quantity`` tells ordinates other than absorbance.

    Parameters
    ----------
    spectra : SpectraSet
    path : str or path
        Written whole or not at all.
    separator : {",", ";", "tab", "space"}
    decimal : {".", ","}
    note_columns : sequence of str, optional
        The notes to write; all of them when not given.

    Raises
    ------
    ParameterError
        One sign for two purposes, or blanks as separator where a cell is empty or holds a blank.
    """
    one_of("separator", separator, SEPARATORS)
    one_of("decimal", decimal, DECIMALS)
    if separator == decimal:
        raise ParameterError(f"separator and decimal are both {decimal!r}; expected two different signs.")
    noted = (
        list(dict.fromkeys(key for row in spectra.notes for key in row)) if note_columns is None else [*note_columns]
    )
    noted = [name for name in noted if name != QUANTITY_COLUMN]
    kind = {} if spectra.quantity == "absorbance" else {QUANTITY_COLUMN: spectra.quantity}
    unit = (
        "" if spectra.axis.unit == "point" else spectra.axis.unit if separator == "space" else f" {spectra.axis.unit}"
    )
    table = [["sample", *noted, *kind, *(f"{text}{unit}" for text in number_texts(spectra.axis.values, decimal))]]
    for sample, row, values in zip(spectra.sample_ids, spectra.notes, spectra.values, strict=True):
        table.append([sample, *(row.get(name, "") for name in noted), *kind.values(), *number_texts(values, decimal)])
    write_text(path, table_text(table, separator))


def number_texts(values: FloatArray, decimal: str) -> list[str]:
    """Return numbers as the shortest text that reads back to the same double; NaN is "nan"."""
    texts = map(repr, values.tolist())
    return [text.replace(".", ",") for text in texts] if decimal == "," else list(texts)


def table_text(table: Sequence[Sequence[str]], separator: str) -> str:
    """Return rows as delimited text, cells quoted where they have to be.

    Raises
    ------
    ParameterError
        Blanks as separator where a cell is empty or holds a blank.
    """
    if separator == "space" and (broken := [cell for row in table for cell in row if len(cell.split()) != 1]):
        raise ParameterError(
            f"Cells that are empty or hold blanks ({name_some(map(repr, broken))}); use another separator."
        )
    stream = io.StringIO()
    csv.writer(stream, delimiter={"tab": "\t", "space": " "}.get(separator, separator), lineterminator="\n").writerows(
        table
    )
    return stream.getvalue()


def _axis(path: Path, headings: Sequence[str], options: ReadingOptions) -> tuple[SpectralAxis, list[bool]]:
    """Return the axis in the header, and which columns are its points."""
    found = [delimited.position_from(heading, options.decimal) for heading in headings]
    positions = [position for position in found if position is not None]
    if len(positions) < 2:
        other = "," if options.decimal == "." else "."
        swapped = sum(delimited.position_from(heading, other) is not None for heading in headings)
        advice = f'Set decimal = "{other}".' if swapped >= 2 else "Check separator and decimal."
        raise FileFormatError(
            path,
            f"{len(positions)} of {len(headings)} column headings are axis positions "
            f"({name_some(map(repr, headings))}); expected at least 2 plain numbers, with or without a unit. {advice}",
            line=1,
        )
    units = {unit for _, unit in positions}
    if len(units) > 1:
        raise FileFormatError(
            path, f"axis positions in {name_some(sorted(map(str, units)))}; expected one unit.", line=1
        )
    unit = naming.agreed_axis_unit(path, units.pop(), options)
    try:
        return SpectralAxis([value for value, _ in positions], unit), [position is not None for position in found]
    except ParameterError as problem:
        raise FileFormatError(path, f"{problem} The header gives the axis.", line=1) from problem


def _refuse_twice(path: Path, names: Sequence[str]) -> None:
    if twice := sorted({name for name in names if names.count(name) > 1}):
        raise FileFormatError(
            path, f"more than one column called {name_some(map(repr, twice))}; expected one each.", line=1
        )


def _sample_id(path: Path, line: int, cell: str, heading: str) -> str:
    if not cell.strip():
        raise FileFormatError(path, f"no sample ID in column {heading!r}; expected one in every row.", line=line)
    return cell.strip()


def _ordinates(
    path: Path, line: int, cells: list[str], headings: list[str], is_point: list[bool], decimal: str
) -> list[float]:
    points = list(compress(cells, is_point))
    together = "".join(points)
    plain = together.isascii() and "_" not in together and "n" not in together.lower()  # no 1_000, nan, inf
    if plain and (decimal == "." or "." not in together):
        try:
            return list(map(float, points if decimal == "." else (cell.replace(",", ".") for cell in points)))
        except ValueError:
            pass  # read again below, cell by cell, to name the one that is wrong
    return delimited.numbers_from(path, line, points, list(compress(headings, is_point)), decimal)


def _quantity(path: Path, notes: list[dict[str, str]]) -> str | None:
    """Take what the column "quantity" says out of the notes."""
    found = dict.fromkeys(row.pop(QUANTITY_COLUMN, None) for row in notes)
    if list(found) == [None]:
        return None
    if len(found) > 1 or next(iter(found)) not in STATED_QUANTITIES:
        raise FileFormatError(
            path,
            f"column {QUANTITY_COLUMN!r} holds {name_some(map(repr, found))}; expected one word in all rows, out of "
            f"{', '.join(STATED_QUANTITIES)}.",
        )
    return next(iter(found))
