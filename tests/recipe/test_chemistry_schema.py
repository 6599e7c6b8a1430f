"""[chemistry]: what it takes, what it refuses, and in which words."""

import pytest

from quant.errors import RecipeError
from quant.recipe.chemistry_schema import chemistry_of
from quant.recipe.load import recipe_from_text

BASE = """title = "t"
[spectra]
files = ["a.csv"]
[reference]
file = "a.csv"
[[analyte]]
name = "acetone"
"""
SECOND = '[[analyte]]\nname = "water"\n'


def load(text, second=False):
    return recipe_from_text(BASE + (SECOND if second else "") + text)


def test_names_positions_and_ranges():
    recipe = load('[chemistry]\nanalyte = ["ketone C=O", 1363, [1230, 1215]]\nmatrix = ["toluene"]\nhalf_width = 10')
    table = chemistry_of(recipe.chemistry, "acetone")
    found = [(band.name, band.low, band.high) for band in table.analyte_bands()]
    assert found == [("ketone C=O", 1705, 1725), ("stated", 1353, 1373), ("stated", 1215, 1230)]
    assert next((band.low, band.high) for band in table.matrix_bands()) == (3017, 3037)  # toluene 3027, widened


def test_one_table_an_analyte():
    recipe = load('[[chemistry]]\nname = "water"\ninterferents = ["acetone"]', second=True)
    assert chemistry_of(recipe.chemistry, "acetone") is None
    assert chemistry_of(recipe.chemistry, "water").interferents == ["acetone"]
    assert chemistry_of(load("").chemistry, "acetone") is None


@pytest.mark.parametrize(
    ("text", "second", "words"),
    [
        ("[chemistry]", False, "nothing said"),
        ("[chemistry]\nhalf_width = 5", False, "nothing said"),
        ('[chemistry]\nanalyte = ["keton C=O"]', False, "'ketone C=O'"),
        ("[chemistry]\nanalyte = [[1700, 1720, 1730]]", False, "analyte"),
        ("[chemistry]\nanalyte = [-1700]", False, "greater than 0"),
        ("[chemistry]\nanalyt = [1700]", False, "Did you mean 'analyte'"),
        ('[chemistry]\ninterferents = ["a", "a"]', False, "more than once"),
        ('[chemistry]\ninterferents = ["acetone"]', False, "its own interferent"),
        ("[chemistry]\nanalyte = [1715]", True, "without name"),
        ('[chemistry]\nname = "x"\nanalyte = [1715]', False, "expected one of acetone"),
        ("[[chemistry]]\nanalyte = [1715]\n[[chemistry]]\nanalyte = [1363]", False, "more than one"),
    ],
)
def test_what_is_refused(text, second, words):
    with pytest.raises(RecipeError, match=words):
        load(text, second)
