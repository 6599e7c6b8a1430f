"""Linear inequalities between components, written as a chemist writes them."""

import math
import re
from collections.abc import Mapping, Sequence
from typing import NamedTuple

from quant.errors import RecipeError
from quant.recipe.messages import did_you_mean


class Inequality(NamedTuple):
    """Sum of coefficient times component, at most `bound`.

    Attributes
    ----------
    text : str
        As it was written.
    coefficients : mapping of str to float
        By component; those not named count zero.
    bound : float
        [unit]
    """

    text: str
    coefficients: Mapping[str, float]
    bound: float


_NUMBER = r"(?P<number>(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?)"
_EXPECTED = 'expected sums of components and numbers on both sides of <= or >=, such as "water <= 0.5 * ethanol"'


def parse_inequality(text: str, names: Sequence[str]) -> Inequality:
    """Read an inequality such as ``water + 2 * ethanol <= 8`` or ``water >= 0.1 * ethanol``.

    Parameters
    ----------
    text : str
        Terms joined by + and −; a term is a number, a component, or the two joined by * (a component may be divided
        by a number). Names may hold blanks, digits and dashes: the longest that fits is taken.
    names : sequence of str
        The components.

    Raises
    ------
    RecipeError
        Not of that form, or a word that is no component.
    """
    sides = re.split(r"(<=|>=|≤|≥)", text)
    if len(sides) != 3:
        raise RecipeError(f"constraint {text!r} has {len(sides) // 2} sign(s) <= or >=; {_EXPECTED}.")
    left, right = (_sum_of(side, text, names) for side in (sides[0], sides[2]))
    sign = 1.0 if sides[1] in ("<=", "≤") else -1.0
    coefficients = {name: sign * (left.get(name, 0.0) - right.get(name, 0.0)) for name in names}
    if not any(coefficients.values()):
        raise RecipeError(f"constraint {text!r} says nothing of any component; {_EXPECTED}.")
    return Inequality(text, coefficients, sign * (right.get("", 0.0) - left.get("", 0.0)))


def _sum_of(side: str, text: str, names: Sequence[str]) -> dict[str, float]:
    """Return the coefficients of one side by component, the constant under ''."""
    found: dict[str, float] = {}
    tokens = _tokens(side, text, names)
    position, first = 0, True
    while first or position < len(tokens):
        sign, position = _signs(tokens, position, text, needed=not first)
        name, factor, position = _term(tokens, position, text)
        found[name] = found.get(name, 0.0) + sign * factor
        first = False
    return found


def _tokens(side: str, text: str, names: Sequence[str]) -> list[str | float]:
    """Cut a side into names (preceded by '='), numbers and signs."""
    known = "|".join(re.escape(name) for name in sorted(names, key=len, reverse=True))
    pattern = re.compile(rf"\s*(?:(?P<name>(?<!\w)(?:{known})(?!\w))|{_NUMBER}|(?P<sign>[-+*/−]))")
    tokens: list[str | float] = []
    position = 0
    while side[position:].strip():
        match = pattern.match(side, position)
        if match is None:
            word = re.split(r"[-+*/−]", side[position:])[0].strip() or side[position:].strip()
            raise RecipeError(
                f"constraint {text!r}: {word!r} is neither a component nor a number.{did_you_mean(word, names)} "
                f"Components are: {', '.join(names)}."
            )
        if match["number"] is not None:
            if not math.isfinite(float(match["number"])):
                raise RecipeError(f"constraint {text!r}: {match['number']} is beyond all numbers; {_EXPECTED}.")
            tokens.append(float(match["number"]))
        else:
            tokens.append(f"={match['name']}" if match["name"] is not None else match["sign"].replace("−", "-"))
        position = match.end()
    return tokens


def _signs(tokens: list[str | float], position: int, text: str, *, needed: bool) -> tuple[float, int]:
    if position < len(tokens) and tokens[position] in ("+", "-"):
        return (1.0 if tokens[position] == "+" else -1.0), position + 1
    if needed:
        raise RecipeError(f"constraint {text!r}: two terms without + or - between them; {_EXPECTED}.")
    return 1.0, position


def _term(tokens: list[str | float], position: int, text: str) -> tuple[str, float, int]:
    """Return component ('' for a constant), factor, and where the next term begins."""
    name, factor, dividing = "", 1.0, False
    while True:
        token = tokens[position] if position < len(tokens) else None
        if isinstance(token, float) and not (dividing and token == 0):
            factor = factor / token if dividing else factor * token
        elif isinstance(token, str) and token.startswith("=") and not name and not dividing:
            name = token[1:]
        else:
            raise RecipeError(f"constraint {text!r} cannot be read as a sum of terms; {_EXPECTED}.")
        position += 1
        if position == len(tokens) or tokens[position] not in ("*", "/"):
            return name, factor, position
        dividing = tokens[position] == "/"
        position += 1
