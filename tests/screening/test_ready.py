"""The winner's recipe can be read again from where it was written."""

import tomllib
from pathlib import Path

import pytest

from quant.recipe.load import load_recipe, load_samples
from quant.screening.ready import recipe_text

ROOT = Path(__file__).resolve().parents[2]
READY = ["dryer_solvent", "gasoline", "starting_material", "tecator"]


@pytest.mark.parametrize("name", READY)
def test_a_recipe_survives(name, tmp_path):
    recipe = load_recipe(ROOT / "configs" / f"{name}.toml")
    text = recipe_text(recipe, tmp_path / "deep", "Heading\n\nof two lines")
    assert text.startswith("# Heading\n#\n# of two lines\n\n")
    (tmp_path / "deep").mkdir()
    (tmp_path / "deep" / "again.toml").write_text(text, encoding="utf-8")
    again = load_recipe(tmp_path / "deep" / "again.toml")
    kept = {"spectra", "reference", "validation"}
    assert again.model_dump(exclude=kept) == recipe.model_dump(exclude=kept)
    assert load_samples(again).sample_ids == load_samples(recipe).sample_ids
    assert again.validation.model_dump(exclude={"files", "reference_file"}) == recipe.validation.model_dump(
        exclude={"files", "reference_file"}
    )


def test_paths_count_from_the_new_folder(tmp_path):
    recipe = load_recipe(ROOT / "configs" / "dryer_solvent.toml")
    content = tomllib.loads(recipe_text(recipe, ROOT / "configs" / "inner", ""))
    assert content["spectra"]["files"] == ["../../demo_sets/dryer_solvent/standards/*.dx"]
    assert content["validation"]["reference_file"] == "../../demo_sets/dryer_solvent/validation.csv"
    whole = recipe.model_copy(
        update={"reference": recipe.reference.model_copy(update={"file": str(tmp_path / "r.csv")})}
    )
    assert tomllib.loads(recipe_text(whole, ".", ""))["reference"]["file"] == str(tmp_path / "r.csv")
