"""One block to one spectrum: axis, ordinates, and what they are."""

import re
from dataclasses import dataclass, replace

import numpy as np

from quant.arrays import FloatArray
from quant.errors import FileFormatError, ParameterError
from quant.readers import naming
from quant.readers.jcamp_dx.count import Scale
from quant.readers.jcamp_dx.labels import Block
from quant.readers.jcamp_dx.notes import labels_of
from quant.readers.jcamp_dx.numbers import count_of, decimal_of, factor_of, number_of
from quant.readers.jcamp_dx.statements import y_factor_of
from quant.readers.jcamp_dx.table import Table, decode_line_table, decode_pair_table
from quant.readers.options import ReadingOptions
from quant.spectra.axis import SpectralAxis
from quant.units import axis_unit_named

X_UNITS = {"cm-1": "1/CM", "nm": "NANOMETERS", "um": "MICROMETERS"}
Y_UNITS = {
    "absorbance": "ABSORBANCE",
    "transmittance": "TRANSMITTANCE",
    "reflectance": "REFLECTANCE",
    "log_reflectance": "LOG(1/R)",
    "arbitrary": "ARBITRARY UNITS",
}
"""What the standard calls units and ordinates, and what is written (LOG(1/R) is common, though not in the standard)."""

_Y_WRITTEN = (*Y_UNITS.values(), "KUBELKA-MUNK")


@dataclass(frozen=True)
class Spectrum:
    """One spectrum as a block holds it."""

    axis: SpectralAxis
    values: FloatArray
    quantity: str


def decode_spectrum(block: Block, options: ReadingOptions) -> Spectrum:
    """Decode the table of a block; how it departs from the standard is added to the block's deviations.

    Raises
    ------
    FileFormatError
        No table, or one that is damaged.
    AxisMismatchError, QuantityError
        The options state another unit or ordinate than the block.
    """
    unit = _axis_unit(block, options)
    with np.errstate(over="ignore", invalid="ignore"):  # what runs over is refused as not finite
        table = _table(block, options)
        values, quantity = _ordinates(block, table.y, options)
    if np.isinf(values).any():
        raise FileFormatError(block.path, "ordinates beyond the largest number; expected another ##YFACTOR=.")
    for array in (table.x, values):
        array.flags.writeable = False  # so that no copy is made of it
    try:
        return Spectrum(SpectralAxis(table.x, unit), values, quantity)
    except ParameterError as problem:
        raise FileFormatError(block.path, str(problem)) from problem


def _table(block: Block, options: ReadingOptions) -> Table:
    """Return abscissae and ordinates, factors applied."""
    record = block.find("XYDATA", "XYPOINTS")
    if record is None:
        raise FileFormatError(block.path, f"no ##XYDATA=; found {labels_of(block)}. Expected one spectrum.")
    decimal = decimal_of(block, options.decimal)
    scale = Scale(
        first=number_of(block, "FIRSTX", decimal),
        last=number_of(block, "LASTX", decimal),
        step=number_of(block, "DELTAX", decimal),
        n_points=count_of(block, "NPOINTS", decimal),
        factor=_x_factor(block, decimal),
    )
    form = re.sub(r"\s", "", record.head).upper()
    if decimal == "," and (options.decimal == "," or "." not in record.body):
        record = replace(record, text=f"{form}\n{record.body.replace(',', '.')}")
    if form == "(X++(Y..Y))":
        table = decode_line_table(block, record, scale)
    elif form == "(XY..XY)":
        if record.label == "XYDATA":
            block.deviates("##XYDATA= holds pairs, as ##XYPOINTS= does")
        table = decode_pair_table(block, record, scale)
    else:
        raise FileFormatError(
            block.path, f"##{record.written}= {form[:40]!r}; expected (X++(Y..Y)) or (XY..XY).", line=record.line
        )
    np.multiply(table.y, y_factor_of(block, table.y, decimal), out=table.y)
    return table


def _x_factor(block: Block, decimal: str) -> float:
    value = factor_of(block, "XFACTOR", decimal)
    if value is None:
        block.deviates("##XFACTOR= is missing, 1 is taken")  # a wrong guess fails at the check of the abscissae
    return 1.0 if value is None else value


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
    elif record is not None and record.value not in X_UNITS.values():
        block.deviates(f"##XUNITS= {record.value!r} is taken for {found}")
    return naming.agreed_axis_unit(block.path, found, options)


def _ordinates(block: Block, y: FloatArray, options: ReadingOptions) -> tuple[FloatArray, str]:
    """Return ordinates and their quantity, percent turned into fractions."""
    record = block.find("YUNITS")
    found = None if record is None else naming.quantity_named(record.value) or "arbitrary"
    quantity = naming.agreed_quantity(block.path, found, options)
    if record is None:
        block.deviates("##YUNITS= is missing")
    elif quantity is not None and quantity.startswith("percent_"):
        block.deviates(f"##YUNITS= {record.value[:40]!r} is divided by 100")
    elif record.value not in _Y_WRITTEN:
        meant = "arbitrary units" if quantity == "arbitrary" else quantity
        block.deviates(f"##YUNITS= {record.value[:40]!r} is taken for {meant}")
    if options.quantity is None and quantity in ("transmittance", "reflectance"):
        largest = float(np.fmax.reduce(y))
        if largest > naming.LARGEST_FRACTION:
            block.deviates(f"{quantity} up to {largest:.4g} is taken for percent")
            quantity = f"percent_{quantity}"
    return naming.as_quantity(block.path, y, quantity)
