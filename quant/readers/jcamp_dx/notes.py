"""Labels that become notes, and the label that holds the sample ID."""

import re

from quant.checks import name_some
from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import Block, plain_label
from quant.readers.options import ReadingOptions

NOTE_OF_LABEL = {
    "TITLE": "title",
    "ORIGIN": "origin_of_file",  # "origin" says where a standard came from
    "OWNER": "owner",
    "LONG DATE": "date",
    "DATE": "date",
    "TIME": "time",
    "RESOLUTION": "resolution",
    "PATH LENGTH": "path_length",
    "SPECTROMETER/DATA SYSTEM": "instrument",
    "SAMPLING PROCEDURE": "technique",
    "INSTRUMENT PARAMETERS": "instrument_parameters",
    "SAMPLE DESCRIPTION": "sample_description",
    "TEMPERATURE": "temperature",
    "CONCENTRATIONS": "concentrations",
    "DATA PROCESSING": "data_processing",
    "STATE": "state",
    "NAMES": "names",
}
"""Labels kept as notes; of two that give the same note the first counts. User labels (##$BATCH=) are kept as well."""


def notes_of(block: Block) -> dict[str, str]:
    """Return the notes that the labels of a block give."""
    notes: dict[str, str] = {}
    names = {plain_label(label): note for label, note in NOTE_OF_LABEL.items()}
    order = list(names)
    standard = [record for record in block.records if record.label in names and record.value]
    for record in sorted(standard, key=lambda record: order.index(record.label)):
        if record.value != notes.setdefault(names[record.label], record.value):
            block.deviates(f"##{record.written}= of line {record.line} is left out, another label gives the same note")
    for record in block.records:
        if record.written.startswith("$") and record.value:  # a user label wins over a standard one of the same note
            notes[re.sub(r"[\s/-]+", "_", record.written[1:].strip()).lower()] = record.value
    return notes


def sample_id_of(block: Block, options: ReadingOptions) -> str:
    """Return the text of the label that holds the sample ID: TITLE unless `sample_label` names another.

    Raises
    ------
    FileFormatError
        The label is missing or empty.
    """
    label = options.sample_label or "TITLE"
    record = block.find(label.removeprefix("##").removesuffix("="))
    if record is None:
        raise FileFormatError(
            block.path,
            f"no text under ##{label}=, which gives the sample ID; found {labels_of(block)}. "
            "Name the label as sample_label.",
        )
    return " ".join(record.value.split())


def labels_of(block: Block) -> str:
    """Name the labels of a block."""
    return name_some((f"##{record.written}=" for record in block.records), 12)
