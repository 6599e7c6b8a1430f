"""Reference values from delimited text."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import FileFormatError, ParameterError, SampleMismatchError
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
        ("id,ethanol\nS1,<0.1\n", "line 2: found '<0.1' in column 'ethanol'; expected a number"),
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


def test_a_sample_comes_once(tmp_path: Path) -> None:
    with pytest.raises(SampleMismatchError, match="S1"):
        read_text(tmp_path, "id,ethanol\nS1,1\nS1,2\n")


def test_wrong_parameters(tmp_path: Path) -> None:
    with pytest.raises(ParameterError, match="No analyte"):
        read_reference(tmp_path / "r.csv", [])
    with pytest.raises(ParameterError, match="two different signs"):
        read_text(tmp_path, "id;ethanol\nS1;1\n", separator=",", decimal=",")
