"""Reader and writer of spectra as a table: one spectrum a row or a column, the axis along the other side."""

import csv
import io
from collections.abc import Sequence
from pathlib import Path

from quant.arrays import FloatArray
from quant.checks import name_some, one_of
from quant.errors import ParameterError
from quant.files import decode_text, write_text
from quant.readers.detective import investigate, kinds_of
from quant.readers.detective_values import says_itself
from quant.readers.options import DECIMALS, SEPARATORS, ReadingOptions
from quant.readers.table import QUANTITY_COLUMN, spectra_from_reading
from quant.spectra.provenance import source_of
from quant.spectra.spectra_set import SpectraSet


def recognises_matrix(head: bytes, file_name: str) -> bool:  # noqa: ARG001  the table of readers calls all alike
    """Tell whether a file starts with a table of spectra, in rows or in columns. Never raises."""
    return bool(kinds_of(head) & {"spectra_in_rows", "spectra_in_columns"})


def read_matrix(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read a table of spectra: axis positions in the header or in the first column, notes in other columns or rows.

    What separator, decimal sign, layout, unit and ordinate are is worked out (see `quant.readers.detective`).

    Raises
    ------
    FileFormatError
        A damaged row or header, or two ways to read the file.
    AxisMismatchError, QuantityError
        Words, numbers and options that contradict each other.
    ParameterError
        A way of finding the sample ID that is made for one spectrum a file.
    """
    reading = investigate(path, decode_text(path, content), options)
    return spectra_from_reading(path, reading, options, source_of(path, content))


def write_matrix(
    spectra: SpectraSet,
    path: str | Path,
    separator: str = ",",
    decimal: str = ".",
    note_columns: Sequence[str] | None = None,
) -> None:
    """Write spectra as a table that `read_spectra` gives back: sample, notes, one column a point.

    Numbers are written so that they read back to the same double. Headers carry the unit of the axis; a column
    ``quantity`` tells ordinates that would not be taken for absorbance without it.

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
    kind = {} if says_itself(spectra.values, spectra.quantity) else {QUANTITY_COLUMN: spectra.quantity}
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
