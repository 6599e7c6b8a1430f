"""Spectra as a table."""

from collections.abc import Mapping
from pathlib import Path

import numpy as np
import pytest

from quant.errors import AxisMismatchError, FileFormatError, ParameterError, QuantError
from quant.readers.matrix import recognises_matrix, write_matrix
from quant.readers.read import read_spectra
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

SMALL = "sample,batch,902,900\nS1,B1,0.1,0.2\nS1,,0.3,\nS2,B2,-1e-1,nan\n"


def read_text(folder: Path, text: str | bytes, **options: object) -> SpectraSet:
    file = folder / "a.csv"
    file.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
    return read_spectra(file, **options)


def without_evidence(notes: Mapping[str, str]) -> dict[str, str]:
    return {name: text for name, text in notes.items() if name != "reader"}


def test_a_small_table(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, SMALL)
    assert spectra.sample_ids == ("S1", "S1", "S2")
    assert spectra.axis == SpectralAxis([902, 900], "point")
    assert np.array_equal(spectra.values, [[0.1, 0.2], [0.3, np.nan], [-0.1, np.nan]], equal_nan=True)
    assert all("spectra in rows" in row["reader"] for row in spectra.notes)
    assert [without_evidence(row) for row in spectra.notes] == [
        {"batch": "B1", "file": "a.csv"},
        {"file": "a.csv"},
        {"batch": "B2", "file": "a.csv"},
    ]
    assert spectra.quantity == "absorbance"


@pytest.mark.parametrize(
    ("text", "options"),
    [
        ("sample\t900\t902\nS1\t0.1\t0.2\n", {}),
        ("sample;900;902\nS1;0.1;0.2\n", {}),
        ("sample 900 902\n\nS1   0.1 0.2", {}),
        ("sample;900,0;902,0\nS1;0,1;0,2\n", {"decimal": ","}),
        ("sample 900,0 902,0\nS1 0,1 0,2\n", {"decimal": ","}),
        ("902,900,id\n0.2,0.1,S1\n", {}),
        ("902,code,900\n0.2,S1,0.1\n", {"sample_column": "code"}),
        ("\r\nsample,900,902\r\nS1,0.1,0.2\r\n", {}),
        ("\ufeffsample,900,902\rS1,0.1,0.2\r", {}),
        ('"sample","900","902"\n"S1","0.1","0.2"\n', {}),
        ("sample;900;902\nS1;10;20\n", {"quantity": "percent_transmittance"}),
        ("sample;900;902;quantity\nS1;10;20;percent_reflectance\n", {}),
    ],
)
def test_layouts_that_mean_the_same(tmp_path: Path, text: str, options: dict[str, object]) -> None:
    spectra = read_text(tmp_path, text, **options)
    assert sorted(zip(spectra.axis.values.tolist(), spectra.values[0].tolist(), strict=True)) == [
        (900, 0.1),
        (902, 0.2),
    ]
    assert spectra.sample_ids == ("S1",)


def test_units_in_the_header(tmp_path: Path) -> None:
    assert read_text(tmp_path, "id,900 nm,902nm\nS1,1,2\n").axis.unit == "nm"
    assert read_text(tmp_path, "id,900,902\nS1,1,2\n", axis_unit="nm").axis.unit == "nm"
    with pytest.raises(AxisMismatchError, match="'nm', but axis_unit = 'cm-1'"):
        read_text(tmp_path, "id,900 nm,902 nm\nS1,1,2\n", axis_unit="cm-1")


def test_latin_1_and_utf_16(tmp_path: Path) -> None:
    text = "sample,900,902\nMüller,0.1,0.2\n"
    for encoding in ("latin-1", "utf-16", "utf-8-sig"):
        assert read_text(tmp_path, text.encode(encoding)).sample_ids == ("Müller",)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("id,900,902\nS1,1\n", "line 2: found 2 cells; expected 3"),
        ("id,900,902\nS1,1,2\nS2,1,2,3\n", "line 3: found 4 cells; expected 3"),
        ("id,900,902\nS1,1,two\n", "line 2: found 'two' in column '902'"),
        ("id,900,902\nS1,1,1_0\n", "line 2: found '1_0' in column '902'"),
        ("id,900,902\nS1,1,inf\n", "line 2: found 'inf' in column '902'"),
        ("id,900,902\n ,1,2\n", "line 2: no sample ID"),
        ("id,900,902\n", "expected a header and at least one spectrum"),
        ("id,900,900\nS1,1,2\n", "line 1: .*repeats"),
        ("id,900,902,901\nS1,1,2,3\n", "line 1: .*turns"),
        ("id,900 nm,902 cm-1\nS1,1,2\n", "line 1: .*one unit"),
        ("id,900 nm,902\nS1,1,2\n", "line 1: .*one unit"),
        ("id,a,a,900,902\nS1,x,y,1,2\n", "line 1: more than one column called 'a'"),
        ("code,900,902\nS1,1,2\n", "name the right one as sample_column"),
        ("id,900,902\nS1,10,20\n", "percent_transmittance"),
        ("id,900,902,quantity\nS1,1,2,counts\n", "column 'quantity' holds 'counts'"),
        ('id,900,902\n"S1,1,2\n', "line 2"),
    ],
)
def test_damage_is_refused_by_line(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        read_text(tmp_path, text)


@pytest.mark.parametrize(
    "text", ["id;900;902\nS1;0,1;0,2\n", "id;900,5;902,5\nS1;0,1;0,2\n", "id 900 902\nS1 0,1 0,2\n"]
)
def test_a_decimal_comma_is_found_out_and_a_wrong_option_refused(tmp_path: Path, text: str) -> None:
    spectra = read_text(tmp_path, text)
    assert spectra.values.tolist() == [[0.1, 0.2]]
    assert "decimal comma" in spectra.notes[0]["reader"]
    with pytest.raises(FileFormatError, match=r'[Ss]et decimal = ","'):
        read_text(tmp_path, text, format="matrix", decimal=".")


def test_headers_without_numbers_are_refused(tmp_path: Path) -> None:
    with pytest.raises(FileFormatError, match="0 of 3 column headings are axis positions"):
        read_text(tmp_path, "id,X900,X902\nS1,1,2\n", format="matrix")


def test_ways_to_the_sample_id_that_are_not_for_tables(tmp_path: Path) -> None:
    with pytest.raises(ParameterError, match="sample_column"):
        read_text(tmp_path, SMALL, sample_pattern="(?P<sample>a)")


def test_a_file_cut_anywhere_is_read_or_refused(tmp_path: Path) -> None:
    for length in range(1, len(SMALL), 3):
        try:
            assert isinstance(read_text(tmp_path, SMALL[:length]), SpectraSet)
        except QuantError:
            continue


def test_recognised_by_its_header() -> None:
    assert recognises_matrix(SMALL.encode(), "a.csv")
    assert recognises_matrix(b"id;900,5;902,5\n", "a.csv")
    assert not recognises_matrix(b"sample,ethanol,batch\nS1,1,2\n", "reference.csv")
    assert not recognises_matrix(b"900,902\n1,2\n", "a.csv")
    assert not recognises_matrix(b"\x00\x01", "a.bin")


@pytest.mark.parametrize(("separator", "decimal"), [(",", "."), (";", ","), ("tab", ","), ("space", ".")])
def test_a_round_trip_is_exact(tmp_path: Path, separator: str, decimal: str) -> None:
    values = np.random.default_rng(1).normal(size=(3, 40))
    values[1, 2] = np.nan
    notes = [{"batch": "a", "lot": "1"}] * 3 if separator == "space" else [{"batch": 'a, "b"; c'}, {}, {"lot": "1"}]
    before = SpectraSet(values, SpectralAxis(np.linspace(4000, 400, 40), "cm-1"), ["1", "2", "2"], "reflectance", notes)
    write_matrix(before, tmp_path / "a.txt", separator, decimal)
    after = read_spectra(tmp_path / "a.txt", separator=separator, decimal=decimal)
    assert np.array_equal(after.values, before.values, equal_nan=True)
    assert (after.axis, after.sample_ids, after.quantity) == (before.axis, before.sample_ids, before.quantity)
    assert [{**row, "file": "a.txt"} for row in before.notes] == [without_evidence(row) for row in after.notes]


def test_notes_to_write_may_be_chosen(tmp_path: Path) -> None:
    spectra = SpectraSet([[1, 2]], SpectralAxis([1, 2]), ["S"], notes=[{"a": "1", "b": "2"}])
    write_matrix(spectra, tmp_path / "a.csv", note_columns=["b", "c"])
    assert (tmp_path / "a.csv").read_text() == "sample,b,c,1.0,2.0\nS,2,,1.0,2.0\n"


def test_what_cannot_be_written_leaves_no_file(tmp_path: Path) -> None:
    spectra = SpectraSet([[1, 2]], SpectralAxis([1, 2]), ["S 1"])
    with pytest.raises(ParameterError, match="two different signs"):
        write_matrix(spectra, tmp_path / "a.csv", ",", ",")
    with pytest.raises(ParameterError, match="'S 1'"):
        write_matrix(spectra, tmp_path / "a.csv", "space")
    assert not any(tmp_path.iterdir())


def test_a_large_table(tmp_path: Path) -> None:
    values = np.random.default_rng(0).random((500, 2000))
    spectra = SpectraSet(values, SpectralAxis(np.arange(2000.0), "nm"), [f"S{i}" for i in range(500)])
    write_matrix(spectra, tmp_path / "a.csv")
    assert np.array_equal(read_spectra(tmp_path / "a.csv").values, values)
