"""Pairing spectra with reference values by sample ID."""

from dataclasses import replace

import numpy as np
import pytest

from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import NOT_STATED, SampleSet, mean_by_sample, pair_samples
from quant.spectra.spectra_set import SpectraSet

IDS = ["B", "A", "B", "C", "A", "B"]  # replicates are not neighbours
NOTES = [
    {"day": "1", "batch": "x"},
    {"day": "1"},
    {"day": "2", "batch": "x"},
    {"day": "3"},
    {"day": "1"},
    {"day": "2", "batch": "x"},
]
SPECTRA = SpectraSet(np.arange(12.0).reshape(6, 2), SpectralAxis([1, 2], "nm"), IDS, notes=NOTES)
ETHANOL, WATER = Analyte("ethanol", "%"), Analyte("water", "%")


def reference(ids: str = "ABCD", rows: list[list[float]] | None = None, **notes: str) -> ReferenceTable:
    values = [[float(i), 10.0 * i] for i in range(len(ids))] if rows is None else rows
    return ReferenceTable(list(ids), [ETHANOL, WATER], values, [notes] * len(ids))


def test_replicates_are_grouped_in_order_of_first_appearance() -> None:
    samples = pair_samples(SPECTRA, reference(origin="spiked"))
    assert samples.sample_ids == ("B", "A", "C")
    assert samples.sample_index.tolist() == [0, 1, 0, 2, 1, 0]
    assert samples.replicates.tolist() == [3, 2, 1]
    assert samples.weights == pytest.approx([1 / 3, 1 / 2, 1 / 3, 1, 1 / 2, 1 / 3])
    assert samples.values.tolist() == [[1, 10], [0, 0], [2, 20]]
    assert samples.origins == ("spiked",) * 3
    assert samples.values_without_spectra == ("D",)
    assert str(samples) == "3 samples (6 spectra) with ethanol, water"


def test_samples_keep_the_notes_their_spectra_agree_in_and_the_tables_win() -> None:
    samples = pair_samples(SPECTRA, reference())
    assert [dict(row) for row in samples.notes] == [{"batch": "x"}, {"day": "1"}, {"day": "3"}]
    assert samples.origins == (NOT_STATED,) * 3
    with pytest.raises(SampleMismatchError, match=r"No note 'batch' for 2 of 3 samples: A, C\..*batch, day"):
        samples.groups("batch")
    assert pair_samples(SPECTRA, reference(batch="t")).groups("batch") == ("t",) * 3


def test_means_over_the_spectra_of_a_sample() -> None:
    samples = pair_samples(SPECTRA, reference())
    expected = [SPECTRA.values[[0, 2, 5]].mean(0), SPECTRA.values[[1, 4]].mean(0), SPECTRA.values[3]]
    assert np.allclose(samples.mean_by_sample(SPECTRA.values), expected)
    assert mean_by_sample(np.array([1.0, 3.0, 5.0]), np.array([0, 0, 1]), 2).tolist() == [2, 5]


@pytest.mark.parametrize("chosen", [[2, 0], np.array([True, False, True])])
def test_a_subset_keeps_everything_together(chosen: object) -> None:
    part = pair_samples(SPECTRA, reference()).subset(chosen)
    assert part.sample_ids == ("B", "C")
    assert part.spectra.sample_ids == ("B", "B", "C", "B")
    assert part.sample_index.tolist() == [0, 0, 1, 0]
    assert part.values.tolist() == [[1, 10], [2, 20]]
    assert np.array_equal(part.spectra.values, SPECTRA.values[[0, 2, 3, 5]])


def test_spectra_without_values_are_refused_or_dropped() -> None:
    with pytest.raises(SampleMismatchError, match="1 of 3 samples with spectra have no row in the reference table: C"):
        pair_samples(SPECTRA, reference("AB"))
    samples = pair_samples(SPECTRA, reference("AB"), unmatched="drop")
    assert samples.sample_ids == ("B", "A")
    assert samples.spectra_without_values == ("C",)
    assert len(samples.spectra) == 5


def test_missing_values_are_refused_or_kept_as_nan() -> None:
    rows = [[1.0, 2.0], [np.nan, 2.0], [1.0, 2.0]]
    with pytest.raises(SampleMismatchError, match="1 of 3 samples have no reference value of ethanol: B"):
        pair_samples(SPECTRA, reference("ABC", rows))
    table = reference("ABC", rows)
    told = replace(table, sources=(Source("values.csv", 1, "0"),), lines=(2, 3, 5))
    with pytest.raises(SampleMismatchError, match=r"^values\.csv, line 3: 1 of 3 samples have no reference value"):
        pair_samples(SPECTRA, told)
    kept: SampleSet = pair_samples(SPECTRA, reference("ABC", rows), missing="drop")
    assert np.isnan(kept.analyte("ethanol")[1][0])


def test_no_pair_at_all() -> None:
    with pytest.raises(SampleMismatchError, match=r"Not one of 3 samples.*sample_pattern"):
        pair_samples(SPECTRA, reference("XYZ"))


def test_words_and_names_that_are_not_there() -> None:
    with pytest.raises(ParameterError, match="unmatched = 'ignore'"):
        pair_samples(SPECTRA, reference(), unmatched="ignore")
    with pytest.raises(ParameterError, match="origin 'moon'"):
        pair_samples(SPECTRA, reference(origin="moon"))
    samples = pair_samples(SPECTRA, reference())
    with pytest.raises(ParameterError, match="No analyte 'sugar'; expected one of ethanol, water"):
        samples.analyte("sugar")
    with pytest.raises(SampleMismatchError, match="No sample Z among the 3 paired samples"):
        samples.positions(["A", "Z"])
    assert samples.positions(["C", "B"]).tolist() == [2, 0]


def test_values_below_a_limit_are_not_missing() -> None:
    table = ReferenceTable(
        ["A", "B", "C"],
        [ETHANOL],
        [[1], [np.nan], [3]],
        censored=[[np.nan], [0.1], [np.nan]],
        determinations=[[1], [2], [3]],
    )
    samples = pair_samples(SPECTRA, table)
    assert np.array_equal(samples.upper_limits("ethanol"), [0.1, np.nan, np.nan], equal_nan=True)
    assert samples.determinations_of("ethanol").tolist() == [2, 1, 3]
    part = samples.subset([0, 2])
    assert np.array_equal(part.upper_limits("ethanol"), [0.1, np.nan], equal_nan=True)
    assert part.determinations_of("ethanol").tolist() == [2, 3]
    assert np.isnan(pair_samples(SPECTRA, reference()).upper_limits("water")).all()
