"""Small files, one for each way of writing a spectrum and each way of getting it wrong: what becomes of them.

The departures are those of the list "real-world deviations" kept with the published values (from memory), and more.
"""

import re
from pathlib import Path

import numpy as np
import pytest

from quant.errors import QuantError
from quant.readers.read import read_spectra

FILES = Path(__file__).parent / "files"
# Appl. Spectrosc. 42 (1988) 151-162, Table VIIb: found (public test data quoting it); YFACTOR is 0.1.
TABLE_VII = np.array([1, 2, 3, 3, 2, 1, 0, -1, -2, -3]) / 10
# Same paper, Table VI.3, all 53 ordinates: found (public test data quoting it).
TABLE_VI = [
    *(0, 0, 0, 0, 2, 4, 4, 4, 7, 5, 4, 4, 5, 5, 7, 10, 11, 11, 6, 5, 7, 6, 9, 9, 7, 10, 10, 9, 10, 11, 12, 15, 16, 16),
    *(14, 17, 38, 38, 35, 38, 42, 47, 54, 59, 66, 75, 78, 88, 96, 104, 110, 121, 128),
]

UNNOTED = (
    *("fix", "pac", "sqz", "dif", "difdup", "xypoints", "link", "ntuples", "ntuples_one_page", "ntuples_pairs"),
    *("crlf", "tabs", "comments", "comma_separates", "text_over_lines", "labels_in_other_ways", "exponents"),
    *("deltax_missing_falling", "maxy_agrees", "yfactor_1_decimals"),
)

NOTED = {
    "absorbance_units": "##YUNITS= 'Absorbance Units' is taken for absorbance",
    "blank_before_label": "blanks before ##",
    "blocks_without_link": "several blocks without a LINK block around them",
    "bom": "byte-order mark",
    "check_line_counted": "##NPOINTS= is 11 where 10 ordinates are, the check line is counted in it",
    "cr": "lines end with CR alone",
    "ctrl_z": "Ctrl-Z at the end",
    "ctrl_z_without_end": "Ctrl-Z at the end; ##END= is missing",
    "decimal_comma": "decimal commas",
    "decimal_comma_in_ordinates": "decimal commas",
    "deltax_wrong": "##DELTAX= is 2 where the step is 1",
    "deltax_wrong_sign": "##DELTAX= has the wrong sign",
    "end_missing": "##END= is missing",
    "end_without_equals": "##END without =",
    "firstx_lastx_exchanged": "##FIRSTX= and ##LASTX= are exchanged",
    "firsty_maxy_unscaled": "##FIRSTY= is not scaled by YFACTOR; ##MAXY= is not scaled",
    "firsty_wrong": "##FIRSTY= 7 where the first ordinate is 0.1",
    "label_twice": "##FIRST X= comes more than once",
    "lastx_rounded": "abscissae drift by up to 0.21 point spacings",
    "lastx_wrong": "##LASTX= 700 does not fit, FIRSTX and DELTAX give 609",
    "latin_1": "characters beyond ASCII",
    "limits_of_a_picture": "##MAXY= 10 where the largest ordinate is 0.3; ##MINY= -10 where the smallest",
    "link_blocks_wrong": "##BLOCKS= is 3 where 2 blocks are",
    "link_end_of_block_missing": "##END= is missing",
    "link_with_peaks": "block 2 'peaks of A' is left out: ##PEAK TABLE= is no spectrum",
    "lower_case_units": "##XUNITS= '1/cm' is taken for cm-1; ##YUNITS= 'absorbance' is taken for absorbance",
    "no_closing_check_line": "the last line of differences has no check value after it",
    "note_twice_contradicting": "##ORIGIN= of line 6 is left out",
    "npoints_absent": "##NPOINTS= is missing",
    "npoints_far_off": "##NPOINTS= is 100 where 10 ordinates are",
    "npoints_one_less": "##NPOINTS= is 9 where 10 ordinates are",
    "npoints_one_more": "##NPOINTS= is 11 where 10 ordinates are",
    "ntuples_page_lost": "##VAR_DIM= is 2 where 1 pages are",
    "pairs_in_xydata": "##XYDATA= holds pairs",
    "percent_as_transmittance": "transmittance up to 30 is taken for percent",
    "percent_t": "##YUNITS= '%T' is divided by 100",
    "text_after_end": "text after ##END= of line 17 is left out",
    "text_before_title": "text before ##TITLE= is left out",
    "uneven_one_a_line": "abscissae are not evenly spaced; each line has its own, which is taken",
    "utf_8": "characters beyond ASCII",
    "utf_16": "characters beyond ASCII",
    "xfactor_missing": "##XFACTOR= is missing, 1 is taken",
    "xunits_cm-1": "##XUNITS= 'cm-1' is taken for cm-1",
    "y_check_off_by_one": "a check value differs by one ordinate unit",
    "yunits_unknown": "##YUNITS= 'COUNTS' is taken for arbitrary units",
}

REFUSED = {
    "check_line_counted_step_too": "line 18: found 10 ordinates; expected 11",  # or an ordinate was lost
    "comma_thousands_or_decimal": "line 10: ##FIRSTX= '600,000'; expected a number.*set decimal = \",\"",
    "cut_at_a_line": "line 15: found 5 ordinates; expected 10",
    "cut_in_a_line": "line 16: the file ends within a line",
    "deltax_wrong_one_line": "##DELTAX= is 2 where FIRSTX, LASTX and 10 points give 1",
    "firsty_damaged": "line 13: ##FIRSTY= 0.9; found 0.1",
    "interferogram": "line 3: ##DATA TYPE= INFRARED INTERFEROGRAM is no infrared spectrum",
    "label_twice_contradicting": "line 11: ##FIRSTX= comes again with another value",
    "lastx_wrong_step_missing": "line 16: found the abscissa 605; expected 655.5",
    "line_lost": "line 15: found 5 ordinates; expected 10",
    "link_cut": r"line 4: found 1 block\(s\); expected 2 \(##BLOCKS=\)",
    "link_cut_uncounted": r"found 1 block\(s\); expected a count",
    "link_empty": "a LINK block without blocks",
    "link_only_peaks": "line 18: ##PEAK TABLE= is no spectrum",
    "link_other_axis": r"1 'A' \(absorbance, 600.*3 'short' \(absorbance, 600 → 604.*block = \"A\"",
    "link_other_quantity": r"1 'A' \(absorbance.*2 'T' \(transmittance",
    "maxy_exceeded": "line 14: ##MAXY= 0.3; found 0.9",
    "maxy_not_reached": "line 14: ##MAXY= 0.9; found 0.3",
    "npoints_and_end_absent": "line 15: neither ##NPOINTS= nor ##END=",
    "npoints_far_off_unconfirmed": "line 16: found 10 ordinates; expected 100",
    "ntuples_cut": "line 11: found 1 pages; expected 2",
    "ntuples_hz": "line 6: ##NTUPLES= NMR SPECTRUM in HZ is no infrared spectrum",
    "ntuples_mass_peaks": "##NTUPLES= MASS SPECTRUM with ##DATA TABLE= .XY..XY., PEAKS is no spectrum",
    "ntuples_nmr": "##NTUPLES= NMR SPECTRUM with ##DATA TABLE= .X.*R..R.*is no spectrum",
    "pairs_odd": "line 15: found an odd count of numbers",
    "peak_assignments": "line 14: ##PEAK ASSIGNMENTS= is no spectrum",
    "peak_table": "line 14: ##PEAK TABLE= is no spectrum",
    "sqz_damaged_least": "line 15: ##MINY= -0.3; found -4.3",
    "text_on_a_data_line": "line 16: found 13 ordinates; expected 10",
    "uneven_many_a_line": "line 16: found the abscissa 605; expected 610",
    "x_check_fails": "line 16: found the abscissa 607; expected 605",
    "xunits_unknown": "line 6: ##XUNITS= 'HZ'",
    # Found in public test data: a line that ends at -1, then one that begins with 4.
    "y_check_fails": "line 16: found the check value 4 where the line before ends at -1",
    "yfactor_missing_unproven": "no ##YFACTOR=",
}

OTHERWISE = ("table_vi", "sqz_e_is_five", "missing_ordinate", "yfactor_missing")  # other numbers: tests of their own
TWO = ("blocks_without_link", "link", "link_blocks_wrong", "link_end_of_block_missing", "link_with_peaks", "ntuples")


@pytest.mark.parametrize(("name", "note"), [*((name, None) for name in UNNOTED), *NOTED.items()])
def test_files_whose_meaning_is_certain_are_read_and_departures_noted(name: str, note: str | None) -> None:
    spectra = read_spectra(FILES / f"{name}.dx")
    np.testing.assert_allclose(spectra.values, [TABLE_VII] * (2 if name in TWO else 1), rtol=1e-15)
    uneven = [600, 601, 602, 603, 604, 605, 606, 607, 609, 618]
    expected = {
        "deltax_missing_falling": np.arange(609, 599, -1),
        "lastx_rounded": np.linspace(600, 609.4, 10),
        "uneven_one_a_line": uneven,
    }
    np.testing.assert_allclose(spectra.axis.values, expected.get(name, np.arange(600, 610)), rtol=1e-15)
    assert spectra.axis.unit == "cm-1"
    transmittance = name in ("percent_as_transmittance", "percent_t")
    arbitrary = "arbitrary" if name == "yunits_unknown" else "absorbance"
    assert spectra.quantity == ("transmittance" if transmittance else arbitrary)
    for row in spectra.notes:
        if note is None:
            assert "reader" not in row
        elif name != "link_end_of_block_missing" or row["title"] == "A":
            assert note in row["reader"]


@pytest.mark.parametrize(("name", "words"), REFUSED.items())
def test_files_whose_meaning_is_uncertain_are_refused(name: str, words: str) -> None:
    with pytest.raises(QuantError) as refusal:
        read_spectra(FILES / f"{name}.dx")
    assert re.search(words, str(refusal.value)), str(refusal.value)
    assert f"{name}.dx" in str(refusal.value)


def test_the_published_table_of_53_ordinates() -> None:
    spectra = read_spectra(FILES / "table_vi.dx")
    np.testing.assert_allclose(spectra.values[0], np.array(TABLE_VI) / 10, rtol=1e-15)
    assert spectra.axis.spacing == pytest.approx(1.928808, abs=5e-7)  # computed in the source of the table
    assert "reader" not in spectra.notes[0]


def test_e_without_a_sign_is_five() -> None:
    assert read_spectra(FILES / "sqz_e_is_five.dx").values[0] == pytest.approx([5.3, -0.5])


def test_a_missing_ordinate_is_nan_and_needs_no_note() -> None:
    spectra = read_spectra(FILES / "missing_ordinate.dx")
    expected = np.where(np.arange(10) == 3, np.nan, TABLE_VII)
    np.testing.assert_allclose(spectra.values[0], expected, rtol=1e-15)
    assert "reader" not in spectra.notes[0]


def test_a_missing_factor_is_one_if_the_first_ordinate_shows_it() -> None:
    spectra = read_spectra(FILES / "yfactor_missing.dx")
    np.testing.assert_allclose(spectra.values[0], 10 * TABLE_VII, rtol=1e-15)
    assert "##YFACTOR= is missing, 1 is taken as FIRSTY has it" in spectra.notes[0]["reader"]


def test_every_file_has_an_expected_outcome() -> None:
    listed = [*UNNOTED, *NOTED, *REFUSED, *OTHERWISE]
    assert sorted(listed) == sorted(file.stem for file in FILES.glob("*.dx"))
