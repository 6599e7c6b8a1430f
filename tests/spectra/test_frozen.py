"""Sets that go to another process and come back are the same, and as unchangeable."""

import copy
import pickle
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from quant.spectra.axis import SpectralAxis
from quant.spectra.frozen import FrozenMapping
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

SPECTRA = SpectraSet(
    [[1.0, 2.0], [3.0, np.nan]], SpectralAxis([400.0, 402.0], "cm-1"), ["A", "B"], notes=[{"batch": "1"}, {}]
)
REFERENCE = ReferenceTable(["A", "B"], [Analyte("water", "% m/m", 0.1)], [[1.0], [2.0]], [{"origin": "process"}, {}])
WAYS = [lambda thing: pickle.loads(pickle.dumps(thing)), copy.deepcopy]


@pytest.mark.parametrize("send", WAYS)
def test_spectra_come_back_whole_and_read_only(send: Callable[[Any], Any]) -> None:
    back = send(SPECTRA)
    assert np.array_equal(back.values, SPECTRA.values, equal_nan=True)
    assert back.axis == SPECTRA.axis
    assert (back.sample_ids, back.quantity, back.notes) == (SPECTRA.sample_ids, SPECTRA.quantity, SPECTRA.notes)
    for array in (back.values, back.axis.values):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 7


@pytest.mark.parametrize("send", WAYS)
def test_reference_values_come_back_whole_and_read_only(send: Callable[[Any], Any]) -> None:
    back = send(REFERENCE)
    assert (back.sample_ids, back.analytes, back.notes) == (REFERENCE.sample_ids, REFERENCE.analytes, REFERENCE.notes)
    assert np.array_equal(back.values, REFERENCE.values)
    with pytest.raises(ValueError, match="read-only"):
        back.values[0, 0] = 7


@pytest.mark.parametrize("send", WAYS)
def test_paired_samples_come_back_whole(send: Callable[[Any], Any]) -> None:
    samples = pair_samples(SPECTRA, REFERENCE)
    back = send(samples)
    assert (back.sample_ids, back.notes, back.origins) == (samples.sample_ids, samples.notes, samples.origins)
    assert np.array_equal(back.values, samples.values)
    assert np.array_equal(back.subset(np.array([1])).spectra.values, SPECTRA.values[1:], equal_nan=True)


def test_notes_cannot_be_changed() -> None:
    notes = SPECTRA.notes[0]
    with pytest.raises(TypeError):
        notes["batch"] = "2"  # type: ignore[index]
    with pytest.raises(AttributeError, match="cannot be changed"):
        notes._entries = {}  # type: ignore[attr-defined]
    assert notes == {"batch": "1"}
    assert repr(notes) == "{'batch': '1'}"


def test_a_mapping_keeps_what_it_was_given() -> None:
    given = {"a": "1"}
    kept = FrozenMapping(given)
    given["a"] = "2"
    assert dict(kept) == {"a": "1"}
    assert kept != given


def test_an_array_that_can_still_be_changed_is_copied() -> None:
    values = np.array([[1.0, 2.0]])
    view = values[:]
    view.flags.writeable = False
    axis = SpectralAxis([1.0, 2.0])
    kept, of_view = SpectraSet(values, axis, ["A"]), SpectraSet(view, axis, ["A"])
    values[0, 0] = 7
    assert kept.values[0, 0] == of_view.values[0, 0] == 1
