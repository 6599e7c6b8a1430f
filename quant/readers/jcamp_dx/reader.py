"""Reader of JCAMP-DX files: one spectrum, or several on one axis."""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from quant.errors import AxisMismatchError, FileFormatError, ParameterError, QuantityError
from quant.files import decode_text
from quant.readers import naming
from quant.readers.jcamp_dx.labels import Block, read_blocks
from quant.readers.jcamp_dx.notes import notes_of, sample_id_of
from quant.readers.jcamp_dx.parts import Part, choose, parts_of
from quant.readers.jcamp_dx.spectrum import decode_spectrum
from quant.readers.options import ReadingOptions
from quant.spectra.provenance import Source, source_of
from quant.spectra.spectra_set import SpectraSet, join_spectra


def read_jcamp_dx(path: Path, content: bytes, options: ReadingOptions) -> SpectraSet:
    """Read every spectrum of a file, or the one that the option ``block`` names.

    Departures from the standard whose meaning is certain, and blocks left out because they hold no spectrum, are listed
    in the note ``reader``. Of a file of several blocks each spectrum has the note ``block``: number and title.

    Raises
    ------
    FileFormatError
        Damage, or no spectrum in the file.
    AxisMismatchError, QuantityError
        Spectra on different axes or of different ordinates.
    ParameterError
        A way of finding the sample ID that is made for tables, or a block that is not there.
    """
    if options.sample_column is not None:
        raise ParameterError(
            f"{path.name} is JCAMP-DX, where sample_column finds no sample ID; use sample_label or sample_pattern."
        )
    blocks = read_blocks(path, decode_text(path, content))
    for block in blocks:
        _note_encoding(block, content)
    parts = parts_of(blocks)
    chosen = choose(parts, options.block)
    spectral = [part for part in chosen if not part.fault]
    if not spectral:
        where = f"block {chosen[0]}: " if len(parts) > 1 else ""
        raise FileFormatError(
            path, f"{where}{chosen[0].fault}; expected ##XYDATA= of a spectrum. Export it so.", line=chosen[0].line
        )
    left_out = [f"block {part} is left out: {part.fault}" for part in chosen if part.fault]
    source = source_of(path, content)
    sets = [_spectra_of(part, options, len(parts), left_out, source) for part in spectral]
    return _join(path, spectral, sets, options)


def _spectra_of(
    part: Part, options: ReadingOptions, n_parts: int, left_out: Sequence[str], source: Source
) -> SpectraSet:
    """Return the spectrum of one part."""
    block = part.block
    spectrum = decode_spectrum(block, options)
    found = naming.from_file_name(block.path, options)
    pages = part.name != block.title and options.sample_label is None
    sample = found.pop("sample", None) or (part.name if pages else sample_id_of(block, options))
    notes = notes_of(block)
    outer = block.outer
    remarks = [*block.deviations, *left_out]
    while outer is not None:  # what a LINK block says holds for its blocks
        notes = {**notes_of(outer), **notes}
        remarks = [*outer.deviations, *(remark for remark in remarks if remark not in outer.deviations)]
        outer = outer.outer
    if n_parts > 1:
        notes["block"] = f"{part.number} {part.name}"
    if remarks:
        notes["reader"] = "; ".join(remarks)
    row = spectrum.values[np.newaxis]
    return SpectraSet(row, spectrum.axis, [sample], spectrum.quantity, [{**notes, **found}], [source])


def _join(path: Path, parts: Sequence[Part], sets: Sequence[SpectraSet], options: ReadingOptions) -> SpectraSet:
    try:
        return join_spectra(sets, resample=options.resample)
    except (AxisMismatchError, QuantityError) as problem:
        held = "; ".join(
            f"{part} ({spectra.quantity}, {spectra.axis})" for part, spectra in zip(parts, sets, strict=True)
        )
        why = f" {problem}" if options.resample else ""
        raise type(problem)(
            f"{path} holds blocks that differ in axis or ordinate: {held}. Expected spectra alike: choose one, "
            f'block = "{parts[0].name}" (its title or number), or export them apart.{why}'
        ) from problem


def _note_encoding(block: Block, content: bytes) -> None:
    if content.startswith(b"\xef\xbb\xbf"):
        block.deviates("byte-order mark")
    elif not content.isascii():
        block.deviates("characters beyond ASCII")
    if b"\r" in content and b"\n" not in content:
        block.deviates("lines end with CR alone")
