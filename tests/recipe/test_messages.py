"""Pydantic's complaints in the words of a recipe."""

import pytest
from pydantic import BaseModel, ValidationError

from quant.errors import RecipeError
from quant.recipe.load import recipe_from_text
from quant.recipe.messages import did_you_mean, problems

SMALLEST = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n'


def test_a_guess_only_where_one_is_near():
    assert did_you_mean("windw", ["window", "polynomial"]) == " Did you mean 'window'?"
    assert did_you_mean("zzz", ["window", "polynomial"]) == ""


def message_of(text: str) -> str:
    with pytest.raises(RecipeError) as caught:
        recipe_from_text(text, name="a.toml")
    return str(caught.value)


@pytest.mark.parametrize(
    ("tables", "expected"),
    [
        ("[regresion]", "a.toml: unknown key 'regresion'. Did you mean 'regression'?"),
        ("[[analyte]]\nnam = 'b'", "a.toml, [analyte] number 2: the key 'name' is missing. Add it."),
        (
            '[regression]\nmethod = "band_area"\nbands = [{ range = [1, 2] }, { rang = [1, 2] }]',
            "a.toml, [regression.bands] number 2: unknown key 'rang'. Did you mean 'range'?",
        ),
        (
            '[regression]\nmethod = "band_area"\nbands = [{ range = [1, "2"] }]',
            "a.toml, [regression.bands] number 1: range, entry 2 = '2'; expected a valid number.",
        ),
        (
            '[regression]\nmethod = "band_area"\nbands = [{ range = [1] }]',
            "a.toml, [regression.bands] number 1: range = [1]; expected 2 or more of them, not 1.",
        ),
        (
            '[regression]\nmethod = "band_area"\nbands = [{ range = [1, 2, 3] }]',
            "a.toml, [regression.bands] number 1: range = [1, 2, 3]; expected 2 of them at most, not 3.",
        ),
        ("[[analyte]]\nname = ''", "a.toml, [analyte] number 2: name = ''; expected a text that is not empty."),
        ("[spectra.notes]\nresolution = 4", "a.toml, [spectra.notes]: resolution = 4; expected a valid string."),
        ("[validation]\nsamples = [51]", "a.toml, [validation]: samples, entry 1 = 51; expected a valid string."),
    ],
)
def test_where_what_and_what_was_expected(tables, expected):
    text = (
        SMALLEST.replace("[reference]", f"{tables}\n[reference]")
        if tables.startswith("[spectra.")
        else SMALLEST + tables
    )
    assert expected in message_of(text).splitlines()


def test_an_empty_recipe_lists_all_that_is_missing():
    assert message_of("").splitlines() == [
        f"a.toml: the key {key!r} is missing. Add it." for key in ("title", "spectra", "reference", "analyte")
    ]


def test_a_text_that_is_no_table():
    class Table(BaseModel):
        key: int

    with pytest.raises(ValidationError) as caught:
        Table.model_validate(3)
    assert problems(caught.value, "a.toml", Table).startswith("a.toml: ")
