"""Whole JCAMP-DX files: forms, notes, tolerated departures, damage."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import AxisMismatchError, FileFormatError, ParameterError, QuantError, QuantityError
from quant.readers.read import read_spectra
from quant.spectra.spectra_set import SpectraSet

# Appl. Spectrosc. 42 (1988) 151-162, Table VI.3: found (public test data quoting it).
TABLE_VI = "599.860@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P\n700.158A28"

LABELS = {
    "TITLE": "S 1",
    "JCAMP-DX": "4.24",
    "DATA TYPE": "INFRARED SPECTRUM",
    "XUNITS": "1/CM",
    "YUNITS": "ABSORBANCE",
    "XFACTOR": "1",
    "YFACTOR": "0.5",
    "FIRSTX": "600",
    "LASTX": "609",
    "NPOINTS": "10",
}
PLAIN = "600 1 2 3 3 2\n605 1 0 -1 -2 -3"


def text_of(labels: dict[str, str | None] | None = None, table: str = PLAIN, end: str = "##END=\n") -> str:
    """Return a small file; a label of None is left out."""
    merged = {**LABELS, **(labels or {})}
    head = "".join(f"##{label}= {value}\n" for label, value in merged.items() if value is not None)
    return f"{head}##XYDATA= (X++(Y..Y))\n{table}\n{end}"


def read_text(folder: Path, text: str | bytes, **options: object) -> SpectraSet:
    file = folder / "a.dx"
    file.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
    return read_spectra(file, **options)


def test_a_plain_file(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, text_of())
    assert spectra.values.tolist() == [[0.5, 1, 1.5, 1.5, 1, 0.5, 0, -0.5, -1, -1.5]]
    assert spectra.axis.values.tolist() == [600 + i for i in range(10)]
    assert (spectra.axis.unit, spectra.quantity, spectra.sample_ids) == ("cm-1", "absorbance", ("S 1",))
    assert dict(spectra.notes[0]) == {"title": "S 1", "file": "a.dx"}
    assert spectra.sources[0].name == "a.dx"


def test_the_published_table_in_a_file(tmp_path: Path) -> None:
    labels = {"FIRSTX": "599.860", "LASTX": "700.158", "NPOINTS": "53", "YFACTOR": "1"}
    spectra = read_text(tmp_path, text_of(labels, TABLE_VI))
    assert spectra.values.shape == (1, 53)
    assert spectra.values[0, [0, 4, 36, 52]].tolist() == [0, 2, 38, 128]
    assert spectra.axis.spacing == pytest.approx(1.928808, abs=5e-7)  # computed in the source of the table
    assert "reader" not in spectra.notes[0]


@pytest.mark.parametrize(
    "table",
    [
        "600+1+2+3+3+2\n605+1+0-1-2-3",
        "600ABCCB\n605A@abc",
        "600AJJ%j\n604Bjjjjj\n609c",
        "600AJT%\n603CjX\n609c",
        "600 1.0 2.00 3. 3.0 2.0\n605 1.0E+00 0. -1.0 -2.0 -30.0E-1",
        "600.0 1,2,3,3,2\n605.0;1;0;-1;-2;-3",
        "6.00E+02 1 2 3 3 2 $$ half\n\n605\t1 0 -1 -2 -3",
    ],
)
def test_every_form_gives_the_same(tmp_path: Path, table: str) -> None:
    spectra = read_text(tmp_path, text_of(table=table))
    assert spectra.values[0].tolist() == [0.5, 1, 1.5, 1.5, 1, 0.5, 0, -0.5, -1, -1.5]
    assert "reader" not in spectra.notes[0]


def test_packed_decimals_and_missing_ordinates(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, text_of(table="600 0.5-1.5+2.5?3.0 1e+1\n606 1.5E1 1 ? 2.0"))
    expected = [0.25, -0.75, 1.25, np.nan, 1.5, 5, 7.5, 0.5, np.nan, 1]
    assert np.array_equal(spectra.values[0], expected, equal_nan=True)


def test_x_factor_counts_for_the_numbers_in_the_lines_only(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, text_of({"XFACTOR": "0.5"}, "1200 1 2 3 3 2\n1210 1 0 -1 -2 -3"))
    assert spectra.axis.values[[0, -1]].tolist() == [600, 609]


def test_a_falling_axis_stays_falling(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, text_of({"FIRSTX": "609", "LASTX": "600"}, "609 1 2 3 3 2\n604 1 0 -1 -2 -3"))
    assert spectra.axis.direction == "falling"
    assert spectra.axis.values[0] == 609


@pytest.mark.parametrize(
    ("written", "unit"), [("1/CM", "cm-1"), ("NANOMETERS", "nm"), ("MICROMETERS", "um"), ("nanometers", "nm")]
)
def test_axis_units(tmp_path: Path, written: str, unit: str) -> None:
    assert read_text(tmp_path, text_of({"XUNITS": written})).axis.unit == unit


@pytest.mark.parametrize(
    ("written", "quantity"),
    [
        ("ABSORBANCE", "absorbance"),
        ("TRANSMITTANCE", "transmittance"),
        ("REFLECTANCE", "reflectance"),
        ("LOG(1/R)", "log_reflectance"),
        ("KUBELKA-MUNK", "arbitrary"),
        ("ARBITRARY UNITS", "arbitrary"),
        ("COUNTS", "arbitrary"),
    ],
)
def test_ordinates(tmp_path: Path, written: str, quantity: str) -> None:
    assert read_text(tmp_path, text_of({"YUNITS": written, "YFACTOR": "0.1"})).quantity == quantity


def test_labels_become_notes(tmp_path: Path) -> None:
    labels = {
        "ORIGIN": "laboratory 2",
        "OWNER": "QC",
        "Long-Date": "2024/05/01",
        "DATE": "24/05/01",
        "TIME": "10:11",
        "RESOLUTION": "4",
        "PATH LENGTH": "0.1",
        "SPECTROMETER/DATA SYSTEM": "X 1",
        "SAMPLING PROCEDURE": "ATR",
        "INSTRUMENT PARAMETERS": "16 scans",
        "SAMPLE DESCRIPTION": "liquid\n  clear",
        "TEMPERATURE": "25",
        "$BATCH": "B7",
        "$Lot No": "9",
    }
    notes = dict(read_text(tmp_path, text_of(labels)).notes[0])
    assert "line 14 is left out" in notes.pop("reader")  # the short date
    assert notes == {
        "title": "S 1",
        "origin_of_file": "laboratory 2",
        "owner": "QC",
        "date": "2024/05/01",
        "time": "10:11",
        "resolution": "4",
        "path_length": "0.1",
        "instrument": "X 1",
        "technique": "ATR",
        "instrument_parameters": "16 scans",
        "sample_description": "liquid\nclear",
        "temperature": "25",
        "batch": "B7",
        "lot_no": "9",
        "file": "a.dx",
    }


def test_the_sample_id_by_label_and_by_pattern(tmp_path: Path) -> None:
    text = text_of({"$SAMPLE NO": "S 22"})
    assert read_text(tmp_path, text, sample_label="$sample_no").sample_ids == ("S 22",)
    spectra = read_text(tmp_path, text, sample_pattern=r"(?P<sample>a)(?P<kind>\.dx)")
    assert spectra.sample_ids == ("a",)
    assert spectra.notes[0]["kind"] == ".dx"
    with pytest.raises(FileFormatError, match=r"##NAMES=.*found ##TITLE=.*sample_label"):
        read_text(tmp_path, text, sample_label="NAMES")
    with pytest.raises(ParameterError, match="sample_label or sample_pattern"):
        read_text(tmp_path, text, sample_column="ID")


@pytest.mark.parametrize(
    ("text", "note"),
    [
        (text_of({"NPOINTS": None}), "##NPOINTS= is missing"),
        (text_of({"NPOINTS": "11"}), "##NPOINTS= is 11 where 10 ordinates are"),
        (text_of({"NPOINTS": "9"}), "##NPOINTS= is 9 where 10 ordinates are"),
        (text_of(end=""), "##END= is missing"),
        (text_of({"DELTAX": "-1"}), "##DELTAX= has the wrong sign"),
        (text_of({"FIRSTX": None}), "##FIRSTX= is missing"),
        (text_of({"LASTX": None, "DELTAX": "1"}), "##LASTX= is missing"),
        (text_of({"XUNITS": "cm-1"}), "'cm-1' is taken for cm-1"),
        (text_of({"XFACTOR": None}), "##XFACTOR= is missing"),
        (text_of({"YFACTOR": None, "FIRSTY": "1"}), "##YFACTOR= is missing"),
        (text_of({"YFACTOR": "0.1", "FIRSTY": "1"}), "##FIRSTY= is not scaled"),
        (text_of({"FIRSTY": "7"}), "##FIRSTY= 7 where the first ordinate is 0.5"),
        (text_of({"YUNITS": None}), "##YUNITS= is missing"),
        (text_of({"YUNITS": "furlongs"}), "arbitrary units"),
        (text_of({"YUNITS": "%T"}), "divided by 100"),
        (text_of({"YUNITS": "TRANSMITTANCE", "YFACTOR": "30"}), "up to 90 is taken for percent"),
        (text_of(table="600AJT%jX"), "no check value"),
        (text_of(table="600AJT%\n603DjX\n609b"), "differs by one"),
        (text_of(table="600 1 2 3 3 2\n605.3 1 0 -1 -2 -3"), "drift by up to 0.25"),
        (text_of().replace("##YUNITS", " ##YUNITS"), "blanks before ##"),
        (text_of().replace("\n", "\r"), "CR alone"),
        ("\ufeff" + text_of(), "byte-order mark"),
        (text_of({"OWNER": "Müller"}), "beyond ASCII"),
    ],
)
def test_departures_whose_meaning_is_certain_are_noted(tmp_path: Path, text: str, note: str) -> None:
    spectra = read_text(tmp_path, text)
    assert note in spectra.notes[0]["reader"]
    assert spectra.values.shape == (1, 10)
    assert spectra.axis.values[[0, -1]].tolist() == [600, 609]


def test_percent_becomes_a_fraction(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, text_of({"YUNITS": "%T", "YFACTOR": "30"}))
    assert spectra.quantity == "transmittance"
    assert spectra.values.max() == pytest.approx(0.9)


def test_latin_1_text(tmp_path: Path) -> None:
    spectra = read_text(tmp_path, text_of({"OWNER": "Müller"}).encode("latin-1"))
    assert spectra.notes[0]["owner"] == "Müller"


def test_crlf_needs_no_note(tmp_path: Path) -> None:
    assert "reader" not in read_text(tmp_path, text_of().replace("\n", "\r\n")).notes[0]


def test_pairs(tmp_path: Path) -> None:
    text = text_of({"NPOINTS": "3", "XFACTOR": "2"}).partition("##XYDATA")[0]
    spectra = read_text(tmp_path, f"{text}##XYPOINTS= (XY..XY)\n300,1; 301,2\n304.5 -3\n##END=\n")
    assert spectra.axis.values.tolist() == [600, 602, 609]
    assert spectra.values[0].tolist() == [0.5, 1, -1.5]
    with pytest.raises(FileFormatError, match="line 13: found an odd count"):
        read_text(tmp_path, f"{text}##XYPOINTS= (XY..XY)\n300,1; 301,2\n304.5\n##END=\n")


def test_decimal_commas_only_if_certain_or_stated(tmp_path: Path) -> None:
    table = "600,0 1 2 3 3 2\n605,0 1 0 -1 -2 -3"
    certain = read_text(tmp_path, text_of({"YFACTOR": "0,5", "LASTX": "609,0"}, table))
    assert certain.values[0, 1] == 1
    assert certain.notes[0]["reader"] == "decimal commas"
    uncertain = text_of({"YFACTOR": "1", "LASTX": "609,000"}, table)
    assert read_text(tmp_path, uncertain, decimal=",").values[0, 1] == 2
    with pytest.raises(FileFormatError, match=r'decimal = ","'):
        read_text(tmp_path, uncertain)
    with pytest.raises(FileFormatError, match=r'decimal = ","'):
        read_text(tmp_path, text_of({"LASTX": "609,0"}, table), decimal=".")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        (text_of({"NPOINTS": "12"}), r"line 13: found 10 ordinates; expected 12"),
        (text_of({"NPOINTS": "11", "DELTAX": "0.9"}), r"found 10 ordinates; expected 11"),
        (text_of({"NPOINTS": "11"}, end=""), r"found 10 ordinates; expected 11"),
        (text_of({"NPOINTS": None}, end=""), "neither ##NPOINTS= nor ##END="),
        (text_of({"LASTX": None}), "neither ##LASTX= nor ##DELTAX="),
        (text_of({"LASTX": "600"}), "expected a range"),
        (text_of({"FIRSTX": "six"}), "line 8: ##FIRSTX= 'six'; expected a number"),
        (text_of({"NPOINTS": "9.5"}), "whole number"),
        (text_of({"YFACTOR": "0"}), "other than 0"),
        (text_of({"YFACTOR": None}), "no ##YFACTOR="),
        (text_of({"YFACTOR": None, "FIRSTY": "0.01"}), "no ##YFACTOR="),
        (text_of({"XUNITS": "SECONDS"}), "line 4: ##XUNITS= 'SECONDS'"),
        (text_of(table="600AJT%\n603FjX\n609c"), "line 13: found the check value 6 where the line before ends at 3"),
        (text_of(table="600 1 2 3 3 2\n607 1 0 -1 -2 -3"), "line 13: found the abscissa 607; expected 605"),
        (text_of(table="600 1 2 3 3 2\n605 1 0 1_0 -2 -3.0"), "line 13: found the character '_'"),
        (text_of(table="600 1 2 3 3 2\n605 1 0 nan -2 -3.0"), "line 13: found 'nan' where a number should be"),
        (text_of(table="600 1 2 3 3 2\n605 1 0 \u0661 -2 -3.0"), "line 13"),
        (text_of(table="600 1.0 2 3 3 2\n605"), "line 13: found an abscissa without ordinates"),
        (text_of(table="600 1 2 3 3 2\nsis 1 0 -1 -2 -3"), "line 13: found 'sis"),
        (text_of(table="600 1 2 3 3 2\n6.0.5 1 0 -1 -2 -3"), "line 13: found"),
        (text_of(table="600 1"), "found 1 ordinate"),
        (text_of(table=""), "line 12: found no ordinates under ##XYDATA="),
        (text_of().replace("(X++(Y..Y))", "(X++(R..R))"), "line 11: .*expected"),
        (text_of().replace("##XYDATA", "##PEAK TABLE"), "##PEAK TABLE= is no spectrum"),
        (text_of({"NTUPLES": "NMR"}).replace("##XYDATA", "##XY"), "##NTUPLES= without a ##DATA TABLE="),
        (text_of({"DATA TYPE": "LINK"}).partition("##XYDATA")[0] + "##END=\n", "LINK block without blocks"),
        (text_of({"DATA TYPE": "INFRARED INTERFEROGRAM"}), "INTERFEROGRAM is no infrared spectrum"),
        (text_of().partition("##XYDATA")[0] + "##END=\n", "no ##XYDATA= among ##TITLE=, ##JCAMP-DX="),
        (text_of({"TITLE": ""}), "sample_label"),
        ("nothing", "expected ##TITLE= first"),
        ("##TITLE= \x00", "binary"),
    ],
)
def test_damage_is_refused_by_name(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(FileFormatError, match=words):
        read_text(tmp_path, text)


def test_options_that_contradict_the_file_are_refused(tmp_path: Path) -> None:
    with pytest.raises(AxisMismatchError, match="axis_unit = 'nm'"):
        read_text(tmp_path, text_of(), axis_unit="nm")
    with pytest.raises(QuantityError, match="'absorbance', but quantity = 'transmittance'"):
        read_text(tmp_path, text_of(), quantity="transmittance")


def test_options_fill_what_the_file_leaves_open(tmp_path: Path) -> None:
    labels = {"XUNITS": "channels", "YUNITS": "signal"}
    spectra = read_text(tmp_path, text_of(labels), axis_unit="nm", quantity="percent_transmittance")
    assert (spectra.axis.unit, spectra.quantity) == ("nm", "transmittance")
    assert spectra.values[0, 0] == 0.005


@pytest.mark.parametrize("table", [PLAIN, "600AJT%\n603CjX\n609c", "600 1.5 2.5 3.5 3.5 2.5\n605 1.5 0 -1.5 -2.5 -3.5"])
def test_a_file_cut_anywhere_is_whole_or_refused(tmp_path: Path, table: str) -> None:
    whole = text_of({"DELTAX": "1"}, table)
    expected = read_text(tmp_path, whole).values
    for length in range(1, len(whole)):
        try:
            spectra = read_text(tmp_path, whole[:length])
        except QuantError:
            continue
        assert np.array_equal(spectra.values, expected), whole[:length]


def test_a_digit_changed_in_differences_does_not_pass(tmp_path: Path) -> None:
    table = "600AJT%\n603CjX\n609c"
    with pytest.raises(FileFormatError, match="check value"):
        read_text(tmp_path, text_of(table=table.replace("AJ", "AM")))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("605 1", "6.05E+999999 1"),
        ("605 1", "0E+" + "9" * 5000 + " 1"),
        ("605 1", "9" * 400 + " 1"),
        ("605 1 ", "605 " + "9" * 400 + ".0 "),
        ("YFACTOR= 0.5", "YFACTOR= 1e308"),
        ("XFACTOR= 1", "XFACTOR= 1e307"),
        ("FIRSTX= 600", "FIRSTX= 1e308"),
        ("LASTX= 609", "LASTX= -1.7e308"),
        ("NPOINTS= 10", "NPOINTS= 1e300"),
    ],
)
def test_numbers_beyond_all_bounds_are_refused(tmp_path: Path, old: str, new: str) -> None:
    text = text_of()
    assert old in text
    with pytest.raises(FileFormatError):
        read_text(tmp_path, text.replace(old, new))
