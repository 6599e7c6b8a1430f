"""Workbooks."""

import datetime
import sys
from collections.abc import Sequence
from pathlib import Path

import numpy as np
import openpyxl
import pytest

from quant.errors import AxisMismatchError, FileFormatError
from quant.readers.read import read_spectra
from quant.readers.spreadsheet import recognises_spreadsheet, rows_of_workbook

Table = Sequence[Sequence[object]]


def save(path: Path, **sheets: Table) -> Path:
    book = openpyxl.Workbook()
    book.remove(book.active)
    for title, table in sheets.items():
        sheet = book.create_sheet(title)
        for row in table:
            sheet.append(list(row))
    book.save(path)
    return path


@pytest.fixture
def rows_file(tmp_path: Path) -> Path:
    """Spectra in rows below a merged title and an empty line, shifted to the right; values on a second sheet."""
    file = save(
        tmp_path / "K7.xlsx",
        spectra=[
            [None, "Dryer K7", None, None],
            [],
            [None, "Sample", "Date", "Batch No.", 1000.5, 1002.25, 1004],
            [None, "S1", datetime.date(2026, 11, 30), 7, 0.1, 1 / 3, 2],
            [None, 12, datetime.datetime(2026, 12, 1, 14, 30), None, 1e-5, None, 0.25],
        ],
        values=[["sample", "ethanol"], ["S1", 0.5], ["S2", 0.25]],
    )
    book = openpyxl.load_workbook(file)
    book["spectra"].merge_cells("B1:G1")
    book.save(file)
    return file


def test_spectra_in_rows(rows_file: Path) -> None:
    spectra = read_spectra(rows_file)
    assert spectra.axis.values.tolist() == [1000.5, 1002.25, 1004]
    assert np.array_equal(spectra.values, [[0.1, 1 / 3, 2], [1e-5, np.nan, 0.25]], equal_nan=True)
    assert spectra.sample_ids == ("S1", "12")
    assert spectra.notes[0]["date"] == "2026-11-30"
    assert spectra.notes[1]["date"] == "2026-12-01T14:30:00"
    assert spectra.notes[0]["batch"] == "7"
    assert "sheet 'spectra'" in spectra.notes[0]["reader"]


def test_spectra_in_columns_and_two_columns(tmp_path: Path) -> None:
    table = [["Wavelength (nm)", "S1", "S2"], [900, 0.1, 0.2], [902, 0.3, 0.4]]
    spectra = read_spectra(save(tmp_path / "a.xlsx", a=table))
    assert spectra.values.tolist() == [[0.1, 0.3], [0.2, 0.4]]
    assert (spectra.axis.unit, spectra.sample_ids) == ("nm", ("S1", "S2"))
    pair = read_spectra(save(tmp_path / "S7.xlsx", a=[["nm", "%T"], [900, 90], [902, 80]]))
    assert pair.values.tolist() == [[0.9, 0.8]]
    assert pair.sample_ids == ("S7",)
    with pytest.raises(AxisMismatchError, match="axis_unit"):
        read_spectra(tmp_path / "a.xlsx", axis_unit="cm-1")


def test_numbers_that_are_text_with_decimal_commas(tmp_path: Path) -> None:
    file = save(tmp_path / "a.xlsx", a=[["sample", "900,5", "902,5"], ["S1", "0,1", "0,2"]])
    spectra = read_spectra(file)
    assert (spectra.axis.values.tolist(), spectra.values.tolist()) == ([900.5, 902.5], [[0.1, 0.2]])


def test_sheets_are_named(rows_file: Path) -> None:
    with pytest.raises(FileFormatError, match=r"no sheet 'Spectra'; the sheets are 'spectra', 'values'"):
        read_spectra(rows_file, sheet="Spectra")
    with pytest.raises(FileFormatError, match="sheet 'values' holds no table of spectra"):
        read_spectra(rows_file, sheet="values")


def test_rows_as_text_for_other_readers(rows_file: Path) -> None:
    content = rows_file.read_bytes()
    assert rows_of_workbook(rows_file, content, "values") == [
        (1, ["sample", "ethanol"]),
        (2, ["S1", "0.5"]),
        (3, ["S2", "0.25"]),
    ]
    assert rows_of_workbook(rows_file, content)[:2] == [
        (1, ["Dryer K7", "", "", "", "", ""]),
        (3, ["Sample", "Date", "Batch No.", "1000.5", "1002.25", "1004"]),
    ]


def test_cells_become_text(tmp_path: Path) -> None:
    file = save(tmp_path / "a.xlsx", a=[[True, 1.0, 0.1, 10**14, " x ", datetime.time(14, 30), "#DIV/0!"]])
    assert rows_of_workbook(file, file.read_bytes()) == [
        (1, ["TRUE", "1", "0.1", "100000000000000", "x", "14:30:00", "#DIV/0!"])
    ]


def test_workbooks_in_folders_are_left_out_unless_they_are_asked_for(rows_file: Path) -> None:
    (rows_file.parent / "S3.csv").write_text("nm,absorbance\n900,0.3\n902,0.3\n")
    assert read_spectra(rows_file.parent).sample_ids == ("S3",)
    assert len(read_spectra(rows_file.parent, format="spreadsheet")) == 2
    assert len(read_spectra(rows_file.parent / "*.xlsx")) == 2


def test_damage_is_refused(rows_file: Path) -> None:
    content = rows_file.read_bytes()
    for length in range(4, len(content), len(content) // 20):
        rows_file.write_bytes(content[:length])
        with pytest.raises(FileFormatError, match="damaged"):
            read_spectra(rows_file)


def test_a_row_that_is_damaged_is_named(tmp_path: Path) -> None:
    file = save(tmp_path / "a.xlsx", a=[["sample", 900, 902], ["S1", 0.1, 0.2], [], ["S2", 0.1, "low"]])
    with pytest.raises(FileFormatError, match="line 4: found 'low' in column '902'"):
        read_spectra(file)


def test_without_the_library_the_message_says_how_to_install_it(
    rows_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(sys.modules, "openpyxl", None)
    with pytest.raises(FileFormatError, match="pip install openpyxl"):
        read_spectra(rows_file)


def test_recognised_by_bytes_and_name(rows_file: Path) -> None:
    head = rows_file.read_bytes()[:100]
    assert recognises_spreadsheet(head, "a.XLSX")
    assert not recognises_spreadsheet(head, "a.zip")
    assert not recognises_spreadsheet(b"sample,900,902\n", "a.xlsx")
