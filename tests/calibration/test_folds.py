"""Which samples are left out together: the default, groups, seeds."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.folds import make_folds
from quant.errors import NotEnoughDataError, ParameterError, RecipeError, SampleMismatchError


def folds_of(samples, make_recipe, text=""):
    return make_folds(samples, make_recipe(f"[cross_validation]\n{text}").cross_validation)


def with_batches(make_samples, letters):
    return make_samples(n=len(letters), notes=[{"batch": letter} for letter in letters])


def test_small_sets_leave_one_sample_out(make_samples, make_recipe):
    folds = folds_of(make_samples(n=29), make_recipe)
    assert folds.scheme == "leave one sample out"
    assert [labels.tolist() for labels in folds.repeats] == [list(range(29))]


def test_larger_sets_are_dealt_at_random(make_samples, make_recipe):
    folds = folds_of(make_samples(n=30), make_recipe)
    assert folds.scheme == "10 random folds, 5 repeats"
    assert len(folds.repeats) == 5
    assert all(np.bincount(labels).tolist() == [3] * 10 for labels in folds.repeats)
    assert len({labels.tobytes() for labels in folds.repeats}) == 5


@pytest.mark.parametrize(
    ("letters", "expected"), [("AABBCCDD", "leave one batch out"), ("AABBCC", "leave one sample out")]
)
def test_four_batches_are_left_out_in_turn(make_samples, make_recipe, letters, expected):
    assert folds_of(with_batches(make_samples, letters), make_recipe).scheme == expected


def test_a_batch_left_out_is_whole(make_samples, make_recipe):
    folds = folds_of(with_batches(make_samples, "ABCDABCD"), make_recipe)
    assert [labels.tolist() for labels in folds.repeats] == [[0, 1, 2, 3, 0, 1, 2, 3]]
    assert folds.n_units == 4


def test_a_sample_without_a_batch_ends_the_default(make_samples, make_recipe):
    notes = [{"batch": letter} for letter in "ABCDE"] + [{}]
    samples = make_samples(n=6, notes=notes)
    assert folds_of(samples, make_recipe).scheme == "leave one sample out"
    with pytest.raises(SampleMismatchError, match="No note 'batch' for 1 of 6 samples: S06"):
        folds_of(samples, make_recipe, 'scheme = "leave_one_group_out"\ngroup = "batch"')


def test_seeds(make_samples, make_recipe):
    samples = make_samples(n=20)
    text = 'scheme = "random_folds"\nfolds = 4\nrepeats = 2\nseed = '
    first, again, other = (folds_of(samples, make_recipe, f"{text}{seed}") for seed in (3, 3, 4))
    assert all((a == b).all() for a, b in zip(first.repeats, again.repeats, strict=True))
    assert any((a != b).any() for a, b in zip(first.repeats, other.repeats, strict=True))


@pytest.mark.parametrize(
    "scheme", ["leave_one_out", "random_folds", "contiguous_blocks", "interleaved", "leave_one_group_out"]
)
def test_groups_stay_together_in_every_scheme(make_samples, make_recipe, scheme):
    letters = "ABACBDEDCEFGFG"
    samples = with_batches(make_samples, letters)
    folds = folds_of(samples, make_recipe, f'scheme = "{scheme}"\nfolds = 3\ngroup = "batch"')
    assert "batch" in folds.scheme
    for labels in folds.repeats:
        for letter in set(letters):
            assert len({label for label, own in zip(labels, letters, strict=True) if own == letter}) == 1


def test_what_cannot_be_divided_is_refused(make_samples, make_recipe):
    with pytest.raises(RecipeError, match='needs group = "<note>", such as group = "batch"'):
        folds_of(make_samples(n=6), make_recipe, 'scheme = "leave_one_group_out"')
    with pytest.raises(ParameterError, match="8"):
        folds_of(make_samples(n=6), make_recipe, 'scheme = "interleaved"\nfolds = 8')
    with pytest.raises(NotEnoughDataError):
        folds_of(with_batches(make_samples, "AAAA"), make_recipe, 'scheme = "leave_one_group_out"\ngroup = "batch"')


def with_twins(samples, *pairs):
    """Return samples of which the second of each pair has the spectra of the first."""
    values = samples.spectra.values.copy()
    for first, second in pairs:
        values[second] = values[first]
    spectra = type(samples.spectra)(values, samples.spectra.axis, samples.spectra.sample_ids)
    return replace(samples, spectra=spectra)


TOGETHER = "duplicates_together = true\n"


def test_duplicates_share_a_fold_where_asked(make_samples, make_recipe):
    samples = with_twins(make_samples(n=8), (1, 5), (5, 7))
    text = 'scheme = "interleaved"\nfolds = 3\n'
    apart = folds_of(samples, make_recipe, text)
    assert apart.repeats[0].tolist() == [0, 1, 2, 0, 1, 2, 0, 1]
    folds = folds_of(samples, make_recipe, TOGETHER + text)
    assert folds.repeats[0].tolist() == [0, 1, 2, 0, 1, 1, 2, 1]  # distinct spectra are numbered, not samples
    assert folds.scheme == "3 interleaved folds, duplicate spectra together"
    assert (apart.n_units, folds.n_units) == (8, 6)


def test_nearly_equal_is_not_equal(make_samples, make_recipe):
    samples = with_twins(make_samples(n=4), (0, 3))
    values = samples.spectra.values.copy()
    values[3, 20] = np.nextafter(values[3, 20], 9)
    near = replace(samples, spectra=type(samples.spectra)(values, samples.spectra.axis, samples.sample_ids))
    assert folds_of(samples, make_recipe, TOGETHER).n_units == 3
    assert folds_of(near, make_recipe, TOGETHER).n_units == 4


def test_one_equal_replicate_is_enough(make_samples, make_recipe):
    samples = make_samples(n=4, replicates=2)
    twins = with_twins(samples, (0, 7))  # the first spectrum of S01, the second of S04
    assert folds_of(samples, make_recipe, TOGETHER).n_units == 4
    assert folds_of(twins, make_recipe, TOGETHER).repeats[0].tolist() == [0, 1, 2, 0]


def test_groups_and_duplicates_are_joined(make_samples, make_recipe):
    # A and B are tied by a duplicate, so that both are left out at once.
    samples = with_twins(with_batches(make_samples, "AABBCCDD"), (1, 2))
    folds = folds_of(samples, make_recipe, TOGETHER)
    assert folds.scheme == "leave one batch out, duplicate spectra together"
    assert folds.repeats[0].tolist() == [0, 0, 0, 0, 1, 1, 2, 2]
    folds = folds_of(samples, make_recipe, TOGETHER + 'scheme = "interleaved"\nfolds = 2\ngroup = "batch"')
    assert folds.scheme == "2 interleaved folds, equal 'batch' and duplicate spectra together"
    assert folds.repeats[0].tolist() == [0, 0, 0, 0, 1, 1, 0, 0]
    with pytest.raises(RecipeError, match="needs group"):
        folds_of(samples, make_recipe, TOGETHER + 'scheme = "leave_one_group_out"')
