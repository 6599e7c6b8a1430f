"""Find out how a delimited text is to be read: every reading that the options leave open is tried, none is guessed.

A reading is a meaning for each sign (what parts cells, decimals, thousands) and a layout. One that fits every row, and
no other with other numbers: it is taken, with the evidence in words. Two: the file is refused, both are named, and the
key that settles it. None: the one that fits most rows is returned, for the reader to name the damage.
"""

import re
from collections.abc import Iterator, Sequence
from dataclasses import replace
from functools import lru_cache
from itertools import product
from pathlib import Path

from quant.errors import FileFormatError
from quant.files import decode_text
from quant.readers.delimited import SAMPLE_COLUMNS, groups_in, read_rows, separator_sign
from quant.readers.detective_choice import Reading, decided, whole
from quant.readers.detective_layout import Signs, clipped, layouts_of
from quant.readers.options import DECIMALS, HEAD, ReadingOptions

# Judged first; the whole text only if these lines do not decide.
_FIRST_LINES, _LEAST_LINES, _FIRST_CHARACTERS = 60, 4, 30_000
_STATED_SEPARATOR = re.compile(r"\A[ \t]*sep=(?P<sign>[,;\t])[ \t]*(?=\n)", re.IGNORECASE)
_WORDS = {"\t": "tabs part", " ": "blanks part", ",": "commas part", ";": "semicolons part"}


def investigate(path: Path, text: str, options: ReadingOptions) -> Reading:
    """Return the only reading of a text that the options leave, or the likeliest if it is damaged.

    Parameters
    ----------
    path : path
        For the messages.
    text : str
        The whole file.
    options : ReadingOptions
        `format`, `separator`, `decimal`, `thousands` and `orientation` rule readings out.

    Raises
    ------
    FileFormatError
        Two readings with different numbers, or none at all.
    """
    plain, separators = _prepared(text, options)
    head = _head(plain)
    found = list(_readings(path, head, separators, options))
    if len(whole(found)) != 1 and len(head) < len(plain):
        head = plain
        found = list(_readings(path, plain, separators, options))
    if not found:
        raise FileFormatError(path, _nothing_found(path, plain, options))
    chosen = decided(path, found, options)
    rows = chosen.rows if head is plain else read_rows(path, plain, chosen.signs.separator)
    return replace(chosen, rows=rows, evidence=(*_evidence(chosen.signs, options, rows), *chosen.evidence))


@lru_cache(maxsize=4)  # each reader of text asks in turn
def kinds_of(head: bytes) -> frozenset[str]:
    """Return the layouts in which the first bytes of a file read as spectra, perhaps damaged. Never raises."""
    try:
        plain, separators = _prepared(decode_text("", head), ReadingOptions())
    except FileFormatError:
        return frozenset()
    if len(head) >= HEAD:
        plain = plain.rpartition("\n")[0]  # the last line may be cut
    found = [each for each in _readings(Path(), _head(plain), separators, ReadingOptions()) if _is_certain(each)]
    return frozenset(each.layout.kind for each in whole(found) or found)


def _prepared(text: str, options: ReadingOptions) -> tuple[str, tuple[str, ...]]:
    """Return the text with plain line ends, and the signs that may part its cells."""
    plain = text.replace("\r\n", "\n").replace("\r", "\n")
    stated = _STATED_SEPARATOR.match(plain)
    if stated is not None:
        plain = plain[stated.end() :]  # the line stays, blank
    if options.separator is not None:
        return plain, (separator_sign(options.separator),)
    if stated is not None:
        return plain, (stated["sign"],)
    lines = [line for line in plain[:_FIRST_CHARACTERS].split("\n") if line.strip()]
    in_all = bool(lines) and all("\t" in line for line in lines)
    return plain, tuple(sign for sign in "\t;, " if sign in plain and not (in_all and sign == " "))


def _head(text: str) -> str:
    """Return the first lines of a text: some, and more where they are short."""
    end = 0
    for number in range(1, _FIRST_LINES + 1):
        cut = text.find("\n", end)
        if cut < 0:
            return text
        end = cut + 1
        if number >= _LEAST_LINES and end > _FIRST_CHARACTERS:
            break
    return text[:end]


def _readings(path: Path, text: str, separators: Sequence[str], options: ReadingOptions) -> Iterator[Reading]:
    """Yield every reading that the options leave open, whole or damaged."""
    quoted = '"' in text
    decimals = DECIMALS if options.decimal is None else (options.decimal,)
    groups = [None, *groups_in(text)] if options.thousands is None else [options.thousands]
    for separator in separators:
        try:
            rows = read_rows(path, text, separator)
        except FileFormatError:
            if len(separators) == 1:
                raise
            continue
        for decimal, thousands in product(decimals, groups):
            if decimal == thousands or (not quoted and separator in (decimal, thousands)):
                continue  # only inside quotes the sign that parts cells can mean something else
            signs = Signs(separator, decimal, thousands)
            for layout in layouts_of(rows, signs, options.orientation, options.sample_column):
                if options.format not in ("two_columns", "matrix") or (
                    (layout.kind == "two_columns") is (options.format == "two_columns")
                ):
                    yield Reading(signs, layout, rows)


def _is_certain(reading: Reading) -> bool:
    """Tell spectra, perhaps damaged, from tables of other things."""
    layout = reading.layout
    if layout.kind == "spectra_in_rows":
        return layout.heads == (0,) or 2 * layout.damaged <= layout.n_rows
    if layout.kind == "spectra_in_columns":
        return bool(layout.evidence) and 2 * layout.damaged <= layout.n_rows
    corner = clipped(reading.rows[layout.heads[0]][1])[0].lower() if layout.heads else ""
    rest = layouts_of(reading.rows[:-1], reading.signs)  # the last line may be cut
    few = 4 * layout.damaged < layout.n_rows  # a damaged spectrum is refused, not passed over
    return corner not in SAMPLE_COLUMNS and (few or any(not other.damaged for other in rest))


def _evidence(signs: Signs, options: ReadingOptions, rows: Sequence[tuple[int, list[str]]]) -> list[str]:
    """Say what was found out about the signs and not stated."""
    said = []
    if options.separator is None:
        said.append(f"{_WORDS[signs.separator]} the cells")
    if options.decimal is None and any(signs.decimal in cell for _, cells in rows[:_FIRST_LINES] for cell in cells):
        said.append("decimal comma" if signs.decimal == "," else "decimal point")
    if options.thousands is None and signs.thousands is not None:
        said.append(f"thousands parted by {signs.thousands if signs.thousands == 'space' else repr(signs.thousands)}")
    return said


def _nothing_found(path: Path, text: str, options: ReadingOptions) -> str:
    """Say why no reading fits; if another value of an option stated gives one, name it."""
    for key in ("decimal", "thousands", "separator", "orientation"):
        if getattr(options, key) is None:
            continue
        freed = ReadingOptions.from_dict({name: value for name, value in options.to_dict().items() if name != key})
        plain, separators = _prepared(text, freed)
        if others := whole(list(_readings(path, plain, separators, freed))):
            return f"it cannot be read with {key} = {getattr(options, key)!r}. {others[0].remedy(key)}"
    _, separators = _prepared(text, options)
    rows = read_rows(path, text, separators[0]) if separators else []
    if separators == (",",) and len(rows) > 1 and len(rows[-1][1]) > len(rows[0][1]):
        return (
            "rows have more cells than the header: commas may part the cells and mark the decimals as well, which "
            'no program can tell apart. Export with another separator (then decimal = ","), or with decimal points.'
        )
    if options.format == "two_columns":
        return "no two lines of two numbers each; expected position and ordinate a line. Check separator and decimal."
    headings = clipped(rows[0][1]) if rows else []
    positions = sum(Signs(",", options.decimal or ".").position(heading) is not None for heading in headings)
    return (
        f"no table of spectra: {positions} of {len(headings)} column headings are axis positions (expected at least 2 "
        "plain numbers, with or without a unit, and a column of sample IDs), and no rows of numbers below headings "
        "were found either. Check separator and decimal."
    )
