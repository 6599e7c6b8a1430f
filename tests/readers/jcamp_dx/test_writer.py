"""What is written, and what cannot be."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.readers.jcamp_dx.encode import FORMS
from quant.readers.jcamp_dx.writer import write_jcamp_dx
from quant.readers.read import read_spectra
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

NOTES = {"batch": "7", "technique": "ATR", "resolution": "4", "date": "2024-05-01", "sample_description": "a\nb"}


def one(values: list[float], unit: str = "cm-1", sample: str = "S 1", **notes: str) -> SpectraSet:
    axis = SpectralAxis(np.linspace(4000, 400, len(values)), unit)
    return SpectraSet([values], axis, [sample], notes=[notes])


def test_the_smallest_file(tmp_path: Path) -> None:
    write_jcamp_dx(one([0.1, 0.2, 0.2, 0.2, 0.15], **NOTES), tmp_path / "a.dx", y_factor=0.01)
    assert (tmp_path / "a.dx").read_text().splitlines() == [
        "##TITLE= S 1",
        "##JCAMP-DX= 4.24",
        "##DATA TYPE= INFRARED SPECTRUM",
        "##DATE= 2024-05-01",
        "##RESOLUTION= 4",
        "##SAMPLING PROCEDURE= ATR",
        "##SAMPLE DESCRIPTION= a",
        "b",
        "##$BATCH= 7",
        "##XUNITS= 1/CM",
        "##YUNITS= ABSORBANCE",
        "##XFACTOR= 1",
        "##YFACTOR= 0.01",
        "##FIRSTX= 4000.0",
        "##LASTX= 400.0",
        "##NPOINTS= 5",
        "##DELTAX= -900.0",
        "##FIRSTY= 0.10",
        "##MAXY= 0.20",
        "##MINY= 0.10",
        "##XYDATA= (X++(Y..Y))",
        "4000.0A0J0%Tn",  # 0.15 / 0.01 is rounded to 15 = 20 - 5
        "400.0A5",
        "##END=",
    ]


@pytest.mark.parametrize(
    ("first", "factor", "written"),
    [
        (-0.00358, 1e-5, "-0.00358"),
        (0.1 + 0.2, 1e-7, "0.3000000"),
        (1234.0, 1.0, "1234"),
        (0.0, 1e-5, "0.00000"),
        (1.5e-20, 1e-21, "1.5E-20"),
    ],
)
def test_numbers_are_written_short(tmp_path: Path, first: float, factor: float, written: str) -> None:
    write_jcamp_dx(one([first, 2 * first, 3 * first]), tmp_path / "a.dx", y_factor=factor)
    assert f"##FIRSTY= {written}\n" in (tmp_path / "a.dx").read_text()
    after = read_spectra(tmp_path / "a.dx")
    assert after.values[0, 0] == pytest.approx(first)
    assert "reader" not in after.notes[0]


def test_labels_of_ordinates_are_left_out_where_ordinates_are_missing(tmp_path: Path) -> None:
    write_jcamp_dx(one([np.nan, 1.0, 2.0]), tmp_path / "a.dx")
    text = (tmp_path / "a.dx").read_text()
    assert "FIRSTY" not in text
    assert "##MAXY= 2.000000000\n" in text
    write_jcamp_dx(one([np.nan, np.nan]), tmp_path / "b.dx")
    assert "MAXY" not in (tmp_path / "b.dx").read_text()
    assert np.isnan(read_spectra(tmp_path / "b.dx").values).all()


@pytest.mark.parametrize("form", FORMS)
def test_a_round_trip_keeps_numbers_and_notes(tmp_path: Path, form: str) -> None:
    values = [*np.sin(np.arange(200.0)), *[0.25] * 120, np.nan, np.nan, -1.0]
    before = one(values, **NOTES, title="other than the ID")
    write_jcamp_dx(before, tmp_path / "a.dx", form)
    after = read_spectra(tmp_path / "a.dx")
    assert np.allclose(after.values, before.values, rtol=0, atol=5.01e-10, equal_nan=True)
    assert np.allclose(after.axis.values, before.axis.values, rtol=1e-14)
    assert dict(after.notes[0]) == {**NOTES, "title": "other than the ID", "file": "a.dx"}
    assert after.sample_ids == before.sample_ids
    assert max(map(len, (tmp_path / "a.dx").read_text().splitlines())) <= 80


def test_what_reading_adds_is_not_written(tmp_path: Path) -> None:
    write_jcamp_dx(one([1, 2], file="x.dx", reader="odd"), tmp_path / "a.dx")
    assert dict(read_spectra(tmp_path / "a.dx").notes[0]) == {"title": "S 1", "file": "a.dx"}


@pytest.mark.parametrize("quantity", ["absorbance", "transmittance", "reflectance", "log_reflectance", "arbitrary"])
@pytest.mark.parametrize("unit", ["cm-1", "nm", "um"])
def test_unit_and_quantity_survive(tmp_path: Path, unit: str, quantity: str) -> None:
    spectra = SpectraSet([[0.5, 0.25, 0.75]], SpectralAxis([1, 2, 3], unit), ["S"], quantity)
    write_jcamp_dx(spectra, tmp_path / "a.dx")
    after = read_spectra(tmp_path / "a.dx")
    assert (after.axis.unit, after.quantity) == (unit, quantity)
    assert np.allclose(after.values, spectra.values, atol=1e-9)
    assert "reader" not in after.notes[0]


@pytest.mark.parametrize(
    ("spectra", "keywords", "words"),
    [
        (one([1, 2])[[0, 0]], {}, "2 spectra"),
        (one([1, 2], unit="point"), {}, "'point'"),
        (SpectraSet([[1, 2, 3]], SpectralAxis([1, 2, 4], "nm"), ["S"]), {}, "not evenly spaced"),
        (one([1, 2]), {"form": "ZIP"}, "form"),
        (one([1, 2]), {"y_factor": 1e-12}, "y_factor"),
        (one([1, 2]), {"y_factor": -1.0}, "y_factor"),
        (one([1, 2], sample="a $$ b"), {}, "TITLE"),
        (one([1, 2], owner="a\n##END="), {}, "OWNER"),
        (one([1, 2], **{"a=b": "c"}), {}, "A=B"),
    ],
)
def test_refusals_leave_no_file(tmp_path: Path, spectra: SpectraSet, keywords: dict[str, object], words: str) -> None:
    with pytest.raises(ParameterError) as refusal:
        write_jcamp_dx(spectra, tmp_path / "a.dx", **keywords)
    assert words in str(refusal.value)
    assert not any(tmp_path.iterdir())
