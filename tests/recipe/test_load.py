"""Recipes from files, and the data they name."""

from pathlib import Path

import pytest

from quant.errors import FileFormatError, RecipeError, SampleMismatchError
from quant.recipe.load import (
    analytes_of,
    load_recipe,
    load_samples,
    load_validation_samples,
    recipe_from_text,
)

ROOT = Path(__file__).resolve().parents[2]
TEXT = """title = "t"
[spectra]
files = ["spectra.csv"]
axis_unit = "nm"
quantity = "absorbance"
[reference]
file = "values.csv"
[[analyte]]
name = "acid"
column = "Acid_mm"
unit = "% m/m"
laboratory_error = 0.1
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "spectra.csv").write_text("sample,900,902,904\nA,1,2,3\nB,2,3,4\nB,2,3,5\nC,0,1,0\n")
    (tmp_path / "values.csv").write_text("sample,Acid_mm,batch\nA,1.5,x\nB,2.5,y\nC,,y\nD,4,z\n")
    (tmp_path / "new.csv").write_text("sample,900,902,904\nD,1,2,3\n")
    (tmp_path / "recipe.toml").write_text(TEXT)
    return tmp_path


# Plans of standards have a form of their own.
READY = sorted(path.name for path in (ROOT / "configs").glob("*.toml") if not path.name.startswith("plan_"))


@pytest.mark.parametrize("name", READY)
def test_the_ready_recipes_are_valid(name):
    recipe = load_recipe(ROOT / "configs" / name)
    assert recipe.name == name
    assert recipe.text == (ROOT / "configs" / name).read_text(encoding="utf-8")
    assert recipe.folder == str(ROOT / "configs")


def test_paths_count_from_the_recipes_folder(folder, monkeypatch):
    monkeypatch.chdir("/")
    recipe = load_recipe(folder / "recipe.toml")
    with pytest.raises(SampleMismatchError, match="1 of 3 samples have no reference value of acid: C"):
        load_samples(recipe)
    dropped = load_samples(
        recipe_from_text(TEXT.replace('"values.csv"', '"values.csv"\nmissing = "drop"'), folder=folder)
    )
    assert dropped.sample_ids == ("A", "B", "C")
    assert dropped.replicates.tolist() == [1, 2, 1]
    assert dropped.values_without_spectra == ("D",)
    assert dropped.groups("batch") == ("x", "y", "y")
    assert (dropped.spectra.axis.unit, dropped.spectra.quantity) == ("nm", "absorbance")


def test_spectra_without_rows(folder):
    (folder / "values.csv").write_text("sample,Acid_mm\nA,1.5\n")
    with pytest.raises(
        SampleMismatchError, match="2 of 3 samples with spectra have no row in the reference table: B, C"
    ):
        load_samples(load_recipe(folder / "recipe.toml"))
    dropped = recipe_from_text(TEXT.replace('"values.csv"', '"values.csv"\nunmatched = "drop"'), folder=folder)
    assert load_samples(dropped).spectra_without_values == ("B", "C")


def test_validation_files(folder):
    assert load_validation_samples(load_recipe(folder / "recipe.toml")) is None
    named = f'{TEXT}[validation]\nsamples = ["A"]'
    assert load_validation_samples(recipe_from_text(named, folder=folder)) is None
    separate = f'{TEXT}[validation]\nfiles = ["new.csv"]'
    found = load_validation_samples(recipe_from_text(separate, folder=folder))
    assert (found.sample_ids, found.values.tolist()) == (("D",), [[4.0]])
    (folder / "other.csv").write_text("sample,Acid_mm\nD,5\n")
    other = recipe_from_text(f'{separate}\nreference_file = "other.csv"', folder=folder)
    assert load_validation_samples(other).values.tolist() == [[5.0]]


def test_analytes():
    [found] = analytes_of(recipe_from_text(TEXT))
    assert (found.heading, found.analyte.name, found.analyte.unit) == ("Acid_mm", "acid", "% m/m")
    assert found.analyte.laboratory_error == 0.1
    [plain] = analytes_of(recipe_from_text(TEXT.replace('column = "Acid_mm"\n', "")))
    assert plain.heading == "acid"


def test_files_that_are_no_recipes(tmp_path):
    with pytest.raises(FileFormatError, match="no such file"):
        load_recipe(tmp_path / "none.toml")
    (tmp_path / "a.toml").write_bytes(b"a\x00b")
    with pytest.raises(RecipeError, match=r"a\.toml holds binary content; expected a recipe"):
        load_recipe(tmp_path / "a.toml")
    (tmp_path / "a.toml").write_bytes(b"# " + b"x" * 2**20)
    with pytest.raises(RecipeError, match=r"a\.toml holds 1 MiB; expected a recipe, which is a short text file"):
        load_recipe(tmp_path / "a.toml")
    (tmp_path / "a.toml").write_text("title = 't")
    with pytest.raises(RecipeError, match=r"^a\.toml is no valid TOML: .* \(at "):
        load_recipe(tmp_path / "a.toml")


def test_a_recipe_cannot_be_changed():
    recipe = recipe_from_text(TEXT)
    with pytest.raises(ValueError, match="frozen"):
        recipe.title = "other"
