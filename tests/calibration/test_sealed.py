"""The ledger counts looks at a validation set; the same look again is no further one."""

import json

import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.sealed import FILE, NOT_COUNTED, open_ledger, samples_fingerprint
from quant.errors import FileFormatError

VALIDATION = '[regression]\nfactors = 2\n[validation]\nsamples = ["S01..S06"]\n'
CRITERIA = "[acceptance]\nmax_rmsep = 0.5\n"


def look(folder, recipe, samples):
    return calibrate(recipe, samples, ledger=open_ledger(folder)).analytes[0].audit.seal


def test_looks_are_counted(tmp_path, make_recipe, make_samples):
    samples = make_samples(24)
    first = look(tmp_path, make_recipe(VALIDATION + CRITERIA), samples)
    assert (first.look, first.looks, first.fixed_beforehand, first.independent) == (1, 1, True, True)
    again = look(tmp_path, make_recipe(f"# a comment\n{VALIDATION}{CRITERIA}"), samples)
    assert again == first
    other = look(tmp_path, make_recipe(VALIDATION.replace("2", "3", 1) + CRITERIA), samples)
    assert (other.look, other.looks, other.fixed_beforehand, other.independent) == (2, 2, True, False)
    assert "no longer independent" in other.statement
    back = look(tmp_path, make_recipe(VALIDATION + CRITERIA), samples)
    assert (back.look, back.looks) == (1, 2)


def test_criteria_that_came_later_are_told(tmp_path, make_recipe, make_samples):
    samples = make_samples(24)
    assert look(tmp_path, make_recipe(VALIDATION), samples).fixed_beforehand is None
    later = look(tmp_path, make_recipe(VALIDATION + CRITERIA), samples)
    assert (later.look, later.fixed_beforehand) == (2, False)
    assert later.statement.endswith("the criteria of acceptance are not those of the first look")


def test_other_standards_are_another_look_and_other_validation_samples_another_set(tmp_path, make_recipe, make_samples):
    recipe = make_recipe(VALIDATION)
    samples = make_samples(24)
    assert look(tmp_path, recipe, samples).look == 1
    fewer = make_recipe(f'{VALIDATION}[[exclude]]\nsamples = ["S20"]\nreason = "spilt"')
    assert look(tmp_path, fewer, samples).look == 2
    elsewhere = make_recipe(VALIDATION.replace("S06", "S07"))
    assert look(tmp_path, elsewhere, samples).look == 1


def test_the_look_is_written_before_it_is_taken(tmp_path, make_recipe, make_samples, monkeypatch):
    def broken(*_, **__):
        assert json.loads((tmp_path / FILE).read_text("utf-8"))["looks"]
        raise ZeroDivisionError

    monkeypatch.setattr("quant.calibration.calibrate.validate", broken)
    with pytest.raises(ZeroDivisionError):
        look(tmp_path, make_recipe(VALIDATION), make_samples(24))


def test_nothing_is_written_without_validation(tmp_path, make_recipe, make_samples):
    assert look(tmp_path, make_recipe(), make_samples(24)) is None
    assert list(tmp_path.iterdir()) == []


def test_python_without_a_ledger_says_so(make_recipe, make_samples):
    seal = calibrate(make_recipe(VALIDATION), make_samples(24)).analytes[0].audit.seal
    assert (seal.look, seal.statement) == (None, NOT_COUNTED)


@pytest.mark.parametrize("content", ["", "[]", "{}", '{"looks": 3}', '{"looks": {"a": [1]}}'])
def test_a_damaged_ledger_is_refused(tmp_path, content):
    (tmp_path / FILE).write_text(content, "utf-8")
    with pytest.raises(FileFormatError, match="no intact ledger of looks"):
        open_ledger(tmp_path)


def test_the_order_of_samples_plays_no_part(make_samples):
    samples = make_samples(6)
    values = samples.values[:, 0]
    assert samples_fingerprint(samples, values) != samples_fingerprint(samples, values[::-1])
    backwards = samples.subset([0, 1, 2, 3, 4, 5])
    assert samples_fingerprint(backwards, values) == samples_fingerprint(samples, values)
