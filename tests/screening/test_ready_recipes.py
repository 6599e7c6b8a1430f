"""The ready recipes of searches find what their first lines promise."""

import re
from pathlib import Path

import pytest

from quant.recipe.load import load_recipe
from quant.recipe.screen_schema import ChanceTable, NestedTable
from quant.screening.screen import screen

ROOT = Path(__file__).resolve().parents[2]


def promised(name: str) -> str:
    """Return the comment at the top of a recipe as one line."""
    text = (ROOT / "configs" / f"{name}.toml").read_text(encoding="utf-8")
    return " ".join(line.lstrip("# ") for line in text.partition("\n\n")[0].splitlines())


def search_alone(name: str):
    """Run the search, without nested validation and chance level."""
    recipe = load_recipe(ROOT / "configs" / f"{name}.toml")
    bare = {"nested": NestedTable(repeats=0), "chance": ChanceTable(permutations=0)}
    changed = recipe.model_copy(update={"screen": recipe.screen.model_copy(update=bare)})
    changed._folder, changed._name = recipe.folder, recipe.name
    return screen(changed)


@pytest.mark.parametrize("name", ["screen_gasoline", "screen_tecator"])
def test_the_winner(name):
    told = re.search(r"among (\d+) candidates (.+?) wins with (\d+) factors and RMSECV ([\d.]+)", promised(name))
    assert told, "the recipe promises no winner in these words"
    result = search_alone(name)
    ranges = "".join(f", {low:g} to {high:g} nm," for low, high in result.winner.ranges)
    assert result.n_candidates == int(told[1])
    assert result.winner.preprocessing + ranges == told[2]
    assert result.winner.factors == int(told[3])
    assert f"{result.winner.rmsecv:.4f}" == told[4]


@pytest.mark.long
def test_the_nested_figure():
    told = re.search(r"nested RMSEP is ([\d.]+) \(spread ([\d.]+)", promised("screen_gasoline"))
    nested = screen(load_recipe(ROOT / "configs" / "screen_gasoline.toml")).nested
    assert f"{nested.mean:.3f}" == told[1]
    assert f"{nested.spread:.3f}" == told[2]
