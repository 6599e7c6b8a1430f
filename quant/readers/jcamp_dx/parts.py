"""The parts of a file that may hold a spectrum: blocks, and the pages of an NTUPLES block."""

from dataclasses import dataclass

from quant.errors import FileFormatError, ParameterError
from quant.readers.jcamp_dx.labels import Block, plain_label
from quant.readers.jcamp_dx.notes import labels_of
from quant.readers.jcamp_dx.ntuples import pages_of

_SPECTRUM = ("XYDATA", "XYPOINTS")
_NO_SPECTRUM = ("PEAK TABLE", "PEAK ASSIGNMENTS", "RADATA", "JCAMP-CS", "NTUPLES")
_OTHER_KINDS = ("INTERFEROGRAM", "NMR", "MASSSPECTRUM", "CHROMATOGRAM")  # of DATA TYPE, compared as labels are


@dataclass(frozen=True)
class Part:
    """One block or page.

    Attributes
    ----------
    number : int
        Its place among the file's parts, counted from 1.
    name : str
        Its title; for one of several pages with the page.
    block : Block
        Its labels and its table.
    fault : str
        Why it is no spectrum; empty if it is one.
    line : int
        Where that is seen.
    """

    number: int
    name: str
    block: Block
    fault: str = ""
    line: int = 1

    def __str__(self) -> str:
        return f"{self.number} {self.name!r}"


def parts_of(blocks: list[Block]) -> list[Part]:
    """Return the parts of a file in their order.

    Raises
    ------
    FileFormatError
        A LINK block that is cut, or an NTUPLES block whose labels do not fit each other.
    """
    parts: list[Part] = []
    for block in blocks:
        inner = sum(other.outer is block for other in blocks)
        if _links(block, inner):
            _check_inner_count(block, inner)
            continue
        table = block.find("NTUPLES")
        if table is None or any(block.find(label) for label in _SPECTRUM):
            parts.append(Part(len(parts) + 1, block.title, block, *_fault(block)))
            continue
        pages = pages_of(block, table)
        for page in pages:
            name = f"{block.title} {page.name}" if len(pages) > 1 else block.title
            parts.append(Part(len(parts) + 1, name, page.block, page.fault, page.line))
    return parts


def choose(parts: list[Part], wanted: str | int | None) -> list[Part]:
    """Return the parts that the option ``block`` names, by number or by title; all of them without it.

    Raises
    ------
    ParameterError
        There is no such part, or more than one.
    """
    if wanted is None:
        return parts
    path = parts[0].block.path.name
    text = " ".join(str(wanted).split())
    found = [part for part in parts if isinstance(wanted, str) and part.name == text]
    if not found and text.isdecimal():
        found = [part for part in parts if part.number == int(text)]
    if len(found) != 1:
        raise ParameterError(
            f"block = {wanted!r} names {len(found)} blocks of {path}, which holds {listed(parts)}; expected one. "
            "Give a title or a number of these."
        )
    return found


def listed(parts: list[Part]) -> str:
    """Name parts by number and title, the first twenty of them."""
    more = f" and {len(parts) - 20} more" if len(parts) > 20 else ""
    return ", ".join(map(str, parts[:20])) + more


def _links(block: Block, inner: int) -> bool:
    """Tell whether a block only holds others."""
    if any(block.find(label) for label in _SPECTRUM):
        return False
    kind = block.find("DATA TYPE")
    return inner > 0 or block.find("BLOCKS") is not None or (kind is not None and plain_label(kind.value) == "LINK")


def _check_inner_count(block: Block, inner: int) -> None:
    record = block.find("BLOCKS")
    stated = record.value if record is not None else None
    if inner == 0:
        raise FileFormatError(block.path, "a LINK block without blocks in it; expected spectra. The file is cut.")
    if stated == str(inner):
        return
    if not block.ended:
        raise FileFormatError(
            block.path,
            f"found {inner} block(s); expected {stated or 'a count'} (##BLOCKS=), or ##END= of the LINK block. "
            "The file is cut.",
            line=None if record is None else record.line,
        )
    block.deviates(f"##BLOCKS= is {stated} where {inner} blocks are" if stated else "##BLOCKS= is missing")


def _fault(block: Block) -> tuple[str, int]:
    """Say why a block is no spectrum, and in which line that stands."""
    kind = block.find("DATA TYPE")
    if kind is not None and any(word in plain_label(kind.value) for word in _OTHER_KINDS):
        name = " ".join(kind.value.split())
        return f"##DATA TYPE= {name[:40]} is no infrared spectrum", kind.line
    records = [record for label in _NO_SPECTRUM if (record := block.find(label)) is not None]
    if any(block.find(label) is not None for label in _SPECTRUM):
        for record in records:
            block.deviates(f"##{record.written}= is left out")
        return "", 1
    for record in records:
        return f"##{record.written}= is no spectrum", record.line
    if not block.ended:
        raise FileFormatError(
            block.path,
            f"neither ##XYDATA= nor ##END= of {block.title!r}; expected a whole block. The file is cut.",
            line=block.records[-1].line,
        )
    return f"no ##XYDATA= among {labels_of(block)}", block.records[0].line
