"""Files of several blocks and pages: what is read, what is left out, and how one is chosen."""

from pathlib import Path

import numpy as np
import pytest

from quant.errors import FileFormatError, ParameterError, QuantError
from quant.readers.jcamp_dx.labels import read_blocks
from quant.readers.jcamp_dx.parts import choose, parts_of
from quant.readers.options import ReadingOptions
from quant.readers.read import read_spectra
from quant.recipe.schema import SpectraTable

FILES = Path(__file__).parent / "files"


def test_blocks_of_one_axis_are_all_read() -> None:
    spectra = read_spectra(FILES / "link.dx")
    assert spectra.sample_ids == ("A", "B")
    assert [row["block"] for row in spectra.notes] == ["1 A", "2 B"]
    # What the LINK block says holds where a block says nothing itself.
    assert [row["origin_of_file"] for row in spectra.notes] == ["laboratory 9", "laboratory 2"]
    assert [row["title"] for row in spectra.notes] == ["A", "B"]
    assert len(spectra.sources) == 1


@pytest.mark.parametrize(("wanted", "points"), [("A", 10), ("short", 5), (3, 5), ("3", 5), (" short ", 5)])
def test_a_block_is_chosen_by_title_or_number(wanted: str | int, points: int) -> None:
    spectra = read_spectra(FILES / "link_other_axis.dx", block=wanted)
    assert spectra.values.shape == (1, points)


@pytest.mark.parametrize("wanted", ["C", 0, 4, "", "a"])
def test_a_block_that_is_not_there_is_refused_with_those_that_are(wanted: str | int) -> None:
    with pytest.raises(
        ParameterError, match=r"names 0 blocks of link_other_axis\.dx, which holds 1 'A', 2 'B', 3 'short'"
    ):
        read_spectra(FILES / "link_other_axis.dx", block=wanted)


def test_blocks_of_different_length_can_be_interpolated_if_asked() -> None:
    with pytest.raises(ValueError, match="cannot be resampled"):  # 600-604 does not cover 600-609
        read_spectra(FILES / "link_other_axis.dx", resample=True)


def test_a_peak_table_can_be_chosen_but_not_read() -> None:
    with pytest.raises(FileFormatError, match="block 2 'peaks of A': ##PEAK TABLE= is no spectrum"):
        read_spectra(FILES / "link_with_peaks.dx", block=2)
    chosen = read_spectra(FILES / "link_with_peaks.dx", block=3)
    assert chosen.sample_ids == ("B",)
    assert "reader" not in chosen.notes[0]


def test_several_pages_are_samples_of_their_own() -> None:
    spectra = read_spectra(FILES / "ntuples.dx")
    assert spectra.sample_ids == ("S 1 N=1", "S 1 N=2")
    assert spectra.notes[0]["origin_of_file"] == "laboratory 2"
    assert read_spectra(FILES / "ntuples.dx", block="S 1 N=2").values.shape == (1, 10)
    assert read_spectra(FILES / "ntuples_one_page.dx").sample_ids == ("S 1",)


def test_one_title_twice_cannot_be_chosen_by_it() -> None:
    text = (
        "##TITLE= all\n##DATA TYPE= LINK\n##BLOCKS= 2\n"
        + 2 * "##TITLE= A\n##XYDATA= (X++(Y..Y))\n##END=\n"
        + "##END=\n"
    )
    parts = parts_of(read_blocks(Path("a.dx"), text))
    with pytest.raises(ParameterError, match="names 2 blocks"):
        choose(parts, "A")
    assert choose(parts, 2) == [parts[1]]


def test_damage_in_a_block_names_the_line_of_the_file(tmp_path: Path) -> None:
    text = (FILES / "link.dx").read_text()
    cut = text.rfind("605A@abc")
    (tmp_path / "a.dx").write_text(f"{text[:cut]}605A@a_c{text[cut + 8 :]}")
    with pytest.raises(FileFormatError, match=f"line {text.count(chr(10), 0, cut) + 1}: found the character '_'"):
        read_spectra(tmp_path / "a.dx")


def test_page_labels_come_before_those_of_all_pages(tmp_path: Path) -> None:
    text = (FILES / "ntuples.dx").read_text()
    short = (
        "##PAGE= N=2\n##NPOINTS= 5\n##LAST= 604, 0.2, 2\n##DATA TABLE= (X++(Y..Y)), XYDATA\n600 1 2 3 3 2\n"
        "##END NTUPLES=\n##END=\n"
    )
    (tmp_path / "a.dx").write_text(text[: text.index("##PAGE= N=2")] + short)
    spectra = read_spectra(tmp_path / "a.dx", block=2)
    assert spectra.axis.values.tolist() == [600, 601, 602, 603, 604]
    assert spectra.values.shape == (1, 5)


def test_the_block_is_part_of_options_and_recipe() -> None:
    assert ReadingOptions.from_dict(ReadingOptions(block=2).to_dict()).block == 2
    table = SpectraTable.model_validate({"files": ["a.dx"], "block": "short"})
    assert table.options().block == "short"
    with pytest.raises(ParameterError, match="expected a title or a number"):
        ReadingOptions(block=True)
    with pytest.raises(ValueError, match="block"):
        SpectraTable.model_validate({"files": ["a.dx"], "block": 0})


@pytest.mark.parametrize("name", ["link_with_peaks", "ntuples", "blocks_without_link"])
def test_a_file_of_blocks_cut_anywhere_never_loses_spectra_silently(tmp_path: Path, name: str) -> None:
    content = (FILES / f"{name}.dx").read_bytes()
    whole = read_spectra(FILES / f"{name}.dx")
    boundary = content.find(b"##END=\n##TITLE= B") + len(b"##END=\n") if name == "blocks_without_link" else -1
    for length in range(1, len(content)):
        (tmp_path / "a.dx").write_bytes(content[:length])
        try:
            spectra = read_spectra(tmp_path / "a.dx")
        except QuantError:
            continue
        if boundary - 1 <= length <= boundary:  # a whole file in itself: nothing can tell
            continue
        if name == "blocks_without_link" and len(spectra) == 1:
            assert "##END" in spectra.notes[0]["reader"]
        else:
            assert np.array_equal(spectra.values, whole.values), content[:length].decode()
