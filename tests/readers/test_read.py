"""Files, patterns, folders."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import AxisMismatchError, FileFormatError, ParameterError, QuantityError
from quant.readers.matrix import write_matrix
from quant.readers.options import HEAD, ReadingOptions
from quant.readers.read import find_files, read_spectra
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder with spectra S1, S2, S10 and other things."""
    for number in (10, 2, 1):
        (tmp_path / f"S{number}.txt").write_text(f"nm,absorbance\n900,{number / 10}\n902,0.5\n904,0.5\n")
    (tmp_path / ".hidden.txt").write_text("900,1\n902,1\n")
    (tmp_path / "README.md").write_text("Not a spectrum.\n")
    (tmp_path / "reference.csv").write_text("sample,ethanol\nS1,1\nS2,2\n")
    (tmp_path / "deeper").mkdir()
    return tmp_path


@pytest.mark.parametrize("pattern", [".", "S*.txt", "*.txt"])
def test_folders_and_patterns_in_natural_order(folder: Path, pattern: str) -> None:
    spectra = read_spectra(folder / pattern)
    assert spectra.sample_ids == ("S1", "S2", "S10")
    assert spectra.values[:, 0].tolist() == [0.1, 0.2, 1.0]
    assert [row["file"] for row in spectra.notes] == ["S1.txt", "S2.txt", "S10.txt"]
    assert [source.name for source in spectra.sources] == ["S1.txt", "S2.txt", "S10.txt"]


def test_a_sequence_is_sorted_and_read_once(folder: Path) -> None:
    paths = [folder / "S10.txt", str(folder / "S2.txt"), folder / "S*0.txt"]
    assert [file.name for file in find_files(paths)] == ["S2.txt", "S10.txt"]
    assert read_spectra(paths).sample_ids == ("S2", "S10")


def test_a_name_with_brackets_is_a_file_first(folder: Path) -> None:
    (folder / "S[3].txt").write_text("900,0.1\n902,0.2\n")
    assert read_spectra(folder / "S[3].txt").sample_ids == ("S[3]",)


def test_options_and_keywords_go_together(folder: Path) -> None:
    options = ReadingOptions(notes={"technique": "ATR", "file": "never"})
    spectra = read_spectra(folder / "S1.txt", options, sample_pattern="(?P<sample>S)")
    assert spectra.sample_ids == ("S",)
    assert {**spectra.notes[0], "reader": ""} == {"technique": "ATR", "file": "S1.txt", "reader": ""}
    with pytest.raises(ParameterError, match="No reading option"):
        read_spectra(folder, options, sampel="x")


def test_the_format_may_be_stated(folder: Path) -> None:
    with pytest.raises(FileFormatError, match="TITLE"):
        read_spectra(folder / "S1.txt", format="jcamp_dx")
    with pytest.raises(FileFormatError, match="no file in this folder is recognised"):
        read_spectra(folder, format="jcamp_dx")


def test_damaged_files_with_the_name_of_spectra_are_not_passed_over(folder: Path) -> None:
    (folder / "S3.dx").write_text("")
    with pytest.raises(FileFormatError, match=r"S3\.dx: the file is empty"):
        read_spectra(folder)


@pytest.mark.parametrize(
    ("path", "words"),
    [
        (
            "*.dx",
            "no file matches this pattern; the folder holds README.md, S1.txt, S10.txt, S2.txt, deeper and 1 more",
        ),
        ("deeper", "no file in this folder is recognised as spectra; the folder holds nothing"),
        ("nowhere/*.dx", "there is no folder"),
        ("S4.txt", "no such file"),
        ("README.md", "of no known format; expected one of jcamp_dx, two_columns, matrix, spreadsheet"),
    ],
)
def test_nothing_found_says_what_was_there(folder: Path, path: str, words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        read_spectra(folder / path)


def test_no_path_at_all() -> None:
    with pytest.raises(ParameterError, match="No path"):
        read_spectra([])


def test_axes_that_differ_name_the_file(folder: Path) -> None:
    (folder / "S3.txt").write_text("nm,absorbance\n" + "".join(f"{x},0.5\n" for x in np.arange(899, 907, 1.5)))
    with pytest.raises(AxisMismatchError, match=r"S3\.txt: .*resample = true.*The first file is .*S1\.txt"):
        read_spectra(folder)
    spectra = read_spectra(folder, resample=True)
    assert spectra.values[2] == pytest.approx(0.5)
    assert "resampled" in spectra.notes[2]


def test_a_reversed_axis_is_turned(folder: Path) -> None:
    (folder / "S3.txt").write_text("nm,absorbance\n904,0.7\n902,0.8\n900,0.9\n")
    assert read_spectra(folder).values[2].tolist() == [0.9, 0.8, 0.7]


def test_quantities_that_differ_name_the_file(folder: Path) -> None:
    (folder / "S3.txt").write_text("nm,%T\n900,70\n902,80\n904,90\n")
    with pytest.raises(QuantityError, match=r"S3\.txt: .*transmittance"):
        read_spectra(folder)


def test_a_spectrum_of_very_many_points_is_recognised(tmp_path: Path) -> None:
    axis = np.linspace(1800.0, 1600.0, 20_001).round(2)
    written = SpectraSet(np.outer([1.0, 2.0], np.sin(axis)).round(3), SpectralAxis(axis, "cm-1"), ["A", "B"])
    write_matrix(written, tmp_path / "wide.csv")
    assert (tmp_path / "wide.csv").read_bytes().index(b"\n") > HEAD  # the header alone is longer
    for path in (tmp_path / "wide.csv", tmp_path):
        found = read_spectra(path)
        assert found.axis == written.axis
        assert np.array_equal(found.values, written.values)
