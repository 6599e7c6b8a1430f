"""Spectra from the rows of a table, once it is known how it lies."""

from collections.abc import Callable, Sequence
from itertools import compress
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import FileFormatError, ParameterError
from quant.readers import delimited, naming
from quant.readers.detective_choice import Reading
from quant.readers.detective_layout import MISSING, Signs, body_of, clipped, fits_width, sample_row
from quant.readers.detective_values import axis_unit_of, quantity_of
from quant.readers.options import STATED_QUANTITIES, ReadingOptions
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source
from quant.spectra.spectra_set import SpectraSet

QUANTITY_COLUMN = "quantity"
"""A column (or, of spectra in columns, a row) of this name says what the ordinates are; all spectra have to agree."""

Notes = list[dict[str, str]]


def spectra_from_reading(path: Path, reading: Reading, options: ReadingOptions, source: Source) -> SpectraSet:
    """Return the spectra of a table or of two columns, each with the note ``reader`` that says how it was understood.

    Raises
    ------
    FileFormatError
        A damaged row or header; file and line, what was found and what was expected.
    AxisMismatchError, QuantityError
        Words, numbers and options that contradict each other.
    ParameterError
        A way of finding the sample ID that is made for other formats.
    """
    read = _READ[reading.layout.kind]
    positions, values, ids, notes, units, quantities = read(path, reading, options)
    first = min(reading.layout.heads, default=reading.layout.start)
    unit_above, quantity_above = naming.words_above([cells for _, cells in reading.rows[:first]])
    unit = naming.only_word(path, "axis unit", [*units, unit_above])
    unit, unit_evidence = axis_unit_of(path, positions, unit, options)
    word = naming.only_word(path, "ordinate", [*quantities, *([] if any(quantities) else [quantity_above])])
    quantity, quantity_evidence = quantity_of(path, values, word, options)
    ordinates, named = naming.as_quantity(path, values, quantity)
    try:
        axis = SpectralAxis(positions, unit)
    except ParameterError as problem:
        place = "header" if reading.layout.kind == "spectra_in_rows" else "first column"
        line = reading.rows[reading.layout.heads[0]][0] if place == "header" else None
        raise FileFormatError(path, f"{problem} The {place} gives the axis.", line=line) from problem
    said = "; ".join(filter(None, [*reading.evidence, f"axis {axis.direction}", unit_evidence, quantity_evidence]))
    return SpectraSet(ordinates, axis, ids, named, [{**row, "reader": said} for row in notes], [source])


_Parts = tuple[FloatArray, FloatArray, list[str], Notes, list[str | None], list[str | None]]
"""Positions, ordinates (one spectrum a row), sample IDs, notes, words for the axis unit, words for the ordinate."""


def _in_rows(path: Path, reading: Reading, options: ReadingOptions) -> _Parts:
    _refuse_name_options(path, options, "one spectrum a row")
    place = reading.layout.heads[0]
    header_line, headings = reading.rows[place][0], clipped(reading.rows[place][1])
    found = [reading.signs.position(heading) for heading in headings]
    positions = [position for position in found if position is not None]
    is_point = [position is not None for position in found]
    sample = _sample_column(path, headings, is_point, options)
    others = [i for i, heading in enumerate(headings) if not is_point[i] and i != sample and heading]
    body = body_of(reading.rows, reading.layout)
    _refuse_damaged_headings(path, header_line, headings, is_point, [cells for _, cells in body], reading.signs)
    if not body:
        raise FileFormatError(path, "1 line; expected a header and at least one spectrum.", line=header_line)
    values = np.empty((len(body), len(positions)))
    ids = []
    for number, (line, row) in enumerate(body):
        cells = _checked(path, line, row, len(headings))
        ids.append(_sample_id(path, line, cells[sample], f"in column {headings[sample]!r}"))
        values[number] = _ordinates(path, line, cells, headings, is_point, reading.signs)
    columns = {headings[i]: [cells[i] for _, cells in body] for i in others}
    notes, quantity = _notes(path, [*((headings[i], columns[headings[i]]) for i in others)], len(body), header_line)
    corner = naming.axis_unit_in(headings[sample]) if sum(is_point) == len(headings) - 1 else None
    units = {unit for _, unit in positions}
    if len(units) > 1:
        raise FileFormatError(
            path, f"axis positions in {name_some(sorted(map(str, units)))}; expected one unit.", line=header_line
        )
    return np.array([value for value, _ in positions]), values, ids, notes, [*units, corner], [quantity]


def _in_columns(path: Path, reading: Reading, options: ReadingOptions) -> _Parts:
    _refuse_name_options(path, options, "one spectrum a column")
    heads = [clipped(reading.rows[i][1]) for i in reading.layout.heads]
    lines = [reading.rows[i][0] for i in reading.layout.heads]
    if options.sample_column is not None:
        delimited.find_column(path, [head[0] for head in heads], options.sample_column, "sample_column")
    chosen = sample_row(heads, options.sample_column)
    ids = [_sample_id(path, lines[chosen], cell, "in the header") for cell in heads[chosen][1:]]
    rows = [(head[0], head[1:]) for i, head in enumerate(heads) if i != chosen and not naming.names_an_axis(head[0])]
    notes, quantity = _notes(path, [(name, cells) for name, cells in rows if name], len(ids), lines[0])
    width = reading.layout.width
    names = [naming.first_nonempty(heads[chosen][0], "the axis"), *ids]
    table = np.array(
        [
            _ordinates(path, line, _checked(path, line, cells, width), names, [True] * width, reading.signs)
            for line, cells in body_of(reading.rows, reading.layout)
        ]
    )
    corners = [head[0] for head in heads if naming.names_an_axis(head[0])]
    units = [naming.axis_unit_in(corner) for corner in corners]
    return table[:, 0], table[:, 1:].T, ids, notes, units, [quantity]


def _two_columns(path: Path, reading: Reading, options: ReadingOptions) -> _Parts:
    if options.sample_column is not None or options.sample_label is not None:
        raise ParameterError(
            f"{path.name} holds one spectrum in two columns, where sample_column and sample_label find no sample ID; "
            "use sample_pattern, or name the files by their samples."
        )
    heads = [clipped(reading.rows[i][1]) for i in reading.layout.heads]
    body = body_of(reading.rows, reading.layout)
    table = _pairs(path, body, reading.signs)
    notes = naming.from_file_name(path, options)
    sample = notes.pop("sample", path.stem)
    units: list[str | None] = [naming.axis_unit_in(head[0]) for head in heads]
    quantities: list[str | None] = [naming.quantity_in(head[1]) for head in heads]
    return table[:, 0], table[:, 1][np.newaxis], [sample], [notes], units, quantities


_READ: dict[str, Callable[[Path, Reading, ReadingOptions], _Parts]] = {
    "spectra_in_rows": _in_rows,
    "spectra_in_columns": _in_columns,
    "two_columns": _two_columns,
}


def _refuse_name_options(path: Path, options: ReadingOptions, lie: str) -> None:
    if options.sample_pattern is not None or options.sample_label is not None:
        raise ParameterError(
            f"{path.name} holds {lie}, where sample_pattern and sample_label find no sample ID; "
            "name the column as sample_column."
        )


def _sample_column(path: Path, headings: list[str], is_point: list[bool], options: ReadingOptions) -> int:
    """Return the place of the sample IDs; the only text column may be headed by nothing or by the header's own axis."""
    texts = [i for i, point in enumerate(is_point) if not point]
    only = headings[texts[0]] if len(texts) == 1 else "?"
    if options.sample_column is None and (not only or naming.names_an_axis(only)):
        return texts[0]
    return delimited.sample_column_of(path, headings, options.sample_column)


def _refuse_damaged_headings(
    path: Path, line: int, headings: list[str], is_point: list[bool], body: list[list[str]], signs: Signs
) -> None:
    """Refuse a heading beside axis positions that may be a damaged one: its column would pass for notes and be lost."""
    beside = [any(is_point[max(i - 1, 0) : i + 2]) for i in range(len(headings))]
    points = [i for i, yes in enumerate(is_point) if yes]
    for i, heading in enumerate(headings):
        inside = bool(points) and points[0] < i <= points[-1]
        if is_point[i] or not beside[i] or not (delimited.looks_like_a_number(heading) or (inside and not heading)):
            continue
        numbers = [signs.number(cells[i]) for cells in body if len(cells) > i and cells[i].strip()]
        if numbers and None not in numbers:
            raise FileFormatError(
                path,
                f"found {heading!r} as heading of a column of numbers beside axis positions; expected a position. Mend "
                "the heading (or name the column by a word, if it holds notes).",
                line=line,
            )


def _checked(path: Path, line: int, cells: list[str], width: int) -> list[str]:
    """Return the cells of a row, refusing more or fewer than the header has (trailing separators left out)."""
    kept = cells[:width] if fits_width(cells, width) else cells
    delimited.check_width(path, (line, kept), width)
    return kept


def _sample_id(path: Path, line: int, cell: str, place: str) -> str:
    if not cell.strip():
        raise FileFormatError(path, f"no sample ID {place}; expected one for every spectrum.", line=line)
    return cell.strip()


def _ordinates(
    path: Path, line: int, cells: list[str], headings: list[str], is_point: list[bool], signs: Signs
) -> list[float]:
    points = list(compress(cells, is_point))
    plain = _plain_numbers(points, signs)
    if plain is not None:
        return plain
    named = list(compress(headings, is_point))
    return delimited.numbers_from(path, line, points, named, signs.decimal, MISSING, signs.thousands)


def _plain_numbers(cells: list[str], signs: Signs) -> list[float] | None:
    """Return numbers all at once if none of them needs a second look."""
    together = "".join(cells)
    plain = together.isascii() and "_" not in together and "n" not in together.lower()  # no 1_000, nan, inf
    if not plain or signs.thousands is not None or (signs.decimal == "," and "." in together):
        return None
    try:
        return list(map(float, cells if signs.decimal == "." else (cell.replace(",", ".") for cell in cells)))
    except ValueError:
        return None


def _pairs(path: Path, body: Sequence[delimited.Row], signs: Signs) -> FloatArray:
    """Return positions and ordinates, shape (n_points, 2)."""
    if all(fits_width(cells, 2) for _, cells in body):
        plain = _plain_numbers([cell for _, cells in body for cell in cells[:2]], signs)
        if plain is not None:
            return np.array(plain).reshape(-1, 2)
    table = np.empty((len(body), 2))
    headings = ["position", "ordinate"]
    for number, (line, cells) in enumerate(body):
        if not fits_width(cells, 2):
            raise FileFormatError(
                path,
                f"found {len(cells)} cell(s), {' '.join(cells)[:40]!r}; expected two numbers: position, ordinate.",
                line=line,
            )
        table[number] = _ordinates(path, line, cells[:2], headings, [True, True], signs)
    missing = np.flatnonzero(np.isnan(table[:, 0]))
    if missing.size:
        raise FileFormatError(path, "no axis position; expected two numbers.", line=body[int(missing[0])][0])
    return table


def _notes(
    path: Path, columns: Sequence[tuple[str, Sequence[str]]], n_spectra: int, line: int
) -> tuple[Notes, str | None]:
    """Return the notes of every spectrum, and what the column "quantity" says."""
    notes: Notes = [{} for _ in range(n_spectra)]
    names = [naming.note_name(heading)[0] for heading, _ in columns]
    if twice := sorted({name for name in names if names.count(name) > 1}):
        raise FileFormatError(
            path, f"more than one column called {name_some(map(repr, twice))}; expected one each.", line=line
        )
    for heading, cells in columns:
        for row, cell in zip(notes, cells, strict=True):
            row.update(naming.note_of(heading, cell))
    found = dict.fromkeys(row.pop(QUANTITY_COLUMN, None) for row in notes)
    if list(found) == [None]:
        return notes, None
    word = next(iter(found))
    named = word if word in STATED_QUANTITIES else naming.quantity_named(word or "")
    if len(found) > 1 or named is None:
        raise FileFormatError(
            path,
            f"column {QUANTITY_COLUMN!r} holds {name_some(map(repr, found))}; expected one word for all spectra, out "
            f"of {', '.join(STATED_QUANTITIES)}.",
        )
    return notes, named
