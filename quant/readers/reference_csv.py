"""Reader of reference values: one row a sample, one column an analyte."""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from quant.checks import name_some, one_of
from quant.errors import FileFormatError, ParameterError
from quant.files import decode_text, read_bytes
from quant.readers import delimited
from quant.readers.options import DECIMALS, SEPARATORS
from quant.spectra.provenance import source_of
from quant.spectra.reference_table import Analyte, ReferenceTable

MISSING = ("", "-", "n/a", "nan")
"""Cells that say that the laboratory gave no value (in any case)."""


@dataclass(frozen=True)
class ColumnOf:
    """Where the values of an analyte stand: in the column of that heading, else of the analyte's name."""

    analyte: Analyte
    column: str = ""

    @property
    def heading(self) -> str:
        """Heading of the column."""
        return self.column or self.analyte.name


def read_reference(
    path: str | Path,
    analytes: Sequence[ColumnOf],
    *,
    sample_column: str | None = None,
    separator: str | None = None,
    decimal: str = ".",
    note_columns: Sequence[str] | None = None,
) -> ReferenceTable:
    """Read reference values from delimited text.

    Parameters
    ----------
    path : str or path
    analytes : sequence of ColumnOf
        Which columns are read, and what they are.
    sample_column : str, optional
        Heading of the sample IDs; else the column called sample, sample_id or id.
    separator : {",", ";", "tab", "space"}, optional
        Found out from the header when not given.
    decimal : {".", ","}
    note_columns : sequence of str, optional
        The columns kept as notes; when not given, all others whose heading is not a number (those are spectra).

    Raises
    ------
    FileFormatError
        A column that is not there, a damaged row, a cell that is neither a number nor a word for "no value".
    SampleMismatchError
        A sample with two rows.
    ParameterError
        No analyte, or one sign for two purposes.
    """
    if separator is not None:
        one_of("separator", separator, SEPARATORS)
    one_of("decimal", decimal, DECIMALS)
    if separator == decimal:
        raise ParameterError(f"separator and decimal are both {decimal!r}; expected two different signs.")
    if not analytes:
        raise ParameterError("No analyte named; expected at least one column of reference values.")
    file = Path(path)
    content = read_bytes(file)
    text = decode_text(file, content)
    sign = delimited.separator_of(text.lstrip().partition("\n")[0], decimal, separator)
    rows = delimited.read_rows(file, text, sign)
    if len(rows) < 2:
        raise FileFormatError(file, f"{len(rows)} line(s); expected a header and at least one sample.")
    headings = [cell.strip() for cell in rows[0][1]]
    sample = delimited.sample_column_of(file, headings, sample_column)
    columns = [
        delimited.find_column(file, headings, each.heading, f"values of {each.analyte.name}") for each in analytes
    ]
    noted = _note_places(file, headings, {sample, *columns}, note_columns, decimal)
    names = [headings[place] for place in columns]
    ids, values, notes = [], [], []
    for row in rows[1:]:
        delimited.check_width(file, row, len(headings))
        line, cells = row
        if not cells[sample].strip():
            raise FileFormatError(
                file, f"no sample ID in column {headings[sample]!r}; expected one in every row.", line=line
            )
        ids.append(cells[sample].strip())
        values.append(delimited.numbers_from(file, line, [cells[place] for place in columns], names, decimal, MISSING))
        notes.append(delimited.note_cells(cells, headings, noted))
    return ReferenceTable(ids, [each.analyte for each in analytes], values, notes, [source_of(file, content)])


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
