"""Which samples calibrate: exclusion, missing values, and every way to set validation samples apart."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.split import INDEPENDENT, INTERNAL, split_samples
from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.reference_table import Analyte


def split_of(samples, recipe, separate=None):
    return split_samples(recipe, samples, separate, "acid")


def test_all_calibrate_where_nothing_is_said(make_samples, make_recipe):
    split = split_of(make_samples(n=6), make_recipe())
    assert split.calibration.sample_ids == ("S01", "S02", "S03", "S04", "S05", "S06")
    assert (split.validation, split.kind, split.left_out) == (None, "", ())


def test_samples_by_name(make_samples, make_recipe):
    split = split_of(make_samples(n=6), make_recipe('[validation]\nsamples = ["S05..S06", "S01"]'))
    assert split.calibration.sample_ids == ("S02", "S03", "S04")
    assert split.validation.sample_ids == ("S01", "S05", "S06")
    assert (split.kind, split.how) == (INDEPENDENT, "3 samples named in the recipe")


def test_samples_by_a_note(make_samples, make_recipe):
    samples = make_samples(n=6, notes=[{"subset": letter} for letter in "CCTCMT"])
    split = split_of(samples, make_recipe('[validation]\nnote = "subset"\nvalues = ["T", "M"]'))
    assert split.validation.sample_ids == ("S03", "S05", "S06")
    assert (split.kind, split.how) == (INDEPENDENT, "3 samples whose subset is M, T")
    with pytest.raises(SampleMismatchError, match=r"\[validation\] picks 0 of 6 samples"):
        split_of(samples, make_recipe('[validation]\nnote = "subset"\nvalues = ["t"]'))


@pytest.mark.parametrize("way", ["kennard_stone", "random"])
def test_a_split_of_one_set_is_an_internal_test(make_samples, make_recipe, way):
    recipe = make_recipe(f'[validation]\nsplit = "{way}"\nfraction = 0.25')
    first, again = (split_of(make_samples(n=12, replicates=2), recipe) for _ in range(2))
    assert first.kind == INTERNAL
    assert len(first.validation) == 3
    assert not set(first.validation.sample_ids) & set(first.calibration.sample_ids)
    assert set(first.validation.replicates.tolist()) == {2}
    assert first.validation.sample_ids == again.validation.sample_ids


def test_another_seed_draws_other_samples(make_samples, make_recipe):
    drawn = {
        split_of(
            make_samples(n=20), make_recipe(f'[validation]\nsplit = "random"\n[cross_validation]\nseed = {seed}')
        ).validation.sample_ids
        for seed in range(4)
    }
    assert len(drawn) == 4


@pytest.mark.parametrize("way", ["kennard_stone", "random"])
def test_a_split_keeps_groups_together(make_samples, make_recipe, way):
    letters = "AABBCCDDEEFF"
    samples = make_samples(n=12, notes=[{"batch": letter} for letter in letters])
    split = split_of(samples, make_recipe(f'[validation]\nsplit = "{way}"\n[cross_validation]\ngroup = "batch"'))
    assert not set(split.validation.groups("batch")) & set(split.calibration.groups("batch"))


def test_kennard_stone_keeps_the_extremes_for_calibration(make_samples, make_recipe):
    split = split_of(make_samples(n=12), make_recipe('[validation]\nsplit = "kennard_stone"'))
    assert {"S01", "S12"} <= set(split.calibration.sample_ids)


def test_exclusion_is_told_with_its_reason(make_samples, make_recipe):
    recipe = make_recipe('[[exclude]]\nsamples = ["S02..S03"]\nreason = "spilt"\n[validation]\nsamples = ["S03..S04"]')
    split = split_of(make_samples(n=6), recipe)
    assert [(item.sample, item.reason) for item in split.left_out] == [("S02", "spilt"), ("S03", "spilt")]
    assert split.validation.sample_ids == ("S04",)  # a range may hold what is left out
    assert split.calibration.sample_ids == ("S01", "S05", "S06")


def test_samples_without_a_value_are_left_out(make_samples, make_recipe):
    samples = make_samples(n=6, values=np.array([1, np.nan, 3, 4, np.nan, 6.0]))
    split = split_of(samples, make_recipe('[validation]\nsamples = ["S04..S06"]'))
    assert split.calibration.sample_ids == ("S01", "S03")
    assert split.validation.sample_ids == ("S04", "S06")
    assert [(item.sample, item.reason) for item in split.left_out] == [
        ("S02", "no reference value of acid"),
        ("S05", "no reference value of acid"),
    ]


def renamed(samples, letter):
    ids = tuple(name.replace("S", letter) for name in samples.sample_ids)
    named = replace(samples.spectra, sample_ids=[ids[i] for i in samples.sample_index])
    return replace(samples, spectra=named, sample_ids=ids)


def test_separate_samples(make_samples, make_recipe):
    recipe = make_recipe('[[exclude]]\nsamples = ["V02"]\nreason = "wet"\n[validation]\nfiles = ["v.csv"]')
    split = split_of(make_samples(n=6), recipe, renamed(make_samples(n=4), "V"))
    assert len(split.calibration) == 6
    assert split.validation.sample_ids == ("V01", "V03", "V04")
    assert (split.kind, split.how) == (INDEPENDENT, "3 samples from separate files")
    assert [item.sample for item in split.left_out] == ["V02"]


def test_a_sample_on_both_sides_is_refused(make_samples, make_recipe):
    with pytest.raises(SampleMismatchError, match=r"Both among .*: S01, S02, S03; expected different ones"):
        split_of(make_samples(n=6), make_recipe(), make_samples(n=3))
    out = make_recipe('[[exclude]]\nsamples = ["S01..S03"]\nreason = "of the other set"')
    with pytest.raises(ParameterError):
        split_of(make_samples(n=6), make_recipe('[validation]\nsamples = ["S01"]'), renamed(make_samples(n=3), "V"))
    assert len(split_of(make_samples(n=6), out, renamed(make_samples(n=3), "V")).calibration) == 3


def test_separate_files_named_but_no_samples_given(make_samples, make_recipe):
    with pytest.raises(
        ParameterError, match="names separate validation files, but only calibration samples were given"
    ):
        split_of(make_samples(n=6), make_recipe('[validation]\nfiles = ["v.csv"]'))


def test_names_that_do_not_exist_are_refused(make_samples, make_recipe):
    with pytest.raises(SampleMismatchError, match=r"\[\[exclude\]\] names what is not among the 6 paired samples: S07"):
        split_of(make_samples(n=6), make_recipe('[[exclude]]\nsamples = ["S06..S07"]\nreason = "x"'))
    with pytest.raises(SampleMismatchError, match="No sample S07 among the 6 paired samples"):
        split_of(make_samples(n=6), make_recipe('[validation]\nsamples = ["S06..S07"]'))


def with_a_twin(samples, first, second):
    values = samples.spectra.values.copy()
    values[second] = values[first]
    return replace(samples, spectra=type(samples.spectra)(values, samples.spectra.axis, samples.spectra.sample_ids))


@pytest.mark.parametrize("way", ["kennard_stone", "random"])
def test_a_split_keeps_duplicates_together_where_asked(make_samples, make_recipe, way):
    samples = make_samples(n=12)
    for first in range(0, 12, 2):
        samples = with_a_twin(samples, first, first + 1)
    text = f'[validation]\nsplit = "{way}"\nfraction = 0.5\n[cross_validation]\n'
    split = split_of(samples, make_recipe(f"{text}duplicates_together = true"))
    numbers = {int(name[1:]) for name in split.validation.sample_ids}
    assert len(numbers) == 6
    assert {number + 1 if number % 2 else number - 1 for number in numbers} == numbers
    assert split.remarks() == ()


def test_a_duplicate_across_the_validation_is_told(make_samples, make_recipe):
    recipe = make_recipe('[validation]\nsamples = ["S01..S04"]')
    assert split_of(make_samples(n=12), recipe).remarks() == ()
    (remark,) = split_of(with_a_twin(make_samples(n=12), 2, 9), recipe).remarks()
    assert remark.startswith("1 of 4 validation samples have a spectrum that is also among the calibration's")
    assert "(S03)" in remark


def test_tables_on_another_basis_are_refused(make_samples, make_recipe):
    recipe = make_recipe('[validation]\nfiles = ["v.csv"]')
    dry, wet = (Analyte("acid", "% m/m", basis=basis) for basis in ("dry", "wet"))
    calibration = replace(make_samples(n=6), analytes=(dry,))
    separate = replace(renamed(make_samples(n=4), "V"), analytes=(wet,))
    with pytest.raises(SampleMismatchError, match="are in % m/m dry basis, the validation's in % m/m wet basis"):
        split_of(calibration, recipe, separate)
    assert len(split_of(calibration, recipe, replace(separate, analytes=(dry,))).validation) == 4
