"""Text files as they arrive: each is read right or refused with the right question, none is read wrongly.

The files are generated from tables: one set of spectra, written in every dialect, layout and encoding; then files that
can be understood in two ways, each with the key that settles it and what it settles it to.
"""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
import pytest

from quant.errors import AxisMismatchError, DataError, FileFormatError, QuantityError
from quant.readers.read import read_spectra
from quant.spectra.spectra_set import SpectraSet

AXIS = np.array([3998.5, 3000.25, 2001.0, 1002.75])  # cm-1
IDS = ("S 1", "Lösung")
VALUES = np.array([[0.123, 1.5, 0.0004, -0.01], [0.25, 1.234, 2.0, 0.5]])


@dataclass(frozen=True)
class Dialect:
    """How a file is written."""

    separator: str = ","
    decimal: str = "."
    thousands: str = ""
    columns: bool = False
    quoted: bool = False
    corner: str = "sample"
    suffix: str = ""
    trailing: str = ""
    above: str = ""
    end: str = "\n"
    encoding: str = "utf-8"
    scale: float = 1.0
    blank_lines: bool = False
    ids: Sequence[str] = IDS
    options: dict[str, object] = field(default_factory=dict)

    def number(self, value: float) -> str:
        text = f"{value * self.scale:,.6g}" if self.thousands else f"{value * self.scale:.10g}"
        if self.thousands and abs(value) >= 1000:
            text = f"{value * self.scale:,.2f}"
        return text.translate({ord(","): self.thousands, ord("."): self.decimal})

    def position(self, value: float) -> str:
        return replace(self, scale=1.0).number(value) + ("" if self.columns else self.suffix)

    def content(self) -> bytes:
        table = [[self.corner, *map(self.position, AXIS)]]
        table += [[sample, *map(self.number, row)] for sample, row in zip(self.ids, VALUES, strict=True)]
        if self.columns:
            table = [list(row) for row in zip(*table, strict=True)]
        quote = '"{}"' if self.quoted else "{}"
        lines = [self.separator.join(map(quote.format, row)) + self.trailing for row in table]
        if self.blank_lines:
            lines = [lines[0], "", *lines[1:-1], "   ", lines[-1], "", ""]
        return (self.above + self.end.join(lines) + self.end).replace("\n", self.end).encode(self.encoding)


def dialects() -> Iterator[tuple[str, Dialect]]:
    """Yield names and dialects; every one is read to the same spectra."""
    for columns in (False, True):
        lie = "columns" if columns else "rows"
        base = Dialect(columns=columns, corner="Wavenumber (cm-1)" if columns else "sample")
        words = replace(base, ids=("S1", "S2"))
        for separator, decimal in (",.", ";.", ";,", "\t.", "\t,"):
            yield f"{lie}-{separator!r}-{decimal}", replace(base, separator=separator, decimal=decimal)
        for decimal in ".,":
            blanks = replace(words, separator="   ", decimal=decimal, corner="cm-1" if columns else "sample")
            yield f"{lie}-blanks-{decimal}", blanks
        yield f"{lie}-both commas, quoted", replace(base, decimal=",", quoted=True)
        yield f"{lie}-quoted", replace(base, quoted=True)
        for encoding in ("utf-8-sig", "utf-16", "latin-1"):
            yield f"{lie}-{encoding}", replace(base, separator=";", decimal=",", encoding=encoding)
        yield f"{lie}-big-endian", replace(base, above="\ufeff", encoding="utf-16-be")
        for name, end in (("CRLF", "\r\n"), ("CR", "\r")):
            yield f"{lie}-{name}", replace(base, end=end)
        for separator, decimal, thousands in (",. ", ",.'", ";.,", ";,.", ";.'", ";, ", ";,\u00a0", "\t.,", "\t,."):
            grouped = replace(base, separator=separator, decimal=decimal, thousands=thousands)
            yield f"{lie}-thousands {thousands!r} in {separator!r}", grouped
        yield f"{lie}-thousands, quoted", replace(base, thousands=",", quoted=True)
        yield f"{lie}-protected blanks among blanks", replace(words, separator=" ", corner="cm-1", thousands="\u202f")
        yield f"{lie}-trailing", replace(base, trailing=",")
        yield f"{lie}-trailing semicolons", replace(base, separator=";", decimal=",", trailing=";;")
        yield f"{lie}-blank lines", replace(base, blank_lines=True)
        yield f"{lie}-comments", replace(base, above="# exported, on Monday, by me, from A\n#\n")
        yield f"{lie}-title", replace(base, above="Dryer K7\n\nMeasured,2026-11-30\n")
        yield f"{lie}-title with a decimal comma", replace(base, separator=";", above="Layer 0,5 mm\n")
        yield f"{lie}-sep=", replace(base, separator=";", above="sep=;\n")
        yield f"{lie}-percent above", replace(base, above="Y units,%T\n", scale=100)
        yield f"{lie}-percent stated", replace(base, scale=100, options={"quantity": "percent_transmittance"})
        yield f"{lie}-everything stated", replace(base, options={"separator": ",", "decimal": ".", "format": "matrix"})
        yield f"{lie}-orientation stated", replace(base, options={"orientation": f"spectra_in_{lie}"})
        yield f"{lie}-no corner", replace(base, corner="")
    yield "rows-units in the header", Dialect(suffix=" cm-1")
    yield "rows-units without blank", Dialect(separator=";", decimal=",", suffix="cm-1")
    yield "rows-comment as header", Dialect(corner="# sample")
    yield "columns-comment as header", Dialect(corner="# cm-1", columns=True)
    yield "columns-x", Dialect(corner="X", columns=True)
    yield "rows-corner names the axis", Dialect(corner="wavenumber")


DIALECTS = dict(dialects())


@pytest.mark.parametrize("name", DIALECTS)
def test_every_dialect_reads_to_the_same_spectra(name: str, tmp_path: Path) -> None:
    dialect = DIALECTS[name]
    file = tmp_path / "file.txt"
    file.write_bytes(dialect.content())
    spectra = read_spectra(file, **dialect.options)
    assert spectra.sample_ids == tuple(dialect.ids)
    assert spectra.axis.values == pytest.approx(AXIS, rel=1e-12)
    assert spectra.values == pytest.approx(VALUES, rel=1e-12)
    named_percent = dialect.scale != 1
    assert spectra.quantity == ("transmittance" if named_percent else "absorbance")
    assert "spectra in " in spectra.notes[0]["reader"]


def test_the_suite_is_large_enough() -> None:
    assert len(DIALECTS) + len(PAIRS) + len(QUESTIONS) + len(OTHERS) >= 60


PAIRS: dict[str, tuple[str, str, str]] = {  # one spectrum in two columns: text, axis unit, quantity
    "commas": ("900.5,0.1\n902.5,0.2\n904.5,0.3\n", "point", "absorbance"),
    "semicolons and decimal commas": ("900,5;0,1\n902,5;0,2\n904,5;0,3\n", "point", "absorbance"),
    "tabs and decimal commas": ("900,5\t0,1\n902,5\t0,2\n904,5\t0,3\n", "point", "absorbance"),
    "blanks": (" 900.5  0.1\n 902.5  0.2\n 904.5  0.3\n", "point", "absorbance"),
    "blanks and decimal commas": ("900,5 0,1\n902,5 0,2\n904,5 0,3\n", "point", "absorbance"),
    "both commas, quoted": ('"900,5","0,1"\n"902,5","0,2"\n"904,5","0,3"\n', "point", "absorbance"),
    "exponents": ("9.005e2,1e-1\n9.025E2,2E-1\n9.045e+2,3.0e-01\n", "point", "absorbance"),
    "comma and blank": ("900.5, 0.1\n902.5, 0.2\n904.5, 0.3\n", "point", "absorbance"),
    "trailing separators": ("900.5;0.1;\n902.5;0.2;\n904.5;0.3;\n", "point", "absorbance"),
    "text above": ("Sample K7, taken at 3\n\nx,y\n900.5,0.1\n902.5,0.2\n904.5,0.3\n", "point", "absorbance"),
    "comments": ("# 1, 2\n# nm, absorbance\n900.5,0.1\n902.5,0.2\n904.5,0.3\n", "nm", "absorbance"),
    "named": ("Wavelength [nm];Transmittance\n900,5;0,1\n902,5;0,2\n904,5;0,3\n", "nm", "transmittance"),
    "percent": ("nm,%T\n900.5,10\n902.5,20\n904.5,30\n", "nm", "transmittance"),
    "percent named as fraction": ("nm,Transmittance\n900.5,10\n902.5,20\n904.5,30\n", "nm", "transmittance"),
    "units above": ("X units: nm\nY units: % R\n900.5,10\n902.5,20\n904.5,30\n", "nm", "reflectance"),
}


@pytest.mark.parametrize("name", PAIRS)
def test_two_columns(name: str, tmp_path: Path) -> None:
    text, unit, quantity = PAIRS[name]
    (tmp_path / "S.txt").write_text(text, encoding="utf-8")
    spectra = read_spectra(tmp_path / "S.txt")
    assert spectra.axis.values.tolist() == [900.5, 902.5, 904.5]
    assert spectra.values[0] == pytest.approx([0.1, 0.2, 0.3], rel=1e-12)
    assert (spectra.axis.unit, spectra.quantity, spectra.sample_ids) == (unit, quantity, ("S",))


def band(baseline: float, depth: float, points: int = 21) -> list[float]:
    """A flat spectrum with one band that points down."""
    return (baseline - depth * np.exp(-((np.arange(points) - 10) ** 2) / 4.0)).round(3).tolist()


def pairs(ordinates: Sequence[float], heading: str = "", first: float = 900.0, step: float = 2.0) -> str:
    """Two columns of text."""
    return heading + "".join(f"{first + i * step:g};{y:g}\n" for i, y in enumerate(ordinates))


@dataclass(frozen=True)
class Question:
    """A file that is refused: what the message has to say, and for each answer what the file then holds."""

    text: str
    words: Sequence[str]
    answers: Sequence[tuple[dict[str, str], Callable[[SpectraSet], bool]]]
    error: type[DataError] = FileFormatError


def axis_is(*values: float) -> Callable[[SpectraSet], bool]:
    return lambda spectra: spectra.axis.values.tolist() == list(values)


def row_is(*values: float) -> Callable[[SpectraSet], bool]:
    return lambda spectra: np.allclose(spectra.values[0], values, rtol=1e-12)


QUESTIONS: dict[str, Question] = {
    "a point: decimal or thousands": Question(
        "4.000;0\n3.998;1\n3.996;2\n",
        ["two readings", "4 | 0", "4000 | 0", 'decimal = "."', 'decimal = ","'],
        [({"decimal": "."}, axis_is(4, 3.998, 3.996)), ({"decimal": ","}, axis_is(4000, 3998, 3996))],
    ),
    "a comma: decimal or thousands": Question(
        "4,000\t1\n3,998\t2\n3,996\t1\n",
        ["two readings", 'decimal = "."', 'decimal = ","'],
        [({"decimal": ","}, axis_is(4, 3.998, 3.996)), ({"decimal": "."}, axis_is(4000, 3998, 3996))],
    ),
    "a blank: separator or thousands": Question(
        "1 000,123\n1 002,124\n1 004,125\n",
        ["two readings", 'separator = "space"', 'separator = ","'],
        [({"separator": ",", "quantity": "arbitrary"}, axis_is(1000, 1002, 1004))],
    ),
    "rows or columns": Question(
        "wavelength,900,902,904\n1,0.1,0.2,0.3\n2,0.4,0.5,0.6\n3,0.7,0.8,0.9\n",
        ["two readings", 'orientation = "spectra_in_rows"', 'orientation = "spectra_in_columns"'],
        [
            ({"orientation": "spectra_in_rows"}, row_is(0.1, 0.2, 0.3)),
            ({"orientation": "spectra_in_columns"}, row_is(0.1, 0.4, 0.7)),
        ],
    ),
    "spectra in columns or a table of values": Question(
        "code,A,B\n1,0.1,0.2\n2,0.3,0.4\n3,0.5,0.6\n",
        ["orientation"],
        [({"orientation": "spectra_in_columns"}, row_is(0.1, 0.3, 0.5))],
    ),
    "transmittance or absorbance": Question(
        pairs(band(0.99, 0.6)),
        ["transmittance, or absorbance", "quantity"],
        [
            ({"quantity": "transmittance"}, lambda spectra: spectra.quantity == "transmittance"),
            ({"quantity": "absorbance"}, lambda spectra: spectra.quantity == "absorbance"),
        ],
        QuantityError,
    ),
    "large ordinates": Question(
        pairs([20, 40, 60, 50, 30]),
        ["percent transmittance", "quantity"],
        [({"quantity": "percent_transmittance"}, row_is(0.2, 0.4, 0.6, 0.5, 0.3))],
    ),
    "absorbance of 90": Question(
        pairs(band(99, 60), "nm;absorbance\n"),
        ["'absorbance'", "percent_transmittance", "quantity"],
        [({"quantity": "absorbance"}, lambda spectra: spectra.values.max() > 90)],
        QuantityError,
    ),
    "percent below one": Question(
        pairs(band(0.99, 0.6), "nm;%T\n"),
        ["'percent_transmittance'", "'transmittance'", "quantity"],
        [
            ({"quantity": "transmittance"}, lambda spectra: spectra.values.max() > 0.9),
            ({"quantity": "percent_transmittance"}, lambda spectra: spectra.values.max() < 0.01),
        ],
        QuantityError,
    ),
    "nanometres that are wavenumbers": Question(
        pairs([0.1] * 1601, "nm;absorbance\n", 4000, -2),
        ["'nm'", "cm-1", "axis_unit"],
        [({"axis_unit": "nm"}, lambda spectra: spectra.axis.unit == "nm")],
        AxisMismatchError,
    ),
    "nanometres that are micrometres": Question(
        pairs([0.1] * 20, "nm;absorbance\n", 2.5, 0.5),
        ["'nm'", "axis_unit"],
        [({"axis_unit": "nm"}, lambda spectra: spectra.axis.unit == "nm")],
        AxisMismatchError,
    ),
    "no sample column": Question(
        "code;batch;900;902\nS1;A;0,1;0,2\n",
        ["sample_column", "code, batch"],
        [({"sample_column": "code"}, row_is(0.1, 0.2))],
    ),
}


@pytest.mark.parametrize("name", QUESTIONS)
def test_ambiguous_files_are_refused_with_the_question_that_settles_them(name: str, tmp_path: Path) -> None:
    question = QUESTIONS[name]
    file = tmp_path / "a.csv"
    file.write_text(question.text, encoding="utf-8")
    columns = ";" in question.text and question.text.splitlines()[-1].count(";") == 1
    options = {} if columns else {"format": "auto" if "code,A" not in question.text else "matrix"}
    with pytest.raises(question.error) as caught:
        read_spectra(file, **options)
    for words in question.words:
        assert words in str(caught.value)
    for answer, holds in question.answers:
        assert holds(read_spectra(file, **{**options, **answer})), answer


OTHERS: dict[str, tuple[str, str]] = {  # damaged, or no spectra at all: text, what the message has to say
    "commas for everything": ("900,5,0,1\n902,5,0,2\n904,5,0,3\n", "no known format"),
    "commas for everything under a header": ("nm,absorbance\n900,5,0,1\n902,5,0,2\n", "commas may part the cells and"),
    "commas for everything in a table": ("sample,900,902\nS1,0,1,0,2\nS2,0,3,0,4\n", "line 2: found 5 cells"),
    "a short row": ("sample,900,902\nS1,0.1,0.2\nS2,0.3\n", "line 3: found 2 cells"),
    "reference values": ("sample,ethanol,water\n1,0.1,5\n2,0.2,6\n3,0.3,7\n", "no known format"),
    "reference values with an index": (",ethanol,water\n0,0.1,5\n1,0.2,6\n2,0.3,7\n", "no known format"),
    "reference values of one analyte": ("id,ethanol\n1,0.1\n2,0.2\n3,0.3\n", "no known format"),
    "mixed decimals": ("sample;900;902\nS1;0,1;0.2\nS2;0,3;0,4\n", "line 2: found '0.2'"),
    "two units": ("wavelength (nm),900 cm-1,902 cm-1\nS1,0.1,0.2\n", "'cm-1' and 'nm'"),
    "a turning axis": ("nm,A,B\n900,0.1,0.2\n904,0.1,0.2\n902,0.1,0.2\n", "turns"),
    "header names no positions": ("sample,X900,X902\nS1,0.1,0.2\nS2,0.3,0.4\n", "no known format"),
    "an ordinate in words": ("sample,900,902\nS1,0.1,low\nS2,0.3,0.4\n", "line 2: found 'low'"),
    "a data row as header": ("S1,0.1,0.2\nS2,0.3,0.4\n", "sample_column"),
    "a damaged first row": ("nm,A\n9O0,0.1\n902,0.2\n904,0.3\n", "found '9O0'"),
    "a damaged first ordinate": ("nm,A\n900,O.1\n902,0.2\n904,0.3\n", "found 'O.1'"),
    "a damaged second row": ("nm,A\n900,0.1\n9O2,0.2\n904,0.3\n906,0.3\n", "line 3: found '9O2'"),
    "a second row of other things": ("900,0.1\n?\n904,0.3\n906,0.3\n", "line 2: found 1 cell"),
    "a second row as comment": ("900,0.1\n#902,0.2\n904,0.3\n906,0.3\n", "line 2: found '#902'"),
    "a damaged first row of a table": ("nm,A,B\n9O0,0.1,1\n902,0.2,1\n904,0.3,1\n", "line 2: found '9O0'"),
    "a damaged heading": ("sample,900,9O2,904\nS1,0.1,0.2,0.3\n", "found '9O2' as heading"),
    "a lost heading": ("sample,900,,904\nS1,0.1,0.2,0.3\n", "found '' as heading"),
    "a damaged last heading": ("sample,900,902,9O4\nS1,0.1,0.2,0.3\n", "found '9O4' as heading"),
    "headings of the axis alone": ("nm\n900,0.1,0.2\n902,0.3,0.4\n", "no known format"),
    "numbers only": ("900,902,904\n0.1,0.2,0.3\n", "no known format"),
}


@pytest.mark.parametrize("name", OTHERS)
def test_damaged_files_and_tables_of_other_things_are_refused(name: str, tmp_path: Path) -> None:
    text, words = OTHERS[name]
    (tmp_path / "a.csv").write_text(text, encoding="utf-8")
    with pytest.raises(DataError) as caught:
        read_spectra(tmp_path / "a.csv")
    assert words in str(caught.value)


def test_commas_for_everything_get_their_reason(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("nm,absorbance\n900,5,0,1\n902,5,0,2\n", encoding="utf-8")
    with pytest.raises(FileFormatError, match="commas may part the cells and mark the decimals"):
        read_spectra(tmp_path / "a.csv", format="two_columns")


@pytest.mark.parametrize(("scale", "quantity"), [(1.0, "transmittance"), (0.004, "absorbance")])
def test_percent_transmittance_is_told_by_its_baseline_and_bands(scale: float, quantity: str, tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text(pairs([scale * y for y in band(99, 60)]), encoding="utf-8")
    spectra = read_spectra(tmp_path / "a.csv")
    assert spectra.quantity == quantity
    assert spectra.values.max() == pytest.approx(0.99 if quantity == "transmittance" else 0.396)
    assert quantity in spectra.notes[0]["reader"].replace("percent ", "")


@pytest.mark.parametrize(
    ("first", "step", "points", "unit"),
    [
        (4000, -2, 1676, "cm-1"),
        (400, 2, 1801, "point"),  # rising: nm as well
        (2500, -1, 1500, "point"),  # falling: a visible and near-infrared spectrometer may scan downwards
        (1100, -1, 900, "point"),
        (900, 2, 400, "point"),
    ],
)
def test_numbers_prove_a_unit_only_where_no_other_is_possible(
    first: float, step: float, points: int, unit: str, tmp_path: Path
) -> None:
    (tmp_path / "a.csv").write_text(pairs([0.1, 0.2] * (points // 2), first=first, step=step), encoding="utf-8")
    spectra = read_spectra(tmp_path / "a.csv")
    assert spectra.axis.unit == unit
    assert ("axis_unit states it" in spectra.notes[0]["reader"]) is (unit == "point")
    assert read_spectra(tmp_path / "a.csv", axis_unit="nm").axis.unit == "nm"


def test_a_late_row_settles_what_the_first_rows_leave_open(tmp_path: Path) -> None:
    whole = [f"{x:,d};{y}" for x, y in zip(range(4000, 2000, -2), [1, 2] * 500, strict=True)]
    (tmp_path / "a.csv").write_text("\n".join([*whole, "1,998;0.5\n"]), encoding="utf-8")
    assert read_spectra(tmp_path / "a.csv").axis.values[0] == 4000
    (tmp_path / "a.csv").write_text("\n".join([*whole, "1,998;0,5\n"]), encoding="utf-8")
    assert read_spectra(tmp_path / "a.csv").axis.values[0] == 4


def test_notes_from_columns_and_rows_get_plain_names(tmp_path: Path) -> None:
    rows = "Sample ID;Batch No.;Path Length (mm);Resolution (cm-1);Measured by;900;902\nS1;7;0,5;4;AB;0,1;0,2\n"
    columns = "\n".join(";".join(cells) for cells in zip(*(line.split(";") for line in rows.splitlines()), strict=True))
    expected = {"batch": "7", "path_length": "0,5 mm", "resolution": "4", "operator": "AB"}
    for text, options in ((rows, {}), (columns, {"orientation": "spectra_in_columns"})):
        (tmp_path / "a.csv").write_text(text + "\n", encoding="utf-8")
        notes = read_spectra(tmp_path / "a.csv", **options).notes[0]
        assert {name: notes[name] for name in expected} == expected
        assert set(notes) == {*expected, "reader", "file"}


def test_replicates_in_columns_share_their_id(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("nm,S1,S1\n900,0.1,0.2\n902,0.3,\n", encoding="utf-8")
    spectra = read_spectra(tmp_path / "a.csv")
    assert spectra.sample_ids == ("S1", "S1")
    assert np.array_equal(spectra.values, [[0.1, 0.3], [0.2, np.nan]], equal_nan=True)
