"""Labelled data records of a JCAMP-DX file and the blocks they form.

References
----------
.. [1] McDonald R.S., Wilks P.A., JCAMP-DX: a standard form for exchange of infrared spectra in computer readable form,
   Appl. Spectrosc. 42 (1988) 151-162 (the rules here from memory, unless a test names another source).
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import pairwise
from pathlib import Path

from quant.errors import FileFormatError

_COMMENT = re.compile(r"\$\$.*")
_TABLES = ("XYDATA", "XYPOINTS", "PEAKTABLE", "PEAKASSIGNMENTS", "RADATA", "DATATABLE")
_IGNORED = str.maketrans("", "", " \t-/_")


@dataclass(frozen=True)
class Record:
    """One labelled data record.

    Attributes
    ----------
    written, label : str
        The label as it stands in the file, and as labels are compared.
    text : str
        What follows "=", without comments.
    line : int
        Its first line, counted from 1.
    """

    written: str
    label: str
    text: str
    line: int

    @property
    def is_empty(self) -> bool:
        """No text, or only blanks."""
        return not self.text or self.text.isspace()

    @property
    def head(self) -> str:
        """What follows "=" in its first line."""
        end = self.text.find("\n")
        return self.text if end < 0 else self.text[:end]

    @property
    def body(self) -> str:
        """The lines below its first line."""
        end = self.text.find("\n")
        return "" if end < 0 else self.text[end + 1 :]

    @property
    def value(self) -> str:
        """The text without blanks around it and at the ends of its lines."""
        return "\n".join(line.strip() for line in self.text.strip().split("\n"))


@dataclass
class Block:
    """The records between TITLE and END, and how they depart from the standard (in words).

    `outer` is the LINK block around it.
    """

    path: Path
    records: list[Record] = field(default_factory=list)
    ended: bool = False
    deviations: list[str] = field(default_factory=list)
    outer: "Block | None" = None

    @property
    def title(self) -> str:
        """Its title on one line."""
        record = next((record for record in self.records if record.label == "TITLE"), None)
        return "" if record is None else " ".join(record.value.split())

    @property
    def holds_data(self) -> bool:
        """A table of any kind is among its records."""
        return any(record.label in _TABLES for record in self.records)

    def find(self, *labels: str) -> Record | None:
        """Return the first record that bears one of the labels and is not empty; the labels are asked in order.

        Raises
        ------
        FileFormatError
            The label comes again with another value.
        """
        for label in labels:
            plain = plain_label(label)
            found = [record for record in self.records if record.label == plain and not record.is_empty]
            for other in found[1:]:
                if other.value != found[0].value:
                    raise FileFormatError(
                        self.path,
                        f"##{label}= comes again with another value; expected one (the first: line {found[0].line}).",
                        line=other.line,
                    )
            if len(found) > 1:
                self.deviates(f"##{found[0].written}= comes more than once")
            if found:
                return found[0]
        return None

    def deviates(self, how: str) -> None:
        """Note once how the block departs from the standard."""
        if how not in self.deviations:
            self.deviations.append(how)


def plain_label(label: str) -> str:
    """Return a label as labels are compared: without case, blanks, dashes, slashes and underscores.

    >>> plain_label("Data-Type") == plain_label("DATA TYPE"), plain_label("$ Batch_No")
    (True, '$BATCHNO')
    """
    return label.upper().translate(_IGNORED)


def read_blocks(path: Path, text: str) -> list[Block]:
    """Split a file into its blocks: each begins with TITLE and runs to its own END (inner blocks of a LINK block too).

    Departures that concern the whole file are noted for every block.

    Raises
    ------
    FileFormatError
        The file does not begin with TITLE, goes on with labels behind its last END, or is cut within a line.
    """
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    deviations = []
    if "\x1a" in text[-200:]:
        text = text.rstrip("\x1a \t\n") + "\n"
        deviations.append("Ctrl-Z at the end")
    records, odd = _records(text)
    if not records or records[0].label != "TITLE":
        found = f"##{records[0].written}=" if records else "no label at all"
        raise FileFormatError(path, f"found {found}; expected ##TITLE= first, as in every JCAMP-DX file.", line=1)
    blocks: list[Block] = []
    still_open: list[Block] = []
    for record in records:
        if record.label == "TITLE":
            if still_open and still_open[-1].holds_data:  # only a LINK block, which has none, holds others
                still_open.pop().deviates("##END= is missing")
            still_open.append(Block(path, outer=still_open[-1] if still_open else None))
            blocks.append(still_open[-1])
        if not still_open:
            raise FileFormatError(
                path, f"##{record.written}= after ##END=; expected ##TITLE= or nothing.", line=record.line
            )
        if record.label == "END":
            still_open.pop().ended = True
            if record.text.partition("\n")[2].strip():
                deviations.append(f"text after ##END= of line {record.line} is left out")
        else:
            still_open[-1].records.append(record)
    if sum(block.outer is None for block in blocks) > 1:
        deviations.append("several blocks without a LINK block around them")
    for block in blocks:
        for how in (*odd, *deviations):
            block.deviates(how)
    for block in still_open:
        if not text.endswith("\n"):
            line = 1 + text.count("\n")
            raise FileFormatError(
                path, "the file ends within a line; expected ##END=. Copy or export it again.", line=line
            )
        block.deviates("##END= is missing")
    return blocks


def _marks(text: str) -> Iterator[tuple[int, int]]:
    """Yield where each label (## with only blanks before it in its line) begins, and where its text does."""
    place = text.find("#")  # one character is found much faster than two
    while place >= 0:
        if not text.startswith("##", place):
            place = text.find("#", place + 1)
            continue
        line_end = text.find("\n", place)
        line_end = len(text) if line_end < 0 else line_end
        before = text[text.rfind("\n", 0, place) + 1 : place]
        equals = text.find("=", place, line_end)
        if not before.strip(" \t\ufeff"):
            if equals >= 0:
                yield place, equals + 1
            elif plain_label(text[place + 2 : line_end].partition("$$")[0]) == "END":
                yield place, line_end
        place = text.find("#", line_end)


def _records(text: str) -> tuple[list[Record], list[str]]:
    """Return the records (comment records ##= left out), and how labels are set oddly."""
    marks = list(_marks(text))
    records: list[Record] = []
    odd: list[str] = []
    line, counted = 1, 0
    if marks and _COMMENT.sub("", text[: marks[0][0]]).strip("\ufeff \t\n"):
        odd.append("text before ##TITLE= is left out")
    if any(place and text[place - 1] in " \t" for place, _ in marks):
        odd.append("blanks before ##")
    for (place, start), (end, _) in pairwise([*marks, (len(text), 0)]):
        line += text.count("\n", counted, place)
        counted = place
        written, body = text[place + 2 : start].removesuffix("=").strip(), text[start:end]
        if text[start - 1] != "=":
            odd.append("##END without =")
        if written:
            records.append(Record(written, plain_label(written), _without_comments(body), line))
    return records, odd


def _without_comments(text: str) -> str:
    return _COMMENT.sub("", text) if "$" in text else text
