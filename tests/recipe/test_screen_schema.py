"""[screen]: what it refuses, and in which words."""

import pytest

from quant.errors import RecipeError
from quant.recipe.load import recipe_from_text

HEAD = """title = "t"
[spectra]
files = ["s.csv"]
[reference]
file = "r.csv"
[[analyte]]
name = "acid"
unit = "%"
[screen]
"""
PLACES = """[[screen.choice]]
name = "a"
steps = [{ step = "snv" }]
[[screen.choice]]
name = "b"
steps = [{ step = "msc" }]
"""


def test_defaults():
    table = recipe_from_text(HEAD).screen
    assert (table.budget, table.leaders, table.prefer, table.seed) == (20000, 10, "simpler", 1)
    assert (table.nested.folds, table.nested.repeats) == (10, 3)
    assert (table.chance.permutations, table.chance.over) == (99, "family")
    assert recipe_from_text(HEAD.replace("[screen]\n", "")).screen is None


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("budgt = 5", "unknown key 'budgt'. Did you mean 'budget'?"),
        ('[screen.ranges]\nsearch = "windows"', "takes block = <points>"),
        ('[screen.ranges]\nsearch = "windows"\nblock = 5\nmost = 2', "neither intervals, number nor most"),
        ('[screen.ranges]\nsearch = "intervals"', "takes either intervals or number"),
        ('[screen.ranges]\nsearch = "intervals"\nnumber = 5\nintervals = [[1, 2]]', "takes either intervals or number"),
        ('[screen.ranges]\nsearch = "forward_backward"\nnumber = 5\nblock = 2', "no block"),
        ('orders = [["a"]]\n' + PLACES, "expected every name of a [[screen.choice]] once: a, b"),
        ('orders = [["a", "b", "b"]]\n' + PLACES, "expected every name of a [[screen.choice]] once: a, b"),
        (PLACES.replace('"b"', '"a"'), "more than one [[screen.choice]] is called a"),
        ("[screen.nested]\nfolds = 1", "greater than or equal to 2"),
    ],
)
def test_what_is_refused(text, message):
    with pytest.raises(RecipeError) as refused:
        recipe_from_text(HEAD + text)
    assert message in str(refused.value)
