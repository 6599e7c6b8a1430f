"""[decision], [acceptance] and [uncertainty]: one table for one analyte, lists for several, and every contradiction."""

import pytest

from quant.errors import RecipeError
from quant.recipe.audit_schema import table_of
from quant.recipe.load import recipe_from_text

HEAD = 'title = "t"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n'
TWO = f'{HEAD}[[analyte]]\nname = "water"\n'


def test_one_table_for_one_analyte():
    recipe = recipe_from_text(f"{HEAD}[decision]\nlimit = 1\n[acceptance]\nmax_bias = 0.1\n")
    assert table_of(recipe.decision, "acid").limit == 1.0
    assert (recipe.decision[0].kind, recipe.decision[0].risk) == ("upper", 0.05)
    assert table_of(recipe.acceptance, "acid").max_bias == 0.1


def test_a_list_for_several():
    recipe = recipe_from_text(f'{TWO}[[decision]]\nanalyte = "water"\nlimit = 2.0\nkind = "lower"\n')
    assert table_of(recipe.decision, "water").kind == "lower"
    assert table_of(recipe.decision, "acid") is None


@pytest.mark.parametrize(
    ("text", "told"),
    [
        (f"{HEAD}[decision]\nlimt = 1.0", r"unknown key 'limt'. Did you mean 'limit'\?"),
        (f"{HEAD}[decision]\nkind = 'upper'", "nothing given; expected exactly one of limit, solvent"),
        (f"{HEAD}[decision]\nlimit = 1.0\nsolvent = 'toluene'", "limit and solvent given; expected exactly one"),
        (f"{HEAD}[decision]\nlimit = inf", r"limit = inf; expected a finite number"),
        (f"{HEAD}[decision]\nlimit = 1.0\ndose = 5.0", "dose goes with solvent"),
        (f"{HEAD}[decision]\nsolvent = 'toluene'\nkind = 'lower'", "the limit of a solvent is an upper one"),
        (f"{HEAD}[decision]\nlimit = 1.0\nrisk = 0.6", "risk = 0.6; expected less than or equal to 0.5"),
        (f"{HEAD}[[decision]]\nlimit = 1.0\n[[decision]]\nlimit = 2.0", r"more than one \[\[decision\]\] of acid"),
        (f"{TWO}[decision]\nlimit = 1.0", r"\[\[decision\]\] without analyte; expected one of acid, water"),
        (f"{HEAD}[acceptance]\nanalyte = 'x'\nmax_bias = 1.0", "names the analyte 'x'; expected one of acid"),
        (f"{HEAD}[acceptance]\nanalyte = 'acid'", "no criterion given"),
        (f"{HEAD}[uncertainty]\nprobability = 1.0", "probability = 1.0; expected less than 1"),
    ],
)
def test_what_contradicts_itself_is_refused(text, told):
    with pytest.raises(RecipeError, match=told):
        recipe_from_text(text)
