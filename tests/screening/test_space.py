"""Alternatives written out: every combination once."""

import pytest

from quant.errors import RecipeError
from quant.screening.space import chains_of, screen_table

TWO = """orders = [["a", "b"], ["b", "a"]]
[[screen.choice]]
name = "a"
optional = true
steps = [{ step = "snv" }]
[[screen.choice]]
name = "b"
optional = true
steps = [{ step = "savitzky_golay", polynomial = 2, vary = { window = [5, 7], derivative = [1, 2] } }]
"""


def test_every_combination_in_every_order_once(make_recipe):
    told = [str(chain) for chain in chains_of(make_recipe(TWO))]
    # nothing; snv; 4 derivatives; 4 derivatives behind and 4 before snv
    assert len(told) == len(set(told)) == 1 + 1 + 4 + 4 + 4
    assert told[0] == "no step"
    assert "snv + savitzky_golay(polynomial=2, window=5, derivative=1)" in told
    assert "savitzky_golay(polynomial=2, window=5, derivative=1) + snv" in told


def test_whole_chains_and_the_recipes_own_steps(make_recipe):
    own = '[[preprocessing]]\nstep = "mean_centre"\n'
    recipe = make_recipe('chains = [[], [{ step = "snv" }, { step = "msc" }]]\n' + own)
    assert [str(chain) for chain in chains_of(recipe)] == ["mean_centre", "mean_centre + snv + msc"]
    both = make_recipe('chains = [[{ step = "msc" }]]\n' + TWO.partition("\n")[2])
    assert len(chains_of(both)) == 1 + 10


def test_without_alternatives_there_is_the_recipes_own_chain(make_recipe):
    assert [chain.steps for chain in chains_of(make_recipe())] == [()]


def test_vary_has_to_be_lists(make_recipe):
    recipe = make_recipe('chains = [[{ step = "savitzky_golay", vary = { window = 5 } }]]')
    with pytest.raises(RecipeError, match=r"vary = .* expected a list of values"):
        chains_of(recipe)


@pytest.mark.parametrize(
    ("regression", "message"),
    [
        ('factors = "randomisation"', "takes too long"),
        ('method = "pcr"', "compares candidates by PLS only"),
    ],
)
def test_what_cannot_be_searched(make_recipe, regression, message):
    head = make_recipe().text.partition("[regression]")[0] + f"[regression]\n{regression}\n"
    with pytest.raises(RecipeError, match=message):
        screen_table(make_recipe(head=head))


def test_a_recipe_without_the_table(make_recipe):
    with pytest.raises(RecipeError, match=r"has no table \[screen\]"):
        screen_table(make_recipe().model_copy(update={"screen": None}))
