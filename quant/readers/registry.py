"""The file formats that can be read; the order is the order of asking."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from quant.later import later
from quant.readers.jcamp_dx.recognise import recognises_jcamp_dx
from quant.readers.options import ReadingOptions
from quant.spectra.spectra_set import SpectraSet


@dataclass(frozen=True, kw_only=True)
class Reader:
    """One file format.

    Parameters
    ----------
    name : str
        The word used in recipes: ``format = "jcamp_dx"``.
    recognises : callable
        Judges the first bytes and the name of a file; never raises.
    read : callable
        Turns path, content and options into spectra, with sample IDs, notes and source.
    in_folders : bool
        Whether files found in a folder or archive are read; else only those that are named themselves.
    """

    name: str
    recognises: Callable[[bytes, str], bool]
    read: Callable[[Path, bytes, ReadingOptions], SpectraSet]
    in_folders: bool = True


READERS = (
    Reader(name="jcamp_dx", recognises=recognises_jcamp_dx, read=later("quant.readers.jcamp_dx.reader:read_jcamp_dx")),
    Reader(
        name="two_columns",
        recognises=later("quant.readers.two_columns:recognises_two_columns"),
        read=later("quant.readers.two_columns:read_two_columns"),
    ),
    Reader(
        name="matrix",
        recognises=later("quant.readers.matrix:recognises_matrix"),
        read=later("quant.readers.matrix:read_matrix"),
    ),
    # A workbook beside spectra is more often the table of reference values: name it, or state the format.
    Reader(
        name="spreadsheet",
        recognises=later("quant.readers.spreadsheet:recognises_spreadsheet"),
        read=later("quant.readers.spreadsheet:read_spreadsheet"),
        in_folders=False,
    ),
)
