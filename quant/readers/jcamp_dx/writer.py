"""Writer of JCAMP-DX files."""

import math
from decimal import Decimal
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import one_of
from quant.errors import ParameterError
from quant.files import write_text
from quant.readers.jcamp_dx.encode import FORMS, encode_lines
from quant.readers.jcamp_dx.labels import plain_label
from quant.readers.jcamp_dx.notes import NOTE_OF_LABEL
from quant.readers.jcamp_dx.spectrum import X_UNITS, Y_UNITS
from quant.spectra.axis import SAME_POSITION, SpectralAxis
from quant.spectra.spectra_set import SpectraSet

LARGEST_ORDINATE = 2**31 - 1  # readers that keep ordinates in 32 bits are common
_NOT_WRITTEN = ("file", "reader")  # what reading adds


def write_jcamp_dx(spectra: SpectraSet, path: str | Path, form: str = "DIFDUP", y_factor: float | None = None) -> None:
    """Write one spectrum as JCAMP-DX 4.24, with its notes.

    Notes that have a label of their own get it; any other note ``batch`` is written as ``##$BATCH=``.

    Parameters
    ----------
    spectra : SpectraSet
        One spectrum on an evenly spaced axis.
    path : str or path
        Written whole or not at all.
    form : {"DIFDUP", "DIF", "SQZ", "PAC", "FIX"}
        Form of the ordinates.
    y_factor : float, optional
        Ordinates are rounded to multiples of it; by default the smallest power of ten for which they fit 32 bits.

    Raises
    ------
    ParameterError
        More than one spectrum, an axis without unit or not evenly spaced, ordinates too large for `y_factor`, or a note
        that would read as another label or as a comment.
    """
    one_of("form", form, FORMS)
    if len(spectra) != 1:
        raise ParameterError(f"{len(spectra)} spectra; expected one. Write them one by one: spectra[[i]].")
    axis = spectra.axis
    _check_axis(axis)
    factor = _y_factor(spectra.values[0], y_factor)
    scaled = np.rint(spectra.values[0] / factor)
    if np.nanmax(np.abs(scaled), initial=0) > LARGEST_ORDINATE:
        raise ParameterError(
            f"y_factor = {factor:g} gives ordinates beyond {LARGEST_ORDINATE}; expected a larger factor, or None."
        )
    ordinates = [None if math.isnan(value) else int(value) for value in scaled.tolist()]
    lines = encode_lines(_abscissae(axis), ordinates, form)
    labels = _labels(spectra, factor)
    table = "\n".join(
        [*(f"##{label}= {text}" for label, text in labels), "##XYDATA= (X++(Y..Y))", *lines, "##END=", ""]
    )
    write_text(path, table)


def _check_axis(axis: SpectralAxis) -> None:
    if axis.unit not in X_UNITS:
        raise ParameterError(
            f"The axis is in {axis.unit!r}; JCAMP-DX expects one of {', '.join(X_UNITS)}. "
            "Use write_matrix or write_two_columns."
        )
    even = np.linspace(axis.values[0], axis.values[-1], len(axis))
    if len(axis) < 2 or np.abs(axis.values - even).max() > SAME_POSITION * axis.spacing:
        raise ParameterError(
            f"The axis ({axis}) is not evenly spaced; JCAMP-DX tables of ordinates expect equal steps. "
            "Use write_matrix or write_two_columns, or resample first."
        )


def _y_factor(values: FloatArray, given: float | None) -> float:
    if given is not None:
        if not (math.isfinite(given) and given > 0):
            raise ParameterError(f"y_factor = {given}; expected a number above 0.")
        return float(given)
    largest = float(np.nanmax(np.abs(values), initial=0))
    return float(f"1e{math.ceil(math.log10(largest / LARGEST_ORDINATE))}") if largest > 0 else 1.0


def _abscissae(axis: SpectralAxis) -> list[str]:
    """Return positions as text, rounded to a thousandth of their spacing: they serve as a check only."""
    decimals = max(0, 3 - math.floor(math.log10(axis.spacing)))
    return [f"{value:.{decimals}f}" for value in np.linspace(axis.values[0], axis.values[-1], len(axis)).tolist()]


def _labels(spectra: SpectraSet, factor: float) -> list[tuple[str, str]]:
    """Return the labels above the table, in the order of the standard."""
    notes = {key: value for key, value in spectra.notes[0].items() if key not in _NOT_WRITTEN}
    sample = spectra.sample_ids[0]
    if notes.get("title") == sample:
        del notes["title"]
    axis, values = spectra.axis, spectra.values[0]
    own = [
        (label, notes.pop(note))
        for label, note in NOTE_OF_LABEL.items()
        if label not in ("TITLE", "LONG DATE") and note in notes
    ]
    users = [(f"${name.upper()}", text) for name, text in notes.items()]
    numbers = {
        "XUNITS": X_UNITS[axis.unit],
        "YUNITS": Y_UNITS[spectra.quantity],
        "XFACTOR": "1",
        "YFACTOR": _plain(Decimal(repr(factor)).normalize()),
        "FIRSTX": repr(float(axis.values[0])),
        "LASTX": repr(float(axis.values[-1])),
        "NPOINTS": str(len(axis)),
        "DELTAX": repr(float(axis.values[-1] - axis.values[0]) / (len(axis) - 1)),
        **_ordinate_labels(np.rint(values / factor), factor),
    }
    head = [("TITLE", sample), ("JCAMP-DX", "4.24"), ("DATA TYPE", "INFRARED SPECTRUM")]
    for label, text in (*head[:1], *own, *users):
        _check_label(label, text)
    return [*head, *own, *users, *numbers.items()]


def _ordinate_labels(ordinates: FloatArray, factor: float) -> dict[str, str]:
    """Return what the file says of its ordinates: where they have no check values, readers see damage by it.

    Zeros at the end are kept: how exactly an ordinate is stated is how closely it is checked.
    """
    if np.isnan(ordinates).all():
        return {}
    found = {"FIRSTY": ordinates[0], "MAXY": np.nanmax(ordinates), "MINY": np.nanmin(ordinates)}
    step = Decimal(repr(factor)).normalize()
    known = {label: int(value) * step for label, value in found.items() if not math.isnan(value)}
    return {label: _plain(Decimal(f"{number:.12g}")) for label, number in known.items()}


def _plain(number: Decimal) -> str:
    """Return a number without exponent, unless that would be long.

    >>> _plain(Decimal("1E-5") * -358), _plain(Decimal("1E-30"))
    ('-0.00358', '1E-30')
    """
    return f"{number:f}" if abs(number.adjusted()) < 15 else f"{number:E}"


def _check_label(label: str, text: str) -> None:
    """Refuse text that would not come back as it is."""
    own_lines = any(line.lstrip().startswith("##") for line in text.split("\n")[1:])
    if (
        not text.strip()
        or "$$" in text
        or own_lines
        or "\r" in text
        or "=" in label
        or "\n" in label
        or not plain_label(label)
    ):
        raise ParameterError(
            f"##{label}= {text[:40]!r} cannot be written in JCAMP-DX; expected text without '$$' and without lines "
            "that start with '##', and a name without '='. Change the note or the sample ID, or use write_matrix."
        )
