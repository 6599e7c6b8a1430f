"""Labelled data records of a JCAMP-DX file and the blocks they form.

References
----------
.. [1] McDonald R.S., Wilks P.A., JCAMP-DX: a standard form for exchange of infrared spectra in computer readable form,
   Appl. Spectrosc. 42 (1988) 151-162 (the rules here from memory, unless a test names another source).
"""

import re
from dataclasses import dataclass, field
from pathlib import Path

from quant.errors import FileFormatError

_LABEL = re.compile(r"^([ \t]*)##([^=\n]*)=", re.MULTILINE)
_COMMENT = re.compile(r"\$\$.*")
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
    def value(self) -> str:
        """The text without blanks around it and at the ends of its lines."""
        return "\n".join(line.strip() for line in self.text.strip().split("\n"))


@dataclass
class Block:
    """The records between TITLE and END, and how they depart from the standard (in words)."""

    path: Path
    records: list[Record] = field(default_factory=list)
    ended: bool = False
    deviations: list[str] = field(default_factory=list)

    def find(self, *labels: str) -> Record | None:
        """Return the first record that bears one of the labels and is not empty; the labels are asked in order.

        Raises
        ------
        FileFormatError
            The label comes again with another value.
        """
        for label in labels:
            plain = plain_label(label)
            found = [record for record in self.records if record.label == plain and record.text.strip()]
            for other in found[1:]:
                if other.value != found[0].value:
                    raise FileFormatError(
                        self.path,
                        f"##{label}= comes again with another value; expected one (the first: line {found[0].line}).",
                        line=other.line,
                    )
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

    Raises
    ------
    FileFormatError
        The file does not begin with TITLE.
    """
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    records, blanks = _records(text)
    if not records or records[0].label != "TITLE":
        found = f"##{records[0].written}=" if records else "no label at all"
        raise FileFormatError(path, f"found {found}; expected ##TITLE= first, as in every JCAMP-DX file.", line=1)
    blocks: list[Block] = []
    still_open: list[Block] = []
    for record in records:
        if record.label == "TITLE":
            still_open.append(Block(path))
            blocks.append(still_open[-1])
        if not still_open:
            raise FileFormatError(
                path, f"##{record.written}= after ##END=; expected ##TITLE= or nothing.", line=record.line
            )
        if record.label == "END":
            still_open.pop().ended = True
        else:
            still_open[-1].records.append(record)
    if blanks:
        blocks[0].deviates("blanks before ##")
    for block in still_open:
        if not text.endswith("\n"):
            line = 1 + text.count("\n")
            raise FileFormatError(
                path, "the file ends within a line; expected ##END=. Copy or export it again.", line=line
            )
        block.deviates("##END= is missing")
    return blocks


def _records(text: str) -> tuple[list[Record], bool]:
    """Return the records (comment records ##= left out), and whether blanks stood before a label."""
    marks = list(_LABEL.finditer(text))
    records: list[Record] = []
    line, counted = 1, 0
    for number, mark in enumerate(marks):
        line += text.count("\n", counted, mark.start())
        counted = mark.start()
        end = marks[number + 1].start() if number + 1 < len(marks) else len(text)
        body = text[mark.end() : end]
        if mark[2].strip():
            written = mark[2].strip()
            records.append(
                Record(written, plain_label(written), _COMMENT.sub("", body) if "$$" in body else body, line)
            )
    return records, any(mark[1] for mark in marks)
