"""The file formats that can be read; the order is the order of asking."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from quant.readers.jcamp_dx.reader import read_jcamp_dx, recognises_jcamp_dx
from quant.readers.matrix import read_matrix, recognises_matrix
from quant.readers.options import ReadingOptions
from quant.readers.spreadsheet import read_spreadsheet, recognises_spreadsheet
from quant.readers.two_columns import read_two_columns, recognises_two_columns
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
    Reader(name="jcamp_dx", recognises=recognises_jcamp_dx, read=read_jcamp_dx),
    Reader(name="two_columns", recognises=recognises_two_columns, read=read_two_columns),
    Reader(name="matrix", recognises=recognises_matrix, read=read_matrix),
    # A workbook beside spectra is more often the table of reference values: name it, or state the format.
    Reader(name="spreadsheet", recognises=recognises_spreadsheet, read=read_spreadsheet, in_folders=False),
)
