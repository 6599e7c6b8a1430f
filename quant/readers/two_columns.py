"""Reader and writer of one spectrum a file: two columns of numbers, position and ordinate."""

from pathlib import Path

from quant.checks import one_of
from quant.errors import ParameterError
from quant.files import decode_text, write_text
from quant.readers.detective import investigate, kinds_of
from quant.readers.matrix import number_texts, table_text
from quant.readers.options import DECIMALS, SEPARATORS, ReadingOptions
from quant.readers.table import spectra_from_reading
from quant.spectra.provenance import source_of
from quant.spectra.spectra_set import SpectraSet


def recognises_two_columns(head: bytes, file_name: str) -> bool:  # noqa: ARG001  the table of readers calls all alike
    """Tell whether a file holds, after lines of text, lines of two numbers and nothing else. Never raises."""
    return "two_columns" in kinds_of(head)


def read_two_columns(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read one spectrum: lines of text, perhaps the names of the two columns, then position and ordinate a line.

    Raises
    ------
    FileFormatError
        A line that is not two numbers, or two ways to read the file.
    AxisMismatchError, QuantityError
        Words, numbers and options that contradict each other.
    ParameterError
        A way of finding the sample ID that is made for other formats.
    """
    reading = investigate(path, decode_text(path, content), options)
    return spectra_from_reading(path, reading, options, source_of(path, content))


def write_two_columns(spectra: SpectraSet, path: str | Path, separator: str = ",", decimal: str = ".") -> None:
    """Write one spectrum as two columns under their names; numbers read back to the same double.

    The sample ID is not in the file: name the file by it.

    Raises
    ------
    ParameterError
        More than one spectrum, or one sign for two purposes.
    """
    one_of("separator", separator, SEPARATORS)
    one_of("decimal", decimal, DECIMALS)
    if separator == decimal:
        raise ParameterError(f"separator and decimal are both {decimal!r}; expected two different signs.")
    if len(spectra) != 1:
        raise ParameterError(f"{len(spectra)} spectra; expected one. Write several with write_matrix.")
    columns = (number_texts(spectra.axis.values, decimal), number_texts(spectra.values[0], decimal))
    table = [[spectra.axis.unit, spectra.quantity], *(list(pair) for pair in zip(*columns, strict=True))]
    write_text(path, table_text(table, separator))
