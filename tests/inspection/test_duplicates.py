"""Tecator: exactly the duplicate pairs that other programs found."""

import json

import pytest

from quant.inspection.finding import DOUBT, NOTE, STOP
from quant.inspection.inspect import inspect
from quant.recipe.load import load_recipe, recipe_from_text


@pytest.fixture(scope="module")
def recipe(repository):
    return load_recipe(repository / "configs" / "tecator.toml")


@pytest.fixture(scope="module")
def found(recipe):
    return inspect(recipe)


@pytest.fixture(scope="module")
def known(repository):
    # tests/reference_values/tecator.json: computed with NumPy from the same table, independently of this package.
    return json.loads((repository / "tests" / "reference_values" / "tecator.json").read_text("utf-8"))


def pairs(finding):
    return {tuple(int(name) for name in pair.split(" = ")) for pair in finding.samples}


def test_all_22_pairs_and_no_other(found, known):
    [across], [within] = found.found("exact_duplicates_across_sets"), found.found("exact_duplicates")
    assert pairs(across) | pairs(within) == {tuple(pair) for pair in known["exact_duplicate_sample_pairs"]}
    assert len(across.samples) + len(within.samples) == 22
    assert not found.found("near_duplicates") + found.found("near_duplicates_across_sets")
    assert not found.found("duplicates_with_different_values")


def test_seven_validation_samples_have_their_twin_among_the_calibration_samples(found, known):
    [across], [within] = found.found("exact_duplicates_across_sets"), found.found("exact_duplicates")
    assert (across.gravity, within.gravity) == (STOP, DOUBT)
    assert across.title == "7 validation samples with an exact twin among the calibration samples"
    assert {b for _, b in pairs(across)} == set(known["test_samples_with_an_exact_duplicate_in_calibration"])
    assert "duplicates_together = true under [cross_validation]" in within.advice
    assert not found.accepted


def test_no_doubt_but_those_known(found):
    # Absorbance up to 5.5 is this instrument's; one wide band of water leaves nothing to be said of the axis.
    assert [finding.code for finding in found.findings if finding.gravity == DOUBT] == [
        "high_absorbance",
        "exact_duplicates",
        "analytes_together",
    ]


def test_it_names_analytes_that_vary_together(found):
    [finding] = found.found("analytes_together")
    assert finding.evidence.startswith("fat and moisture: r = -0.99; ")


def test_twins_with_different_values_are_told(recipe, repository, tmp_path):
    text = (repository / "tests" / "reference_values" / "tecator.csv").read_text("utf-8")
    lines = text.splitlines()
    cells = lines[28].split(",")
    assert cells[0] == "28"
    cells[lines[0].split(",").index("fat")] = "20.6"
    lines[28] = ",".join(cells)
    (tmp_path / "values.csv").write_text("\n".join(lines))
    spectra = repository / "tests" / "reference_values" / "tecator.csv"
    text = recipe.text.replace('files = ["../tests/reference_values/tecator.csv"]', f"files = ['{spectra}']")
    text = text.replace('file = "../tests/reference_values/tecator.csv"', 'file = "values.csv"')
    [finding] = inspect(recipe_from_text(text, folder=tmp_path)).found("duplicates_with_different_values")
    assert finding.samples == ("28 = 29",)
    assert finding.evidence == "The first: fat 20.6 and 14.6 % m/m."


def test_duplicates_kept_together_are_a_note(recipe):
    table = recipe.cross_validation.model_copy(update={"duplicates_together": True})
    [within] = inspect(recipe.model_copy(update={"cross_validation": table})).found("exact_duplicates")
    assert within.gravity == NOTE
