"""Sets of spectra: numbers, axis and notes stay together."""

import numpy as np
import pytest

from quant.errors import AxisMismatchError, ParameterError, QuantityError, SampleMismatchError
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source
from quant.spectra.spectra_set import SpectraSet, join_spectra

AXIS = SpectralAxis([900, 902, 904, 906, 908], "nm")
VALUES = np.arange(15.0).reshape(3, 5)
SOURCE = Source("a.csv", 3, "ab")


def three(**changes: object) -> SpectraSet:
    parts = {"values": VALUES, "axis": AXIS, "sample_ids": ["A", "A", "B"], "notes": [{"n": "1"}, {"n": "2"}, {}]}
    return SpectraSet(**{**parts, "sources": [SOURCE], **changes})


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"values": VALUES[:2]}, r"shape \(2, 5\) with 3 sample IDs"),
        ({"values": VALUES[:, :4]}, "axis of 5 points"),
        ({"values": VALUES[0]}, r"shape \(5,\)"),
        ({"notes": [{}]}, "1 rows of notes"),
        ({"quantity": "colour"}, "quantity = 'colour'"),
    ],
)
def test_parts_that_do_not_fit(changes: dict[str, object], words: str) -> None:
    with pytest.raises(ParameterError, match=words):
        three(**changes)


def test_nothing_can_be_changed() -> None:
    spectra = three()
    with pytest.raises(ValueError, match="read-only"):
        spectra.values[0, 0] = 1
    with pytest.raises(TypeError):
        spectra.notes[0]["n"] = "9"
    assert str(spectra) == "3 spectra of 2 samples, absorbance, 900 → 908 nm, 5 points, every 2 nm"


@pytest.mark.parametrize(
    ("rows", "expected"),
    [(slice(1, None), [1, 2]), ([2, 0], [2, 0]), (np.array([True, False, True]), [0, 2]), (1, [1]), (-1, [2])],
)
def test_slicing_keeps_everything_together(rows: object, expected: list[int]) -> None:
    part = three()[rows]
    assert np.array_equal(part.values, VALUES[expected])
    assert part.sample_ids == tuple("AAB"[i] for i in expected)
    assert [dict(row) for row in part.notes] == [[{"n": "1"}, {"n": "2"}, {}][i] for i in expected]
    assert part.sources == (SOURCE,)


def test_samples_are_selected_with_all_replicates() -> None:
    assert np.array_equal(three().select(["A"]).values, VALUES[:2])
    with pytest.raises(SampleMismatchError, match="No spectrum of C; the set holds A, B"):
        three().select(["A", "C"])


def test_notes_added_do_not_replace_a_spectrums_own() -> None:
    spectra = three().with_notes({"n": "0", "technique": "ATR"})
    assert [row["n"] for row in spectra.notes] == ["1", "2", "0"]
    assert {row["technique"] for row in spectra.notes} == {"ATR"}


def test_a_reversed_axis_turns_the_values() -> None:
    turned = three().on_axis(AXIS.reversed())
    assert np.array_equal(turned.values, VALUES[:, ::-1])
    assert turned.axis == AXIS.reversed()


def test_another_axis_is_refused_unless_resampled() -> None:
    other = SpectralAxis([901, 903, 905], "nm")
    with pytest.raises(AxisMismatchError, match=r"spectra of A, B lie on 900 → 908 nm.*resample = true"):
        three().on_axis(other)
    resampled = three().on_axis(other, resample=True)
    assert resampled.values[0] == pytest.approx([0.5, 1.5, 2.5])  # a straight line stays one
    assert resampled.notes[0]["resampled"] == f"from {AXIS}"
    with pytest.raises(AxisMismatchError, match="cannot be resampled"):
        three().on_axis(SpectralAxis([890, 900], "nm"), resample=True)
    with pytest.raises(AxisMismatchError, match="units differ"):
        three().on_axis(SpectralAxis(AXIS.values, "cm-1"), resample=True)


def test_joining_takes_the_first_axis_and_each_source_once() -> None:
    first, second = three(), three(values=VALUES[:, ::-1], axis=AXIS.reversed())
    joined = join_spectra([first, second])
    assert np.array_equal(joined.values, np.vstack([VALUES, VALUES]))
    assert joined.axis == AXIS
    assert joined.sample_ids == ("A", "A", "B") * 2
    assert joined.sources == (SOURCE,)


def test_what_cannot_be_joined() -> None:
    with pytest.raises(QuantityError, match="A, B is transmittance but A and 1 more is absorbance"):
        join_spectra([three(), three(quantity="transmittance")])
    with pytest.raises(ParameterError, match="No spectra"):
        join_spectra([])


def test_a_table_for_pandas() -> None:
    frame = three().to_frame()
    assert list(frame.columns) == ["sample", "n", 900.0, 902.0, 904.0, 906.0, 908.0]
    assert frame["sample"].tolist() == ["A", "A", "B"]
    assert frame[904.0].tolist() == [2.0, 7.0, 12.0]


@pytest.mark.parametrize("value", [np.inf, -np.inf, 1e101, -1e308])
def test_ordinates_that_no_spectrometer_gives_are_refused(value):
    values = np.ones((2, 3))
    values[1, 2] = value
    with pytest.raises(QuantityError, match=r"^Ordinates beyond 1e\+100 in B; expected numbers that"):
        SpectraSet(values, SpectralAxis([1.0, 2.0, 3.0]), ["A", "B"])
