"""One spectrum a file in two columns."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import AxisMismatchError, FileFormatError, ParameterError, QuantError, QuantityError
from quant.readers.read import read_spectra
from quant.readers.two_columns import recognises_two_columns, write_two_columns
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet


def read_text(folder: Path, text: str, name: str = "S7_2.txt", **options: object) -> SpectraSet:
    (folder / name).write_bytes(text.encode("utf-8"))
    return read_spectra(folder / name, **options)


@pytest.mark.parametrize(
    ("text", "options"),
    [
        ("900,0.1\n902,0.2", {}),
        ("900\t0.1\n902\t0.2\n", {}),
        ("900;0.1\n902;0.2\n", {}),
        ("  900   0.1\n902 0.2\n\n", {}),
        ("900;0,1\n902;0,2\n", {"decimal": ","}),
        ("900 0,1\n902 0,2\n", {"decimal": ","}),
        ("Measured on Monday, 5\nat 3, by me\nx,y\n900,0.1\n902,0.2\n", {}),
        ("2,400\nwavelength,signal\n900,0.1\r\n902,0.2\r\n", {}),
        ("\ufeffwavelength,signal\r900,0.1\r902,0.2\r", {}),
        ("x,%T\n900,10\n902,20\n", {}),
        ("900,10\n902,20\n", {"quantity": "percent_transmittance"}),
    ],
)
def test_layouts_that_mean_the_same(tmp_path: Path, text: str, options: dict[str, object]) -> None:
    spectra = read_text(tmp_path, text, **options)
    assert spectra.axis.values.tolist() == [900, 902]
    assert spectra.values.tolist() == [[0.1, 0.2]]
    assert spectra.sample_ids == ("S7_2",)


def test_names_give_unit_and_quantity(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, "Wavenumber [cm-1];Transmittance (%)\n4000;90\n3998;91\n")
    assert (spectra.axis.unit, spectra.quantity) == ("cm-1", "transmittance")
    assert spectra.axis.direction == "falling"
    assert spectra.values.tolist() == [[0.9, 0.91]]


def test_the_pattern_gives_sample_id_and_notes(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, "1,2\n3,4\n", sample_pattern=r"(?P<sample>S\d+)_(?P<replicate>\d)")
    assert spectra.sample_ids == ("S7",)
    assert {**spectra.notes[0], "reader": ""} == {"replicate": "2", "file": "S7_2.txt", "reader": ""}
    with pytest.raises(ParameterError, match="sample_pattern"):
        read_text(tmp_path, "1,2\n3,4\n", sample_label="TITLE")


def test_a_missing_ordinate_is_nan(tmp_path: Path) -> None:
    assert np.isnan(read_text(tmp_path, "1,2\n2,3\n3,nan\n").values[0, 2])


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("x,y\n900,0.1\n902,0.2\n904,x\n", "line 4: found 'x'"),
        ("x,y\n900,0.1\n902,0.2\n904\n", "line 4: found 1 cell"),
        ("x,y\n900,0.1\n902,0.2\n904,1,2\n", "line 4: found 3 cell"),
        ("900,0.1\n902,0.2\n904,1_0\n", "line 3: found '1_0'"),
        ("900,0.1\n902,0.2\n904,inf\n", "line 3: found 'inf'"),
        ("900,0.1\n902,0.2\n901,0.2\n", "turns or repeats at point 3"),
        ("900,0.1\n900,0.2\n", "turns or repeats"),
        ("900,0.1\n", "no two lines of two numbers"),
        ("900,50\n902,60\n", "percent_transmittance"),
    ],
)
def test_damage_is_refused_by_line(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        read_text(tmp_path, text, format="two_columns")


def test_a_decimal_comma_is_found_out_and_a_wrong_option_refused(tmp_path: Path) -> None:
    text = "900;0,1\n902;0,2\n"
    assert read_text(tmp_path, text).values.tolist() == [[0.1, 0.2]]
    with pytest.raises(FileFormatError, match=r"cannot be read with decimal = '\.'\. Set decimal = \",\""):
        read_text(tmp_path, text, decimal=".", format="two_columns")


def test_options_that_contradict_the_names_are_refused(tmp_path: Path) -> None:
    text = "nm,absorbance\n900,0.1\n902,0.2\n"
    with pytest.raises(AxisMismatchError, match="axis_unit"):
        read_text(tmp_path, text, axis_unit="cm-1")
    with pytest.raises(QuantityError, match="quantity"):
        read_text(tmp_path, text, quantity="reflectance")


def test_recognised_by_its_lines() -> None:
    assert recognises_two_columns(b"a text\n1,2\n3,4\n5,", "a.txt")
    assert recognises_two_columns(b"1;2,5\n3;4,5", "a.txt")
    assert not recognises_two_columns(b"1,2\n3,4\nand more\n5,6\n", "a.txt")
    assert not recognises_two_columns(b"sample,ethanol\nS1,2\nS2,3\n", "reference.csv")
    assert not recognises_two_columns(b"\x89PNG\x00", "a.png")


def test_a_file_cut_anywhere_is_read_or_refused(tmp_path: Path) -> None:
    text = "nm,absorbance\n900,0.1\n902,0.2\n904,1e-1\n"
    for length in range(1, len(text), 3):
        try:
            assert isinstance(read_text(tmp_path, text[:length]), SpectraSet)
        except QuantError:
            continue


@pytest.mark.parametrize(("separator", "decimal"), [(",", "."), (";", ","), ("tab", ","), ("space", ".")])
def test_a_round_trip_is_exact(tmp_path: Path, separator: str, decimal: str) -> None:
    values = np.random.default_rng(1).random((1, 30))
    before = SpectraSet(values, SpectralAxis(np.linspace(2500, 900, 30), "nm"), ["S"], "arbitrary")
    write_two_columns(before, tmp_path / "S.txt", separator, decimal)
    after = read_spectra(tmp_path / "S.txt", separator=separator, decimal=decimal)
    assert np.array_equal(after.values, before.values)
    assert (after.axis, after.sample_ids, after.quantity) == (before.axis, before.sample_ids, before.quantity)


def test_what_cannot_be_written_leaves_no_file(tmp_path: Path) -> None:
    spectra = SpectraSet([[1, 2], [3, 4]], SpectralAxis([1, 2]), ["S", "T"])
    with pytest.raises(ParameterError, match="2 spectra"):
        write_two_columns(spectra, tmp_path / "a.csv")
    with pytest.raises(ParameterError, match="two different signs"):
        write_two_columns(spectra[[0]], tmp_path / "a.csv", ",", ",")
    assert not any(tmp_path.iterdir())
