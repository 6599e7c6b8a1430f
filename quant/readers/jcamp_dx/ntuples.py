"""NTUPLES blocks of JCAMP-DX 5: every page that holds a spectrum becomes the block that version 4.24 would have.

References
----------
.. [1] Lampen P. et al., JCAMP-DX 5.01, Pure Appl. Chem. 71 (1999) 1549 (from memory).
"""

import re
from dataclasses import dataclass

from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import Block, Record, plain_label
from quant.units import axis_unit_named

# Rows of the table of variables, and the labels of an ordinary block that the columns of X and Y give.
_X_LABELS = {"UNITS": "XUNITS", "FACTOR": "XFACTOR", "FIRST": "FIRSTX", "LAST": "LASTX"}
_Y_LABELS = {
    "UNITS": "YUNITS",
    "FACTOR": "YFACTOR",
    "FIRST": "FIRSTY",
    "MAX": "MAXY",
    "MIN": "MINY",
    "VARDIM": "NPOINTS",
}
_OF_ONE_PAGE = ("FIRST", "MAX", "MIN")  # rows that hold for all pages together say nothing of one of them
_ROWS = ("VARNAME", "SYMBOL", "VARTYPE", "VARFORM", "VARDIM", "UNITS", "FIRST", "LAST", "MIN", "MAX", "FACTOR")
_TABLE = re.compile(r"\((?P<x>\w+)\+\+\((?P<y>\w+)\.\.(?P=y)\)\)|\((?P<pair>\w+)\.\.(?P=pair)\)")


@dataclass(frozen=True)
class Page:
    """One page: what it is called, the block it stands for, and why it is no spectrum (empty if it is one)."""

    name: str
    block: Block
    fault: str
    line: int


def pages_of(block: Block, head: Record) -> list[Page]:
    """Return the pages of an NTUPLES block.

    Raises
    ------
    FileFormatError
        No DATA TABLE, or fewer pages than the table of variables says in a block that is cut.
    """
    shared, pages = _divided(block)
    if not pages:
        raise FileFormatError(
            block.path, f"##{head.written}= without a ##DATA TABLE=; expected pages of spectra.", line=head.line
        )
    rows = {record.label: record for record in shared if record.label in _ROWS}
    _check_page_count(block, rows, len(pages))
    around = [record for record in shared if record.label not in (*_ROWS, "NTUPLES", "ENDNTUPLES")]
    return [_page(block, head, around, rows, records, len(pages)) for records in pages]


def _divided(block: Block) -> tuple[list[Record], list[list[Record]]]:
    """Return the records that hold for all pages, and those of each page, which ends with its DATA TABLE."""
    shared: list[Record] = []
    pages: list[list[Record]] = []
    page: list[Record] | None = None
    for record in block.records:
        if record.label == "PAGE":
            page = [record]
        elif record.label == "DATATABLE":
            pages.append([*(page or []), record])
            page = None
        else:
            (shared if page is None else page).append(record)
    return shared, pages


def _check_page_count(block: Block, rows: dict[str, Record], found: int) -> None:
    types, counts = _cells(rows.get("VARTYPE")), _cells(rows.get("VARDIM"))
    stated = next((count for kind, count in zip(types, counts, strict=False) if kind.upper() == "PAGE"), "")
    if stated in ("", str(found)):
        return
    if not block.ended:
        raise FileFormatError(
            block.path,
            f"found {found} pages; expected {stated} (##VAR_DIM=). The file is cut.",
            line=rows["VARDIM"].line,
        )
    block.deviates(f"##VAR_DIM= is {stated} where {found} pages are")


def _page(
    block: Block, head: Record, around: list[Record], rows: dict[str, Record], records: list[Record], n_pages: int
) -> Page:
    table = records[-1]
    own = {record.label: record for record in records[:-1]}
    name = " ".join(own["PAGE"].value.split()) if "PAGE" in own else ""
    columns = {symbol.upper(): place for place, symbol in enumerate(_cells(rows.get("SYMBOL")))}
    form, _, lines = table.text.partition("\n")
    kind = f"##{head.written}= {' '.join(head.value.split())[:40]}"
    variables = _variables(re.sub(r"\s", "", form).upper(), columns)
    stands_for = Block(block.path, list(around), block.ended, list(block.deviations), block.outer)
    if variables is None or "PEAKS" in plain_label(form):
        return Page(name, stands_for, f"{kind} with ##DATA TABLE= {form.strip()[:40]} is no spectrum", table.line)
    made: list[Record] = []
    for symbol, labels in zip(variables, (_X_LABELS, _Y_LABELS), strict=True):
        for row, label in labels.items():
            record = own.get(row) or (None if n_pages > 1 and label in ("FIRSTY", "MAXY", "MINY") else rows.get(row))
            cells = _cells(record)
            if record is not None and columns[symbol] < len(cells) and cells[columns[symbol]]:
                made.append(Record(label, label, cells[columns[symbol]], record.line))
    if "NPOINTS" in own:
        made = [record for record in made if record.label != "NPOINTS"] + [own["NPOINTS"]]
    unit = next((record.text for record in made if record.label == "XUNITS"), "")
    if unit and axis_unit_named(unit) is None:
        return Page(name, stands_for, f"{kind} in {unit} is no infrared spectrum", head.line)
    pairs = "++" not in form
    made.append(Record("DATA TABLE", "XYPOINTS" if pairs else "XYDATA", f"{_FORMS[pairs]}\n{lines}", table.line))
    named = {record.label for record in made}
    stands_for.records[:] = [record for record in around if record.label not in named] + made
    return Page(name, stands_for, "", table.line)


_FORMS = ("(X++(Y..Y))", "(XY..XY)")


def _variables(form: str, columns: dict[str, int]) -> tuple[str, str] | None:
    """Return the symbols of abscissa and ordinate that a data table holds, or None if it is of another kind."""
    match = _TABLE.match(form)
    if match is None:
        return None
    if match["pair"]:
        split = (match["pair"][:place] for place in range(1, len(match["pair"])))
        found = [(x, match["pair"][len(x) :]) for x in split]
    else:
        found = [(match["x"], match["y"])]
    return next(((x, y) for x, y in found if x in columns and y in columns), None)


def _cells(record: Record | None) -> list[str]:
    """Return the cells of a row of the table of variables."""
    return [] if record is None else [cell.strip() for cell in record.value.split(",")]
