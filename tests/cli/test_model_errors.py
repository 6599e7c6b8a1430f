"""Models that are damaged, and spectra they were not made for: each with its exit code and its message."""

import io
import json
import zipfile
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

DATA = 3


def truncated(file: Path) -> None:
    file.write_bytes(file.read_bytes()[:2000])


def emptied(file: Path) -> None:
    file.write_bytes(b"")


def flipped(file: Path) -> None:
    content = bytearray(file.read_bytes())
    content[1000] ^= 0xFF
    file.write_bytes(content)


def rewritten(file: Path, entry: str, change: Callable[[bytes], bytes]) -> None:
    with zipfile.ZipFile(file) as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    parts[entry] = change(parts[entry])
    with zipfile.ZipFile(file, "w") as archive:
        for name, content in parts.items():
            archive.writestr(name, content)


def array_bytes(array: np.ndarray, **own: bool) -> bytes:
    stream = io.BytesIO()
    np.lib.format.write_array(stream, array, **own)
    return stream.getvalue()


def pickled(file: Path) -> None:
    rewritten(file, "arrays/axis.npy", lambda _: array_bytes(np.array([{"a": 1}], dtype=object)))


def newer(file: Path) -> None:
    rewritten(file, "manifest.json", lambda text: json.dumps({**json.loads(text), "format_version": 2}).encode())


def foreign(file: Path) -> None:
    rewritten(file, "manifest.json", lambda text: json.dumps({**json.loads(text), "format": "other"}).encode())


def altered(file: Path) -> None:
    rewritten(
        file,
        "arrays/test_predictions.npy",
        lambda content: array_bytes(np.load(io.BytesIO(content)) + np.array([0, 1e-3, 0])),
    )


INTACT = "expected one written by 'quant calibrate'. Fetch an undamaged copy.\n"
DAMAGE = {
    truncated: ("{file} is no intact model file (BadZipFile: File is not a zip file); ", INTACT),
    emptied: ("{file}: the file is empty; expected content. Fetch or export it again.", "\n"),
    flipped: ("{file} is no intact model file (", INTACT),
    pickled: (
        "{file} is no intact model file (ValueError: Object arrays cannot be loaded when allow_pickle=False); ",
        INTACT,
    ),
    newer: (
        "{file}: The model file has format version 2; this program reads version 1. ",
        "Use the program version that wrote it, or a newer one.\n",
    ),
    foreign: ("{file}: The manifest says format 'other'; expected 'quant calibration'.", "\n"),
    altered: (
        "{file}: the model no longer reproduces its own test predictions (off by up to 0.001 % m/m, allowed 8e-09). ",
        "Do not use it; fetch an undamaged copy or calibrate again.\n",
    ),
}


@pytest.mark.parametrize("damage", DAMAGE, ids=lambda damage: damage.__name__)
def test_damaged_models(project, damage: Callable[[Path], None]) -> None:
    file = project.make_model()
    damage(file)
    result = project.run("predict", file, project.folder / "spectra.csv")
    first, last = DAMAGE[damage]
    assert result.exit_code == DATA
    assert result.stderr.startswith(f"Error: {first.format(file=file)}")
    assert result.stderr.endswith(last)
    assert result.stdout == ""


def test_no_model(project) -> None:
    result = project.run("predict", project.folder / "acid.model", project.folder / "spectra.csv")
    assert result.exit_code == DATA
    assert "acid.model: no such file." in result.stderr


# New spectra that were recorded in another way.


def on_another_axis(new: SpectraSet) -> SpectraSet:
    return SpectraSet(new.values, SpectralAxis(np.linspace(1800.0, 1602.0, 41), "cm-1"), new.sample_ids)


def in_another_unit(new: SpectraSet) -> SpectraSet:
    return SpectraSet(new.values, SpectralAxis(new.axis.values, "nm"), new.sample_ids)


def of_another_quantity(new: SpectraSet) -> SpectraSet:
    return SpectraSet(new.values, new.axis, new.sample_ids, "transmittance")


def by_another_technique(new: SpectraSet) -> SpectraSet:
    return new.with_notes({"technique": "transmission"})


def at_another_resolution(new: SpectraSet) -> SpectraSet:
    return new.with_notes({"resolution": "8"})


OTHERWISE = {
    on_another_axis: "The spectra of S01, S02 lie on 1800 → 1602 cm⁻¹, 41 points, every 4.95 cm⁻¹; expected 1800 → "
    "1600 cm⁻¹, 41 points, every 5 cm⁻¹. Measure on the same axis, or set resample = true under [spectra].",
    in_another_unit: "The spectra of S01, S02 lie on 1800 → 1600 nm, 41 points, every 5 nm; expected 1800 → 1600 "
    "cm⁻¹, 41 points, every 5 cm⁻¹. The units differ: export them in one unit, or state axis_unit.",
    of_another_quantity: "The spectra are transmittance, but the model was made from absorbance. Export them as the "
    "calibration's were, or read them with quantity = 'absorbance' if that is what they are.",
    by_another_technique: "technique is transmission for S01, S02, but the calibration holds for ATR. Measure as for "
    "the calibration, or make a calibration for this technique.",
    at_another_resolution: "resolution is 8 for S01, S02, but the calibration holds for 4. Measure as for the "
    "calibration, or make a calibration for this resolution.",
}


@pytest.mark.parametrize("change", OTHERWISE, ids=lambda change: change.__name__)
def test_new_spectra_recorded_otherwise(project, make_spectra, change: Callable[[SpectraSet], SpectraSet]) -> None:
    model, new = project.make_model(), make_spectra(np.array([3.0, 5.0]), 3)
    assert project.run("predict", model, project.write_spectra(new, "new.csv")).exit_code == 0
    result = project.run("predict", model, project.write_spectra(change(new), "new.csv"))
    assert result.exit_code == DATA
    assert result.stderr == f"Error: {OTHERWISE[change]}\n"
    assert result.stdout == ""
