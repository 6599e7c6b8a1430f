"""[revalidation] of a recipe."""

import pytest

from quant.errors import RecipeError
from quant.recipe.load import recipe_from_text

BASE = """title = "t"
[spectra]
files = ["a"]
[reference]
file = "b"
[[analyte]]
name = "acid"
unit = "%"
"""
SECOND = '[[analyte]]\nname = "water"\nunit = "%"\n'


def test_one_table_needs_no_analyte():
    recipe = recipe_from_text(BASE + "[revalidation]\nallowed_bias = 0.05\nallowed_sep = 0.1\n")
    assert (recipe.revalidation[0].allowed_bias, recipe.revalidation[0].allowed_sep) == (0.05, 0.1)


@pytest.mark.parametrize(
    ("text", "complaint"),
    [
        (BASE + "[revalidation]\nallowed_bias = 0.0\n", "greater than 0"),
        (BASE + "[revalidation]\nallowed_bias = inf\n", "allowed_bias = inf; expected a finite number"),
        (BASE + "[revalidation]\nallowed_bais = 0.1\n", "allowed_bias"),
        (BASE + SECOND + "[revalidation]\nallowed_bias = 0.1\n", "without analyte"),
        (BASE + '[revalidation]\nanalyte = "salt"\n', "salt"),
        (BASE + "[[revalidation]]\nallowed_bias = 0.1\n[[revalidation]]\nallowed_bias = 0.2\n", "more than one"),
    ],
)
def test_mistakes_are_told(text, complaint):
    with pytest.raises(RecipeError, match=complaint):
        recipe_from_text(text)
