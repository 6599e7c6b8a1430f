"""Laws of readers and writers: what is written comes back, whatever the numbers."""

import contextlib
import tempfile
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.errors import QuantError
from quant.readers.jcamp_dx.encode import FORMS, LINE_LENGTH, encode_lines
from quant.readers.jcamp_dx.scan import scan_lines
from quant.readers.jcamp_dx.tokens import decode_compressed
from quant.readers.jcamp_dx.writer import LARGEST_ORDINATE, write_jcamp_dx
from quant.readers.matrix import write_matrix
from quant.readers.read import read_spectra
from quant.readers.two_columns import write_two_columns
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

# Runs of equal steps are frequent, so that counts of repetition and their limits are met.
steps = st.lists(st.tuples(st.integers(-1200, 1200), st.integers(1, 130)), min_size=1, max_size=12)
ordinates = st.lists(st.one_of(st.none(), st.integers(-(10**6), 10**6), st.integers(-2, 2)), min_size=1, max_size=150)
doubles = st.floats(-4, 4, allow_subnormal=False)


def decoded(lines: list[str]) -> list[float]:
    return decode_compressed(scan_lines("\n".join(lines).encode())).values.tolist()


@given(values=ordinates, form=st.sampled_from(FORMS))
def test_every_form_decodes_to_what_was_encoded(values: list[int | None], form: str) -> None:
    lines = encode_lines(["0"] * len(values), values, form)
    expected = [np.nan if value is None else value for value in values]
    assert np.array_equal(decoded(lines), expected, equal_nan=True)
    assert max(map(len, lines)) <= LINE_LENGTH


@given(runs=steps)
def test_runs_of_equal_steps_decode_alike_with_and_without_counts(runs: list[tuple[int, int]]) -> None:
    values = np.cumsum([step for step, times in runs for _ in range(times)]).tolist()
    with_counts, without = (encode_lines(["0"] * len(values), values, form) for form in ("DIFDUP", "DIF"))
    assert decoded(with_counts) == decoded(without) == values
    assert len(with_counts) <= len(without)


@st.composite
def spectra_sets(draw: st.DrawFn, most: int = 4) -> SpectraSet:
    """Spectra on rising or falling axes, evenly spaced, some points missing."""
    n_points, n_spectra = draw(st.integers(2, 60)), draw(st.integers(1, most))
    first, step = draw(st.floats(100, 5000)), draw(st.floats(0.01, 20)) * draw(st.sampled_from([-1, 1]))
    rows = st.lists(st.one_of(doubles, st.just(np.nan)), min_size=n_points, max_size=n_points)
    return SpectraSet(
        draw(st.lists(rows, min_size=n_spectra, max_size=n_spectra)),
        SpectralAxis(
            np.linspace(first, first + step * (n_points - 1), n_points), draw(st.sampled_from(["cm-1", "nm", "um"]))
        ),
        draw(
            st.lists(
                st.from_regex(r"[A-Za-z0-9][A-Za-z0-9_;,.\"-]{0,6}[A-Za-z0-9]", fullmatch=True),
                min_size=n_spectra,
                max_size=n_spectra,
            )
        ),
        draw(st.sampled_from(["absorbance", "log_reflectance", "arbitrary"])),
    )


def same(before: SpectraSet, after: SpectraSet, tolerance: float = 0.0) -> bool:
    """Tell whether numbers, axis and quantity came back."""
    return (
        np.allclose(before.values, after.values, rtol=0, atol=tolerance, equal_nan=True)
        and before.axis.same_positions(after.axis)
        and before.quantity == after.quantity
    )


def survives_every_form(spectra: SpectraSet) -> None:
    """Write and read a spectrum in all five forms."""
    # Half of YFACTOR, a power of ten at most ten times the largest ordinate over the largest integer.
    tolerance = 5.01 * float(np.nanmax(np.abs(spectra.values), initial=0)) / LARGEST_ORDINATE
    for form in FORMS:
        with tempfile.TemporaryDirectory() as folder:
            file = Path(folder) / "a.dx"
            write_jcamp_dx(spectra, file, form)
            after = read_spectra(file)
        assert same(spectra, after, tolerance)
        assert np.array_equal(np.isnan(after.values), np.isnan(spectra.values))
        assert after.sample_ids == spectra.sample_ids
        assert "reader" not in after.notes[0]


@settings(max_examples=60)
@given(spectra=spectra_sets(most=1))
def test_jcamp_dx_round_trip(spectra: SpectraSet) -> None:
    survives_every_form(spectra)


@pytest.mark.long
@settings(max_examples=10_000)
@given(spectra=spectra_sets(most=1))
def test_jcamp_dx_round_trip_of_ten_thousand_spectra(spectra: SpectraSet) -> None:
    survives_every_form(spectra)


@settings(max_examples=60)
@given(spectra=spectra_sets(), layout=st.sampled_from([(",", "."), (";", ","), (";", "."), ("tab", ",")]))
def test_matrix_round_trip(spectra: SpectraSet, layout: tuple[str, str]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "a.csv"
        write_matrix(spectra, file, *layout)
        after = read_spectra(file, separator=layout[0], decimal=layout[1], axis_unit=spectra.axis.unit)
    assert same(spectra, after)
    assert after.sample_ids == spectra.sample_ids


@settings(max_examples=60)
@given(spectra=spectra_sets(most=1), layout=st.sampled_from([(",", "."), (";", ","), ("tab", "."), ("space", ",")]))
def test_two_columns_round_trip(spectra: SpectraSet, layout: tuple[str, str]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "a.txt"
        write_two_columns(spectra, file, *layout)
        assert same(spectra, read_spectra(file, decimal=layout[1], axis_unit=spectra.axis.unit))


@settings(max_examples=150)
@given(
    content=st.binary(min_size=1, max_size=200),
    start=st.sampled_from([b"", b"##TITLE= a\n", b"id,1,2\nS,", b"1,2\n3,4\n"]),
)
@pytest.mark.parametrize("file_format", ["auto", "jcamp_dx", "matrix", "two_columns"])
def test_any_bytes_are_read_or_refused(content: bytes, start: bytes, file_format: str) -> None:
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "a"
        file.write_bytes(start + content)
        with contextlib.suppress(QuantError):
            assert np.isfinite(read_spectra(file, format=file_format).axis.values).all()


@settings(max_examples=400)
@given(
    place=st.floats(0, 1, exclude_max=True),
    change=st.sampled_from(["replace", "insert", "delete"]),
    character=st.sampled_from("0123456789@ABCIabciJKLRjklrSTZs%?.+-E \n#"),
)
def test_a_character_changed_among_differences_is_refused_or_harmless(
    place: float, change: str, character: str
) -> None:
    values = np.round(np.sin(np.arange(120) / 5), 3)
    spectra = SpectraSet([values], SpectralAxis(np.linspace(4000, 3762, 120), "cm-1"), ["S"])
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "a.dx"
        write_jcamp_dx(spectra, file, y_factor=0.001)
        head, mark, table = file.read_text().partition("(X++(Y..Y))\n")
        cut = int(place * (len(table) - len("##END=\n")))
        kept = table[cut:] if change == "insert" else table[cut + 1 :]
        file.write_text(head + mark + table[:cut] + ("" if change == "delete" else character) + kept)
        with contextlib.suppress(QuantError):
            after = read_spectra(file).values
            assert after.shape == (1, 120)
            assert np.abs(after - values).max() < 0.001 * 1.01  # one ordinate unit may pass as rounding


@settings(max_examples=400)
@given(
    place=st.floats(0, 1, exclude_max=True),
    change=st.sampled_from(["replace", "insert", "delete"]),
    character=st.sampled_from("0123456789@ABCDEFGHIabcdefghi?.+-E \n#"),
)
def test_a_character_changed_among_squeezed_ordinates_moves_neither_ends_nor_extremes(
    place: float, change: str, character: str
) -> None:
    values = np.round(np.sin(np.arange(120) / 5), 3) + 0.2
    spectra = SpectraSet([values], SpectralAxis(np.linspace(4000, 3762, 120), "cm-1"), ["S"])
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "a.dx"
        write_jcamp_dx(spectra, file, "SQZ", y_factor=0.001)
        head, mark, table = file.read_text().partition("(X++(Y..Y))\n")
        cut = int(place * (len(table) - len("##END=\n")))
        kept = table[cut:] if change == "insert" else table[cut + 1 :]
        file.write_text(head + mark + table[:cut] + ("" if change == "delete" else character) + kept)
        with contextlib.suppress(QuantError):
            after = read_spectra(file).values[0]
            assert after.shape == (120,)
            assert np.nanmax(after) < values.max() + 0.0021  # two ordinate units may pass as rounding of the label
            assert np.nanmin(after) > values.min() - 0.0021
            assert np.isnan(after[0]) or abs(after[0] - values[0]) < 0.0021
