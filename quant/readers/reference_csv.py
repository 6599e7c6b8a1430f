"""Reader of reference values: one row a determination, one column an analyte."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from quant.checks import name_some, one_of
from quant.errors import FileFormatError, ParameterError
from quant.files import decode_text, read_bytes
from quant.readers import delimited
from quant.readers.dates import ORDERS, iso_dates
from quant.readers.options import DECIMALS, SEPARATORS
from quant.readers.reference_column import ColumnOf, ReadCell
from quant.readers.repeats import average_repeats
from quant.readers.spreadsheet import recognises_spreadsheet, rows_of_workbook
from quant.spectra.concentration import MASS_FRACTION, concentration_unit_named
from quant.spectra.provenance import source_of
from quant.spectra.reference_table import BASES, ReferenceTable

REPLICATES = ("refuse", "average")
DATE, BASIS = "date", "basis"
"""Headings (in any case) of columns with a meaning of their own."""

_HEAD = 2**10  # bytes that tell a workbook from text


def read_reference(
    path: str | Path,
    analytes: Sequence[ColumnOf],
    *,
    sample_column: str | None = None,
    separator: str | None = None,
    decimal: str = ".",
    note_columns: Sequence[str] | None = None,
    replicates: str = "refuse",
    date_column: str | None = None,
    date_order: str | None = None,
    sheet: str | None = None,
) -> ReferenceTable:
    """Read reference values from delimited text, or from a sheet of a workbook (.xlsx).

    A cell may hold an upper limit instead of a value ("<0.05", "n.d. <0.05"); it is kept as such. A column called
    "basis" that says wet or dry states the basis of all mass fractions, and must not contradict `analytes`.

    Parameters
    ----------
    path : str or path
    analytes : sequence of ColumnOf
        Which columns are read, what they are, and what they are converted from.
    sample_column : str, optional
        Heading of the sample IDs; else the column called sample, sample_id or id.
    separator : {",", ";", "tab", "space"}, optional
        Found out from the header when not given.
    decimal : {".", ","}
    note_columns : sequence of str, optional
        The columns kept as notes; when not given, all others whose heading is not a number (those are spectra).
    replicates : {"refuse", "average"}
        What to do with several rows of one sample: an error, or repeated determinations whose mean is taken.
    date_column : str, optional
        Heading of a column of dates, which becomes the note ``date`` in ISO form; else the column called date.
    date_order : {"dmy", "mdy", "ymd"}, optional
        Order of dates such as 03/04/2026; see `quant.readers.dates.iso_dates`.
    sheet : str, optional
        The sheet of a workbook; else the first. In workbooks `decimal` speaks of texts such as "<0,05" only.

    Raises
    ------
    FileFormatError
        A column that is not there, a damaged row, a cell that is neither a number nor a limit nor a word for "no
        value", an ambiguous date, or another basis than that of `analytes`.
    SampleMismatchError
        A sample with two rows, unless they are averaged.
    ParameterError
        No analyte, one sign for two purposes, or a word that is not among those listed.
    """
    _check_words(separator, decimal, replicates, date_order)
    if not analytes:
        raise ParameterError("No analyte named; expected at least one column of reference values.")
    file = Path(path)
    content = read_bytes(file)
    workbook = recognises_spreadsheet(content[:_HEAD], file.name)
    rows = rows_of_workbook(file, content, sheet) if workbook else _text_rows(file, content, separator, decimal, sheet)
    if len(rows) < 2:
        raise FileFormatError(file, f"{len(rows)} line(s); expected a header and at least one sample.")
    headings, body = [cell.strip() for cell in rows[0][1]], rows[1:]
    for row in body:
        delimited.check_width(file, row, len(headings))
    columns = _on_stated_basis(file, headings, body, analytes)
    sample = delimited.sample_column_of(file, headings, sample_column)
    ids = [_sample_id(file, row, sample, headings) for row in body]
    places = [delimited.find_column(file, headings, each.heading, f"values of {each.analyte.name}") for each in columns]
    written = _with_comma if workbook and decimal == "," else str
    read = _cells_read(file, headings, body, columns, places, decimal, written)
    date = _date_place(file, headings, date_column, note_columns)
    noted = _note_places(file, headings, {sample, *places}, note_columns, decimal)
    notes = [delimited.note_cells(cells, headings, [place for place in noted if place != date]) for _, cells in body]
    if date is not None:
        days = iso_dates(file, [(line, cells[date]) for line, cells in body], headings[date], date_order)
        notes = [{**row, DATE: day} if day else row for row, day in zip(notes, days, strict=True)]
    values, limits = np.moveaxis(np.array(read), 2, 0)
    kinds, source = [each.analyte for each in columns], [source_of(file, content)]
    if replicates == "refuse":
        return ReferenceTable(ids, kinds, values, notes, source, limits, lines=[line for line, _ in body])
    mean = average_repeats(ids, kinds, values, limits, notes)
    first = {name: line for name, (line, _) in zip(reversed(ids), reversed(body), strict=True)}
    return ReferenceTable(
        mean.sample_ids,
        kinds,
        mean.values,
        mean.notes,
        source,
        mean.limits,
        mean.determinations,
        mean.repeatability,
        [first[name] for name in mean.sample_ids],
    )


def _check_words(separator: str | None, decimal: str, replicates: str, date_order: str | None) -> None:
    if separator is not None:
        one_of("separator", separator, SEPARATORS)
    one_of("decimal", decimal, DECIMALS)
    one_of("replicates", replicates, REPLICATES)
    if date_order is not None:
        one_of("date_order", date_order, ORDERS)
    if separator == decimal:
        raise ParameterError(f"separator and decimal are both {decimal!r}; expected two different signs.")


def _text_rows(
    path: Path, content: bytes, separator: str | None, decimal: str, sheet: str | None
) -> list[delimited.Row]:
    if sheet is not None:
        raise FileFormatError(path, f"no workbook; expected one, as sheet = {sheet!r} is given. Remove sheet.")
    text = decode_text(path, content)
    sign = delimited.separator_of(text.lstrip().partition("\n")[0], decimal, separator)
    return delimited.read_rows(path, text, sign)


def _cells_read(
    path: Path,
    headings: Sequence[str],
    rows: Sequence[delimited.Row],
    columns: Sequence[ColumnOf],
    places: Sequence[int],
    decimal: str,
    written: Callable[[str], str],
) -> list[list[ReadCell]]:
    """Return value and upper limit of every analyte in every row."""
    wet = [_moisture_place(path, headings, each) for each in columns]
    return [
        [
            each.read(path, line, written(cells[place]), "" if moist is None else written(cells[moist]), decimal)
            for each, place, moist in zip(columns, places, wet, strict=True)
        ]
        for line, cells in rows
    ]


def _with_comma(cell: str) -> str:
    """Return the number of a workbook's cell with a comma: it comes with a point, whatever the texts beside it have."""
    return cell.replace(".", ",") if delimited.number_from(cell) is not None else cell


def _sample_id(path: Path, row: delimited.Row, place: int, headings: Sequence[str]) -> str:
    line, cells = row
    if not (name := cells[place].strip()):
        raise FileFormatError(
            path, f"no sample ID in column {headings[place]!r}; expected one in every row.", line=line
        )
    return name


def _moisture_place(path: Path, headings: Sequence[str], column: ColumnOf) -> int | None:
    if not column.changes_basis:
        return None
    return delimited.find_column(path, headings, column.moisture_column, f"moisture_column of {column.analyte.name}")


def _on_stated_basis(
    path: Path, headings: Sequence[str], rows: Iterable[delimited.Row], columns: Sequence[ColumnOf]
) -> list[ColumnOf]:
    """Return the columns with the basis that the table itself states, if it does."""
    place = _own_column(path, headings, BASIS)
    words = {cells[place].strip().lower() for _, cells in rows} if place is not None else set()
    if not words & set(BASES):
        return list(columns)  # a column called "basis" may speak of something else
    if len(words) > 1:
        raise FileFormatError(
            path,
            f"column {headings[place or 0]!r} holds {name_some(map(repr, sorted(words)))}; expected wet in every row, "
            "or dry. Bring all values to one basis.",
        )
    stated = words.pop()
    return [_with_basis(path, column, stated) for column in columns]


def _with_basis(path: Path, column: ColumnOf, stated: str) -> ColumnOf:
    expected = column.basis or column.analyte.basis
    if expected and expected != stated:
        raise FileFormatError(
            path,
            f"the table says {stated} basis; expected {expected} basis, as the recipe says of {column.analyte.name}. "
            f'Mend the table, or set column_basis = "{stated}" under [[analyte]].',
        )
    unit = concentration_unit_named(column.analyte.unit)
    if expected or unit is None or unit.kind != MASS_FRACTION:
        return column  # a volume has no dry basis
    return replace(column, analyte=replace(column.analyte, basis=stated))


def _own_column(path: Path, headings: Sequence[str], word: str) -> int | None:
    """Return the place of the column called `word` in any case, if there is one."""
    named = [heading for heading in headings if heading.lower() == word]
    return delimited.find_column(path, headings, named[0], f"{word} of the values") if named else None


def _date_place(
    path: Path, headings: Sequence[str], given: str | None, note_columns: Sequence[str] | None
) -> int | None:
    own = _own_column(path, headings, DATE)
    if given is None:
        return own if note_columns is None or (own is not None and headings[own] in note_columns) else None
    place = delimited.find_column(path, headings, given, "date_column")
    if own is not None and own != place:
        raise FileFormatError(
            path, f"columns {given!r} and {headings[own]!r} would both become the note date. Rename one.", line=1
        )
    return place


def _note_places(
    path: Path, headings: Sequence[str], taken: set[int], wanted: Sequence[str] | None, decimal: str
) -> list[int]:
    if wanted is not None:
        return [delimited.find_column(path, headings, column, "note_columns") for column in wanted]
    places = [
        place
        for place, heading in enumerate(headings)
        if place not in taken and heading and delimited.position_from(heading, decimal) is None
    ]
    names = [headings[place] for place in places]
    if twice := sorted({name for name in names if names.count(name) > 1}):
        raise FileFormatError(
            path, f"more than one column called {name_some(map(repr, twice))}; expected one each.", line=1
        )
    return places
