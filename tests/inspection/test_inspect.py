"""A first look: it reports what does not fit, and refuses only what cannot be read."""

import json
from pathlib import Path

import pytest

from quant.errors import FileFormatError, SampleMismatchError
from quant.inspection.inspect import inspect
from quant.recipe.load import recipe_from_text

RECIPE = """title = "A look"
[spectra]
files = ["spectra.csv"]
axis_unit = "nm"
quantity = "absorbance"
[reference]
file = "values.csv"
[[analyte]]
name = "acid"
unit = "% m/m"
[[analyte]]
name = "water"
[[preprocessing]]
step = "keep_ranges"
ranges = [[902, 906]]
[[preprocessing]]
step = "snv"
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    rows = [
        "sample,900,902,904,906",
        "A,0.1,0.2,0.3,0.4",
        "B,0.2,0.3,0.4,0.9",
        "B,0.2,0.3,0.5,0.9",
        "C,-0.1,1,0,2",
        "E,1,1,1,2",
    ]
    (tmp_path / "spectra.csv").write_text("\n".join(rows))
    values = [
        "sample,acid,water,origin",
        "A,1.5,7,process",
        "B,2.5,,spiked",
        "C,5,9,spiked",
        "V,4,8,process",
        "W,1,1,process",
    ]
    (tmp_path / "values.csv").write_text("\n".join(values))
    (tmp_path / "new.csv").write_text("sample,900,902,904,906\nV,1,2,3,4\n")
    return tmp_path


def test_what_was_read_and_paired(folder):
    found = inspect(recipe_from_text(RECIPE, folder=folder))
    [one] = found.sets
    assert (one.name, one.n_files, one.n_spectra, one.n_samples, one.replicates) == ("calibration", 1, 5, 3, "1 to 2")
    assert one.axis == "900 → 906 nm, 4 points, every 2 nm (rising)"
    assert (one.quantity, one.ordinate_lowest, one.ordinate_highest) == ("absorbance", -0.1, 2.0)
    assert one.origins == {"process": 1, "spiked": 2}
    assert one.spectra_without_values == ("E",)
    assert one.values_without_spectra == ("V", "W")
    acid, water = one.analytes
    assert (acid.n_values, acid.lowest, acid.highest, acid.mean) == (3, 1.5, 5.0, 3.0)
    assert (water.n_values, water.without_value) == (2, ("B",))
    assert (found.pipeline, found.points) == (("keep_ranges", "snv"), "4 read, 3 behind the preprocessing")


def test_two_sets_share_a_reference_table(folder):
    calibration, validation = inspect(
        recipe_from_text(f'{RECIPE}[validation]\nfiles = ["new.csv"]', folder=folder)
    ).sets
    assert (validation.name, validation.n_spectra, validation.n_samples) == ("validation", 1, 1)
    assert calibration.values_without_spectra == validation.values_without_spectra == ("W",)


def test_an_analyte_without_any_value(folder):
    (folder / "values.csv").write_text("sample,acid,water\nA,1,\nB,2,\nC,3,\n")
    water = inspect(recipe_from_text(RECIPE, folder=folder)).sets[0].analytes[1]
    assert (water.n_values, water.lowest, water.mean) == (0, None, None)


def test_text_and_json(folder):
    found = inspect(recipe_from_text(RECIPE, folder=folder))
    read = "".join(f"{note}\n" for note in found.sets[0].reader_notes)  # how the readers understood the files
    head, _, findings = str(found).partition("\n\nFindings: ")
    assert (
        head
        == f"""A look

Calibration samples
files                      1
spectra                    5
paired samples             3 (1 to 2 spectra each)
axis                       900 → 906 nm, 4 points, every 2 nm (rising)
ordinate                   absorbance, -0.1 to 2
origins                    1 process, 2 spiked
spectra without a value    E
values without a spectrum  V, W
analyte  unit   values   from     to   mean  without a value
acid     % m/m       3  1.500  5.000  3.000  none
water                2  7.000  9.000  8.000  B
{read}
Preprocessing: keep_ranges → snv
Points: 4 read, 3 behind the preprocessing"""
    )
    assert findings.startswith("4 stops, ")  # three values and two, E and B: calibrating would refuse them
    record = json.loads(found.to_json())
    assert record["sets"][0]["analytes"][1]["without_value"] == ["B"]
    assert {"gravity", "code", "title", "samples", "evidence", "advice"} == set(record["findings"][0])
    assert "picture" not in record


def test_what_cannot_be_read_is_refused(folder):
    (folder / "values.csv").write_text("sample,acid,water\nX,1,2\n")
    with pytest.raises(SampleMismatchError, match="Not one of 4 samples with spectra"):
        inspect(recipe_from_text(RECIPE, folder=folder))
    (folder / "spectra.csv").write_text("sample,900\nA,x\n")
    with pytest.raises(FileFormatError):
        inspect(recipe_from_text(RECIPE, folder=folder))


def test_files_on_another_axis_are_named_and_left_out(folder):
    (folder / "spectra2.csv").write_text("sample,900,902,904,907\nW,1,2,3,1\n")
    found = inspect(recipe_from_text(RECIPE.replace('"spectra.csv"', '"spectra.csv", "spectra2.csv"'), folder=folder))
    [finding] = found.found("mixed_axes")
    assert (finding.gravity, finding.samples) == ("stop", ("spectra2.csv (W)",))
    assert "900 → 907 nm" in finding.evidence
    assert "900 → 906 nm" in finding.evidence
    assert (found.sets[0].n_files, found.sets[0].n_spectra, found.sets[0].n_samples) == (2, 6, 3)
    assert not found.accepted


def test_resampled_files_are_taken_in(folder):
    (folder / "spectra2.csv").write_text("sample,899,901,903,905,907\nW,1,2,3,1,1\n")
    recipe = RECIPE.replace('"spectra.csv"', '"spectra.csv", "spectra2.csv"').replace(
        'quantity = "absorbance"', 'quantity = "absorbance"\nresample = true'
    )
    found = inspect(recipe_from_text(recipe, folder=folder))
    assert not found.found("mixed_axes")
    assert found.sets[0].n_samples == 4


def test_a_damaged_file_among_others_is_named(folder):
    (folder / "spectra2.csv").write_text("sample,900,902,904,906\nW,1,2,?!,1\n")
    recipe = RECIPE.replace('"spectra.csv"', '"spectra.csv", "spectra2.csv"')
    [finding] = inspect(recipe_from_text(recipe, folder=folder)).found("unreadable_file")
    assert (finding.gravity, finding.samples) == ("stop", ("spectra2.csv",))


def test_a_validation_set_on_another_axis(folder):
    (folder / "new.csv").write_text("sample,900,902,904,908\nV,1,2,3,4\n")
    found = inspect(recipe_from_text(f'{RECIPE}[validation]\nfiles = ["new.csv"]', folder=folder))
    [finding] = found.found("mixed_axes")
    assert finding.samples == ("V",)
    assert [part.n_samples for part in found.sets] == [3, 1]


def test_a_sample_in_both_sets(folder):
    (folder / "new.csv").write_text("sample,900,902,904,906\nV,1,2,3,4\nA,1,2,3,4.5\n")
    found = inspect(recipe_from_text(f'{RECIPE}[validation]\nfiles = ["new.csv"]', folder=folder))
    [finding] = found.found("sample_in_both_sets")
    assert (finding.gravity, finding.samples) == ("stop", ("A",))


def test_excluded_samples_are_not_looked_at(folder):
    rows = (folder / "spectra.csv").read_text()
    (folder / "spectra.csv").write_text(rows.replace("C,-0.1,1,0,2", "C,0.1,0.2,0.3,0.4"))
    assert inspect(recipe_from_text(RECIPE, folder=folder)).found("exact_duplicates")
    left_out = '[[exclude]]\nsamples = ["C"]\nreason = "a copy"\n'
    assert not inspect(recipe_from_text(RECIPE + left_out, folder=folder)).found("exact_duplicates")
