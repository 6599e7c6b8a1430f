"""What a recipe may say: defaults in one file, a description for every key."""

from collections.abc import Iterator
from typing import Any

import pytest

from quant.errors import RecipeError
from quant.readers.options import FORMATS, STATED_QUANTITIES, ReadingOptions
from quant.recipe.load import recipe_from_text
from quant.recipe.schema import Recipe, SpectraTable
from quant.recipe.table import DEFAULTS
from quant.statistics.factor_rules import RULES
from quant.units import AXIS_UNITS

SMALLEST = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n'


def test_every_default_is_in_force():
    audit = "[decision]\nlimit = 1.0\n[acceptance]\nmin_samples = 1\n[chemistry]\nanalyte = [1715]\n"
    recipe = recipe_from_text(f'{SMALLEST}{audit}[validation]\nsplit = "random"')
    for name, keys in DEFAULTS.items():
        table = getattr(recipe, name)
        for key, value in keys.items():
            assert getattr(table[0] if isinstance(table, list) else table, key) == value


def test_every_default_that_is_something_stands_in_the_file():
    recipe = recipe_from_text(f'{SMALLEST}[validation]\nsplit = "random"')
    for name in ("spectra", "reference", "regression", "cross_validation", "validation"):
        table = getattr(recipe, name)
        for key, field in type(table).model_fields.items():
            if not field.is_required() and field.get_default(call_default_factory=True) not in (None, {}, [], ""):
                assert key in DEFAULTS[name], f"[{name}] {key}"


def properties(schema: dict[str, Any]) -> Iterator[tuple[str, dict[str, Any]]]:
    for title, table in {"Recipe": schema, **schema["$defs"]}.items():
        for key, value in table["properties"].items():
            yield f"{title}.{key}", value


def test_every_property_has_a_description():
    found = dict(properties(Recipe.model_json_schema()))
    assert len(found) > 40
    assert [name for name, value in found.items() if not value.get("description")] == []


def test_the_schema_forbids_what_it_does_not_know():
    schema = Recipe.model_json_schema()
    assert schema["additionalProperties"] is False
    assert all(table["additionalProperties"] is False for table in schema["$defs"].values())


def test_words_agree_with_those_of_the_rooms_below():
    fields = Recipe.model_json_schema()["$defs"]["SpectraTable"]["properties"]

    def words(key):
        return {word for branch in [fields[key], *fields[key].get("anyOf", [])] for word in branch.get("enum", [])}

    assert words("format") == set(FORMATS)
    assert words("axis_unit") == set(AXIS_UNITS)
    assert words("quantity") == set(STATED_QUANTITIES)
    assert set(SpectraTable.model_fields) - {"files"} == set(ReadingOptions.__dataclass_fields__)
    factors = Recipe.model_json_schema()["$defs"]["RegressionTable"]["properties"]["factors"]
    assert {word for branch in factors["anyOf"] for word in branch.get("enum", [])} == set(RULES)


def test_options_for_the_readers():
    text = SMALLEST.replace('files = ["x"]', 'files = ["x"]\ndecimal = ","\nnotes = { technique = "ATR" }')
    options = recipe_from_text(text).spectra.options()
    assert options.to_dict() == {"decimal": ",", "notes": {"technique": "ATR"}}


@pytest.mark.parametrize(
    ("tables", "message"),
    [
        ('[validation]\nnote = "subset"', r'\[validation\]: note and values go together: note = "subset", values'),
        ('[validation]\nsamples = ["a"]\nreference_file = "v.csv"', r"\[validation\]: reference_file goes with files"),
        ('[validation]\nsamples = ["a"]\nfraction = 0.5', r"\[validation\]: fraction goes with split"),
        ("[validation]", r"\[validation\]: nothing given; expected exactly one of samples, note, files, split"),
        ('[validation]\nsplit = "random"\nfraction = 1.0', r"\[validation\]: fraction = 1\.0; expected less than 1"),
        ("[cross_validation]\nfolds = 1", r"\[cross_validation\]: folds = 1; expected greater than or equal to 2"),
        ("[cross_validation]\nseed = 1.5", r"\[cross_validation\]: seed = 1\.5; expected a valid integer"),
        ("[regression]\nthrough_origin = true", r'\[regression\]: through_origin does not belong to method = "pls"'),
        ('[[exclude]]\nsamples = ["a"]', r"\[exclude\] number 1: the key 'reason' is missing"),
        ('[[analyte]]\nname = "b"\nlaboratory_error = -1', r"\[analyte\] number 2: laboratory_error = -1; expected"),
        ('[[analyte]]\nname = ""', r"\[analyte\] number 2: name = ''; expected"),
    ],
)
def test_contradictions(tables, message):
    with pytest.raises(RecipeError, match=f"^recipe.toml, {message}"):
        recipe_from_text(SMALLEST + tables, name="recipe.toml")
