"""Reader of JCAMP-DX files that hold one spectrum."""

import re
from dataclasses import replace
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import FileFormatError, ParameterError
from quant.files import decode_text
from quant.readers import naming
from quant.readers.delimited import number_from
from quant.readers.jcamp_dx.labels import Block, plain_label, read_blocks
from quant.readers.jcamp_dx.table import Scale, decode_line_table, decode_pairs
from quant.readers.options import ReadingOptions
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import source_of
from quant.spectra.spectra_set import SpectraSet
from quant.units import axis_unit_named

SUFFIXES = (".dx", ".jdx", ".jcm")

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

_NOT_READ = ("NTUPLES", "PEAK TABLE", "PEAK ASSIGNMENTS", "RADATA", "DATA TABLE", "PAGE")


def recognises_jcamp_dx(head: bytes, file_name: str) -> bool:
    """Tell whether a file begins with a label, or has a name that JCAMP-DX files have. Never raises."""
    start = head.removeprefix(b"\xef\xbb\xbf").replace(b"\x00", b"").lstrip(b"\xff\xfe \t\r\n")
    return start.startswith(b"##") or file_name.lower().endswith(SUFFIXES)


def read_jcamp_dx(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read a file that holds one spectrum.

    Departures from the standard whose meaning is certain are listed in the note ``reader``.

    Raises
    ------
    FileFormatError
        Damage, or a kind of content that is not read.
    ParameterError
        A way of finding the sample ID that is made for tables.
    """
    if options.sample_column is not None:
        raise ParameterError(
            f"{path.name} is JCAMP-DX, where sample_column finds no sample ID; use sample_label or sample_pattern."
        )
    blocks = read_blocks(path, decode_text(path, content))
    block = blocks[0]
    _refuse_compound(blocks)
    _note_encoding(block, content)
    x, y = _data(block, options)
    unit = _axis_unit(block, options)
    values, quantity = _ordinates(block, y, options)
    try:
        axis = SpectralAxis(x, unit)
    except ParameterError as problem:
        raise FileFormatError(path, str(problem)) from problem
    notes = _notes(block)
    found = naming.from_file_name(path, options)
    sample = found.pop("sample", None) or _sample_id(block, options)
    if block.deviations:
        notes["reader"] = "; ".join(block.deviations)
    return SpectraSet(values[np.newaxis], axis, [sample], quantity, [{**notes, **found}], [source_of(path, content)])


def _refuse_compound(blocks: list[Block]) -> None:
    """Refuse what is not one spectrum, by its name."""
    block = blocks[0]
    kind = block.find("DATA TYPE")
    if len(blocks) > 1 or block.find("BLOCKS") or (kind and plain_label(kind.value) == "LINK"):
        raise FileFormatError(
            block.path,
            f"a compound file of {len(blocks)} block(s) (LINK); expected one spectrum. Export each to its own file.",
        )
    for label in _NOT_READ:
        record = block.find(label)
        if record is not None:
            raise FileFormatError(
                block.path,
                f"##{record.written}= is not read; expected ##XYDATA= of one spectrum. Export it so.",
                line=record.line,
            )
    if kind and "INTERFEROGRAM" in plain_label(kind.value):
        raise FileFormatError(
            block.path, "an interferogram; expected a spectrum. Transform and export it.", line=kind.line
        )


def _note_encoding(block: Block, content: bytes) -> None:
    if content.startswith(b"\xef\xbb\xbf"):
        block.deviates("byte-order mark")
    elif not content.isascii():
        block.deviates("characters beyond ASCII")
    if b"\r" in content and b"\n" not in content:
        block.deviates("lines end with CR alone")


def _data(block: Block, options: ReadingOptions) -> tuple[FloatArray, FloatArray]:
    """Return abscissae and ordinates, factors applied."""
    record = block.find("XYDATA", "XYPOINTS")
    if record is None:
        labels = name_some((f"##{record.written}=" for record in block.records), 12)
        raise FileFormatError(block.path, f"no ##XYDATA=; found {labels}. Expected one spectrum.")
    n_points = _number(block, options, "NPOINTS")
    if n_points is not None and not (n_points == int(n_points) and n_points >= 0):
        raise FileFormatError(block.path, f"##NPOINTS= {n_points:g}; expected a whole number.")
    scale = Scale(
        first=_number(block, options, "FIRSTX"),
        last=_number(block, options, "LASTX"),
        step=_number(block, options, "DELTAX"),
        n_points=None if n_points is None else int(n_points),
        factor=_x_factor(block, options),
    )
    if options.decimal == ",":
        record = replace(record, text=record.text.replace(",", "."))
    form = re.sub(r"\s", "", record.text.partition("\n")[0]).upper()
    if form == "(X++(Y..Y))":
        table = decode_line_table(block, record, scale)
    elif form == "(XY..XY)":
        table = decode_pairs(block, record, scale)
    else:
        raise FileFormatError(
            block.path, f"##{record.written}= {form[:40]!r}; expected (X++(Y..Y)) or (XY..XY).", line=record.line
        )
    return table.x, table.y * _y_factor(block, options, float(table.y[0]))


def _number(block: Block, options: ReadingOptions, label: str) -> float | None:
    record = block.find(label)
    if record is None:
        return None
    value = number_from(record.value.replace(",", ".") if options.decimal == "," else record.value)
    if value is None or not np.isfinite(value):
        advice = ' If the comma is the decimal sign, set decimal = ",".' if "," in record.value else ""
        raise FileFormatError(
            block.path, f"##{label}= {record.value[:40]!r}; expected a number.{advice}", line=record.line
        )
    return value


def _factor(block: Block, options: ReadingOptions, label: str) -> float | None:
    value = _number(block, options, label)
    if value == 0:
        raise FileFormatError(block.path, f"##{label}= 0; expected a factor other than 0.")
    return value


def _x_factor(block: Block, options: ReadingOptions) -> float:
    value = _factor(block, options, "XFACTOR")
    if value is None:
        block.deviates("##XFACTOR= is missing, 1 is taken")  # a wrong guess fails at the check of the abscissae
    return 1.0 if value is None else value


def _y_factor(block: Block, options: ReadingOptions, first: float) -> float:
    """Return YFACTOR, compared with what FIRSTY says of the first ordinate written."""
    factor, stated = _factor(block, options, "YFACTOR"), _number(block, options, "FIRSTY")
    unscaled = stated is not None and abs(first - stated) <= 1e-3 * abs(stated)
    if factor is None:
        if not unscaled:
            raise FileFormatError(
                block.path, "no ##YFACTOR=, and no ##FIRSTY= that would show it to be 1. Export it again."
            )
        block.deviates("##YFACTOR= is missing, 1 is taken as FIRSTY has it")
        return 1.0
    if stated is not None and abs(first * factor - stated) > abs(factor) + 1e-3 * abs(stated):
        remark = (
            "is not scaled by YFACTOR" if unscaled else f"{stated:g} where the first ordinate is {first * factor:g}"
        )
        block.deviates(f"##FIRSTY= {remark}")
    return factor


def _axis_unit(block: Block, options: ReadingOptions) -> str:
    record = block.find("XUNITS")
    found = axis_unit_named(record.value) if record is not None else None
    if record is not None and found is None and options.axis_unit is None:
        raise FileFormatError(
            block.path,
            f"##XUNITS= {record.value[:40]!r}; expected 1/CM, NANOMETERS or MICROMETERS. State axis_unit if it is one.",
            line=record.line,
        )
    if found is None:
        block.deviates(
            "##XUNITS= is missing" if record is None else f"##XUNITS= {record.value[:40]!r} is not a known unit"
        )
    elif record is not None and record.value not in ("1/CM", "NANOMETERS", "MICROMETERS"):
        block.deviates(f"##XUNITS= {record.value!r} is taken for {found}")
    return naming.agreed_axis_unit(block.path, found, options)


def _ordinates(block: Block, y: FloatArray, options: ReadingOptions) -> tuple[FloatArray, str]:
    """Return ordinates and their quantity, percent turned into fractions."""
    record = block.find("YUNITS")
    found = None if record is None else naming.quantity_named(record.value) or "arbitrary"
    if record is None:
        block.deviates("##YUNITS= is missing")
    elif found == "arbitrary" and "ARBITRARY" not in record.value.upper():
        block.deviates(f"##YUNITS= {record.value[:40]!r} is taken for arbitrary units")
    quantity = naming.agreed_quantity(block.path, found, options)
    if options.quantity is None and quantity in ("transmittance", "reflectance"):
        largest = float(np.nanmax(y)) if np.isfinite(y).any() else 0.0
        if largest > naming.LARGEST_FRACTION:
            block.deviates(f"{quantity} up to {largest:.4g} is taken for percent")
            quantity = f"percent_{quantity}"
    elif record is not None and quantity is not None and quantity.startswith("percent_"):
        block.deviates(f"##YUNITS= {record.value[:40]!r} is divided by 100")
    return naming.as_quantity(block.path, y, quantity)


def _notes(block: Block) -> dict[str, str]:
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


def _sample_id(block: Block, options: ReadingOptions) -> str:
    label = options.sample_label or "TITLE"
    record = block.find(label.removeprefix("##").removesuffix("="))
    if record is None:
        labels = name_some((f"##{record.written}=" for record in block.records), 12)
        raise FileFormatError(
            block.path,
            f"no text under ##{label}=, which gives the sample ID; found {labels}. Name the label as sample_label.",
        )
    return " ".join(record.value.split())
