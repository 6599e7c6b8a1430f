"""Reference values from delimited text."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import FileFormatError, ParameterError, SampleMismatchError
from quant.readers import reference_csv
from quant.readers.reference_column import ColumnOf
from quant.readers.reference_csv import read_reference
from quant.spectra.reference_table import Analyte, ReferenceTable

ETHANOL = ColumnOf(Analyte("ethanol", "% m/m", 0.1))
WATER = ColumnOf(Analyte("water", "% m/m"), "H2O")


def read_text(folder: Path, text: str, *analytes: ColumnOf, **options: object) -> ReferenceTable:
    (folder / "r.csv").write_bytes(text.encode("utf-8"))
    return read_reference(folder / "r.csv", analytes or (ETHANOL,), **options)


def test_values_and_notes(tmp_path: Path) -> None:
    text = "Sample,H2O,ethanol,origin,900,902 nm,remark\nS1,1,2.5,spiked,0.1,0.2,\nS2,n/a,-1e-1,process,0.1,0.2,late\n"
    table = read_text(tmp_path, text, ETHANOL, WATER)
    assert table.sample_ids == ("S1", "S2")
    assert table.analytes == (ETHANOL.analyte, WATER.analyte)
    assert np.array_equal(table.values, [[2.5, 1], [-0.1, np.nan]], equal_nan=True)
    assert [dict(row) for row in table.notes] == [{"origin": "spiked"}, {"origin": "process", "remark": "late"}]
    assert table.sources[0].name == "r.csv"


@pytest.mark.parametrize("cell", ["", "-", "n/a", "N/A", "nan", "NaN", " "])
def test_words_for_no_value(tmp_path: Path, cell: str) -> None:
    assert np.isnan(read_text(tmp_path, f"id;ethanol\nS1;{cell}\n").values[0, 0])


def test_note_columns_may_be_chosen(tmp_path: Path) -> None:
    text = "id,ethanol,batch,remark\nS1,1,B1,x\n"
    assert dict(read_text(tmp_path, text, note_columns=["batch"]).notes[0]) == {"batch": "B1"}
    with pytest.raises(FileFormatError, match="Did you mean 'batch'"):
        read_text(tmp_path, text, note_columns=["bach"])


def test_a_decimal_comma(tmp_path: Path) -> None:
    text = "id;ethanol\nS1;1,5\n"
    assert read_text(tmp_path, text, decimal=",").values[0, 0] == 1.5
    with pytest.raises(FileFormatError, match=r'line 2: found \'1,5\' in column \'ethanol\'.*decimal = ","'):
        read_text(tmp_path, text)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("id,ethanol\nS1,>0.1\n", "line 2: found '>0.1' in column 'ethanol'; expected a number"),
        ("id,etanol\nS1,1\n", "the columns are id, etanol. Did you mean 'etanol'"),
        ("code,ethanol\nS1,1\n", "sample_column"),
        ("id,ethanol\nS1,1,2\n", "line 2: found 3 cells; expected 2"),
        ("id,ethanol\n,1\n", "line 2: no sample ID"),
        ("id,ethanol\n", "at least one sample"),
        ("id,ethanol,a,a\nS1,1,2,3\n", "more than one column called 'a'"),
    ],
)
def test_damage_is_refused(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        read_text(tmp_path, text)


def test_wrong_parameters(tmp_path: Path) -> None:
    with pytest.raises(ParameterError, match="No analyte"):
        read_reference(tmp_path / "r.csv", [])
    with pytest.raises(ParameterError, match="two different signs"):
        read_text(tmp_path, "id;ethanol\nS1;1\n", separator=",", decimal=",")


def test_limits_are_kept_as_such(tmp_path: Path) -> None:
    table = read_text(tmp_path, "id,ethanol,H2O\nS1,<0.05,2\nS2,0.3,\n", ETHANOL, WATER)
    assert np.array_equal(table.values, [[np.nan, 2], [0.3, np.nan]], equal_nan=True)
    assert np.array_equal(table.censored, [[0.05, np.nan], [np.nan, np.nan]], equal_nan=True)


def test_a_sample_comes_once_or_is_averaged(tmp_path: Path) -> None:
    text = "id,ethanol,batch\nS1,1,B1\nS2,5,B2\nS1,2,B1\n"
    with pytest.raises(SampleMismatchError, match=r'for S1; expected one.*set replicates = "average"'):
        read_text(tmp_path, text)
    table = read_text(tmp_path, text, replicates="average")
    assert table.lines[0] == 2
    assert len(table.lines) == len(table)
    assert table.sample_ids == ("S1", "S2")
    assert table.values.tolist() == [[1.5], [5]]
    assert table.determinations.tolist() == [[2], [1]]
    assert [dict(row) for row in table.notes] == [{"batch": "B1"}, {"batch": "B2"}]
    assert table.repeatability["ethanol"].degrees_of_freedom == 1
    assert table.repeatability["ethanol"].standard_deviation == pytest.approx(np.sqrt(0.5))


def test_every_determination_is_converted_by_its_own_moisture(tmp_path: Path) -> None:
    dry = ColumnOf(Analyte("fat", "% m/m", basis="dry"), unit="g/kg", basis="wet", moisture_column="water")
    text = "id,fat,water\nS1,90,10\nS1,80,20\nS2,70,30\n"
    table = read_text(tmp_path, text, dry, replicates="average")
    assert table.values == pytest.approx(np.array([[10], [10]]))
    assert table.repeatability["fat"].standard_deviation == pytest.approx(0, abs=1e-12)
    assert str(table) == "2 samples with reference values of fat [% m/m dry basis]"
    with pytest.raises(FileFormatError, match=r"no column 'water' \(moisture_column of fat\)"):
        read_text(tmp_path, "id,fat\nS1,90\n", dry)
    with pytest.raises(FileFormatError, match="line 3: found '' as moisture in column 'water'"):
        read_text(tmp_path, "id,fat,water\nS1,90,10\nS2,80,\n", dry)


def test_a_table_may_state_its_basis(tmp_path: Path) -> None:
    text = "id,ethanol,Basis\nS1,1,dry\nS2,2,Dry\n"
    assert read_text(tmp_path, text).analytes[0].basis == "dry"
    by_volume = ColumnOf(Analyte("ethanol", "g/L"))
    assert read_text(tmp_path, text, by_volume).analytes[0].basis == ""
    wet = ColumnOf(Analyte("ethanol", "% m/m", basis="wet"))
    with pytest.raises(
        FileFormatError, match="the table says dry basis; expected wet basis, as the recipe says of ethanol"
    ):
        read_text(tmp_path, text, wet)
    with pytest.raises(FileFormatError, match="column 'Basis' holds 'dry', 'wet'; expected wet in every row, or dry"):
        read_text(tmp_path, "id,ethanol,Basis\nS1,1,dry\nS2,2,wet\n")
    assert read_text(tmp_path, "id,ethanol,basis\nS1,1,two vessels\n").analytes[0].basis == ""


def test_dates_become_iso(tmp_path: Path) -> None:
    text = "id,ethanol,Date,remark\nS1,1,31.12.2026,x\nS2,2,,y\n"
    assert [dict(row) for row in read_text(tmp_path, text).notes] == [
        {"date": "2026-12-31", "remark": "x"},
        {"remark": "y"},
    ]
    assert dict(read_text(tmp_path, text, note_columns=["remark"]).notes[0]) == {"remark": "x"}
    named = text.replace("Date", "sampled")
    assert dict(read_text(tmp_path, named).notes[0])["sampled"] == "31.12.2026"
    found = read_text(tmp_path, named, date_column="sampled")
    assert dict(found.notes[0]) == {"date": "2026-12-31", "remark": "x"}
    with pytest.raises(FileFormatError, match="columns 'remark' and 'Date' would both become the note date"):
        read_text(tmp_path, text, date_column="remark")
    with pytest.raises(FileFormatError, match=r"line 2: .*date_order"):
        read_text(tmp_path, "id,ethanol,date\nS1,1,03/04/2026\n")
    assert read_text(tmp_path, "id,ethanol,date\nS1,1,03/04/2026\n", date_order="mdy").notes[0]["date"] == "2026-03-04"


@pytest.mark.parametrize(
    ("option", "word"), [("replicates", "mean"), ("date_order", "dym"), ("decimal", ";"), ("separator", "|")]
)
def test_words_that_are_not_there(tmp_path: Path, option: str, word: str) -> None:
    with pytest.raises(ParameterError, match=f"{option} = {word!r}; expected one of".replace("|", r"\|")):
        read_text(tmp_path, "id,ethanol\nS1,1\n", **{option: word})


def test_a_sheet_of_a_text_file(tmp_path: Path) -> None:
    with pytest.raises(FileFormatError, match="no workbook; expected one, as sheet = 'Lab' is given"):
        read_text(tmp_path, "id,ethanol\nS1,1\n", sheet="Lab")


@pytest.mark.parametrize("decimal", [".", ","])
def test_a_workbook(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, decimal: str) -> None:
    # What the cells of a workbook are as text is another reader's; here it gives the rows.
    below = "< 0.05".replace(".", decimal)
    rows = [(1, ["id", "ethanol", "date"]), (2, ["1.5", "2.5", "2026-12-31"]), (4, ["S2", below, ""])]
    asked = []
    monkeypatch.setattr(reference_csv, "rows_of_workbook", lambda path, content, sheet: asked.append(sheet) or rows)
    (tmp_path / "r.xlsx").write_bytes(b"PK\x03\x04")
    table = read_reference(tmp_path / "r.xlsx", [ETHANOL], decimal=decimal, sheet="Lab")
    assert asked == ["Lab"]
    assert table.sample_ids == ("1.5", "S2")
    assert np.array_equal(table.values, [[2.5], [np.nan]], equal_nan=True)
    assert table.censored[1, 0] == 0.05
    assert table.notes[0]["date"] == "2026-12-31"
