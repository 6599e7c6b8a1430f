"""Chains of preprocessing steps to compare."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product
from typing import Any

from quant.errors import RecipeError
from quant.recipe.schema import Recipe
from quant.recipe.screen_schema import ScreenTable

StepTable = dict[str, Any]


@dataclass(frozen=True)
class Chain:
    """One preprocessing: tables as they stand under [[preprocessing]], the recipe's own ones first."""

    steps: tuple[StepTable, ...]

    def __str__(self) -> str:
        """The steps with their options, in order."""
        return " + ".join(map(_told, self.steps)) or "no step"


def screen_table(recipe: Recipe) -> ScreenTable:
    """Return the table [screen] of a recipe.

    Raises
    ------
    RecipeError
        There is none, or the regression is none that a search can compare.
    """
    if recipe.screen is None:
        raise RecipeError(
            f"{recipe.name} has no table [screen]; expected one with alternatives to compare, such as [[screen.choice]]"
            " or [screen.ranges]. Add it, or run calibrate."
        )
    if recipe.regression.method != "pls":
        raise RecipeError(
            f'{recipe.name}, [regression]: method = "{recipe.regression.method}"; a search compares candidates by PLS '
            'only. Set method = "pls".'
        )
    if recipe.regression.factors == "randomisation":
        raise RecipeError(
            f'{recipe.name}, [regression]: factors = "randomisation" takes too long for every candidate of a search; '
            'choose "one_standard_error", "minimum", "f_ratio" or a number.'
        )
    return recipe.screen


def chains_of(recipe: Recipe) -> tuple[Chain, ...]:
    """Return every preprocessing that the recipe's choices and orders give, each once.

    Raises
    ------
    RecipeError
        `vary` is no table of lists.
    """
    table = screen_table(recipe)
    alternatives: dict[str, list[StepTable | None]] = {}
    for choice in table.choice:
        steps = _varied(choice.steps, f"{recipe.name}, [[screen.choice]] {choice.name!r}")
        alternatives[choice.name] = [None, *steps] if choice.optional else steps
    listed = [[_varied([step], f"{recipe.name}, [screen] chains") for step in steps] for steps in table.chains]
    if alternatives or not listed:
        orders = table.orders or [list(alternatives)]
        listed += [[alternatives[name] for name in order] for order in orders]
    found: dict[str, Chain] = {}
    for places in listed:
        for chosen in product(*places):
            chain = Chain((*recipe.preprocessing, *(step for step in chosen if step is not None)))
            found.setdefault(repr(chain.steps), chain)
    return tuple(found.values())


def _varied(steps: Sequence[StepTable], place: str) -> list[StepTable | None]:
    """Steps with one value each for every option under `vary`, in every combination."""
    found: list[StepTable | None] = []
    for table in steps:
        options = dict(table)
        varied = options.pop("vary", {})
        if not isinstance(varied, dict) or not all(isinstance(values, list) and values for values in varied.values()):
            raise RecipeError(
                f"{place}: vary = {varied!r}; expected a list of values for each option, as in "
                "vary = { window = [7, 9, 11] }."
            )
        found += [{**options, **dict(zip(varied, values, strict=True))} for values in product(*varied.values())]
    return found


def _told(table: StepTable) -> str:
    options = ", ".join(f"{key}={value}" for key, value in table.items() if key != "step")
    return f"{table.get('step')}({options})" if options else f"{table.get('step')}"
