"""Workbooks (.xlsx): the cells of a sheet as text, and spectra from them. Needs openpyxl, an optional extra."""

import datetime
import warnings
from io import BytesIO
from itertools import islice
from pathlib import Path
from typing import Any

from quant.checks import name_some
from quant.errors import FileFormatError
from quant.readers.archive import is_zip, open_archive
from quant.readers.delimited import Row
from quant.readers.detective_choice import Reading, decided
from quant.readers.detective_layout import Signs, layouts_of
from quant.readers.options import DECIMALS, ReadingOptions
from quant.readers.table import spectra_from_reading
from quant.spectra.provenance import source_of
from quant.spectra.spectra_set import SpectraSet

SUFFIXES = (".xlsx", ".xlsm")
MOST_CELLS = 20_000_000  # 5000 spectra of 4000 points


def recognises_spreadsheet(head: bytes, file_name: str) -> bool:
    """Tell whether a file is a workbook by its first bytes and its name. Never raises."""
    return is_zip(head) and file_name.lower().endswith(SUFFIXES)


def read_spreadsheet(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read spectra from a sheet that lies like a delimited text: in rows, in columns, or one spectrum in two columns.

    Raises
    ------
    FileFormatError
        A damaged workbook, a sheet that is not there, a damaged row, two ways to read the sheet, or no openpyxl.
    AxisMismatchError, QuantityError
        Words, numbers and options that contradict each other.
    """
    rows, sheet = _rows_and_sheet(path, content, options.sheet)
    found = [
        Reading(signs, layout, rows)
        for signs in (
            Signs("\t", decimal) for decimal in DECIMALS
        )  # numbers come with a point, numbers as text may not
        for layout in layouts_of(rows, signs, options.orientation, options.sample_column)
    ]
    if not found:
        raise FileFormatError(
            path,
            f"sheet {sheet!r} holds no table of spectra; expected axis positions in the header or in the first column. "
            "Name another one as sheet.",
        )
    reading = decided(path, found, options)
    named = Reading(reading.signs, reading.layout, reading.rows, (f"sheet {sheet!r}", *reading.evidence))
    return spectra_from_reading(path, named, options, source_of(path, content))


def rows_of_workbook(path: Path, content: bytes, sheet: str | None = None) -> list[Row]:
    """Return the rows of a sheet that are not blank, cells as text, as `quant.readers.delimited.read_rows` does.

    Numbers are written with a point so that they read back to the same double, dates in ISO form, truth values as
    TRUE and FALSE, empty cells (and those under a merged one) as empty text. Formulas give the value that was saved
    with them. Empty columns on the left are left out.

    Parameters
    ----------
    path : path
        For the messages.
    content : bytes
        The file.
    sheet : str, optional
        Name of the sheet; else the first.

    Raises
    ------
    FileFormatError
        A damaged workbook, a sheet that is not there or too large, or no openpyxl to read it with.
    """
    return _rows_and_sheet(path, content, sheet)[0]


def _rows_and_sheet(path: Path, content: bytes, name: str | None) -> tuple[list[Row], str]:
    open_archive(path, content).close()  # the limits on what it unpacks to
    try:
        import openpyxl  # deferred: start-up, and an optional extra
    except ImportError as problem:
        raise FileFormatError(
            path,
            "a workbook; expected the library openpyxl to read it with, which is not installed. Install it "
            "(pip install openpyxl), or export the sheet as CSV.",
        ) from problem
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # on styles and extensions, which do not matter here
            book = openpyxl.load_workbook(BytesIO(content), read_only=True, data_only=True)
            sheets = {each.title: each for each in book.worksheets}
            chosen = sheets.get(next(iter(sheets), "") if name is None else name)
            rows = None if chosen is None else _rows(path, chosen)
    except (FileFormatError, MemoryError):
        raise
    except Exception as problem:  # damaged workbooks make openpyxl raise nearly anything
        raise FileFormatError(
            path, f"the workbook is damaged ({type(problem).__name__}: {problem}). Save or fetch it again."
        ) from problem
    if rows is None or chosen is None:
        raise FileFormatError(
            path, f"no sheet {name!r}; the sheets are {name_some(map(repr, sheets), 12)}. Name one of them as sheet."
        )
    return rows, chosen.title


def _rows(path: Path, sheet: Any) -> list[Row]:
    sheet.reset_dimensions()  # what a file says of its own size may be wrong
    rows: list[Row] = []
    n_cells = 0
    for number, values in enumerate(islice(sheet.iter_rows(values_only=True), 2**20), 1):
        cells = [_text(value) for value in values]
        while cells and not cells[-1]:
            cells.pop()
        if cells:
            rows.append((number, cells))
            n_cells += len(cells)
        if n_cells > MOST_CELLS:
            raise FileFormatError(path, f"more than {MOST_CELLS} cells; expected fewer. Split the sheet.")
    left = min((next(i for i, cell in enumerate(cells) if cell) for _, cells in rows), default=0)
    width = max((len(cells) for _, cells in rows), default=0)
    return [(number, [*cells[left:], *[""] * (width - len(cells))]) for number, cells in rows]


def _text(value: object) -> str:
    match value:
        case None:
            return ""
        case bool():
            return str(value).upper()
        case float():
            return repr(int(value)) if value.is_integer() and abs(value) < 2**53 else repr(value)
        case datetime.datetime() if value.time() == datetime.time():
            return value.date().isoformat()
        case datetime.datetime() | datetime.date() | datetime.time():
            return value.isoformat()
    return str(value).strip()
