"""[screen]: which alternatives a search compares, and how honestly."""

from typing import Annotated, Any, Literal

from pydantic import Field, FiniteFloat, model_validator

from quant.recipe.table import Positive, Table, Text

Pair = Annotated[list[FiniteFloat], Field(min_length=2, max_length=2)]


class ChoiceTable(Table):
    """[[screen.choice]]: one place in the preprocessing, and the steps that may stand there."""

    name: Text = Field(description="What `orders` calls this place.")
    optional: bool = Field(False, description="true: no step at all is an alternative, too.")
    steps: list[dict[str, Any]] = Field(
        min_length=1,
        description="Alternatives, each a step with its options as under [[preprocessing]]; vary = { window = [7, 9] } "
        "makes one alternative of every value, and of every combination of values.",
    )


class RangesTable(Table):
    """[screen.ranges]: which points behind the preprocessing are kept. All of them is always a candidate, too."""

    search: Literal["windows", "intervals", "forward_backward"] = Field(
        description="windows: every window of every width; intervals: all combinations; forward_backward: intervals "
        "are added and taken out one by one."
    )
    block: Positive | None = Field(None, description="windows: points by which windows start and end.")
    intervals: list[Pair] | None = Field(
        None, description="intervals, forward_backward: the intervals, which may not overlap. [axis unit]"
    )
    number: int | None = Field(None, ge=2, description="... or their number, equally many points each.")
    most: Positive = Field(3, description="intervals, forward_backward: the most intervals kept together.")

    @model_validator(mode="after")
    def _belongs_together(self) -> "RangesTable":
        if self.search == "windows":
            if self.block is None or {"intervals", "number", "most"} & self.model_fields_set:
                raise ValueError('search = "windows" takes block = <points>, and neither intervals, number nor most')
        elif self.block is not None or (self.intervals is None) == (self.number is None):
            raise ValueError(f'search = "{self.search}" takes either intervals or number, and no block')
        return self


class NestedTable(Table):
    """[screen.nested]: the whole search repeated without samples that it is then judged by."""

    folds: int = Field(10, ge=2, description="Outer folds.")
    repeats: int = Field(3, ge=0, description="How often, with folds drawn anew; 0: not at all.")


class ChanceTable(Table):
    """[screen.chance]: the search repeated on reference values dealt out at random."""

    permutations: int = Field(99, ge=0, description="How often; 0: not at all.")
    over: Literal["family", "all"] = Field(
        "family",
        description="family: only the winner's preprocessing, with all its ranges; all: the whole search, which p "
        "needs to be exact where there are many alternatives.",
    )


class ScreenTable(Table):
    """[screen]: alternatives to compare, behind the steps under [[preprocessing]]."""

    choice: list[ChoiceTable] = Field(
        default_factory=list, description="Places in the preprocessing; every combination of their steps is compared."
    )
    orders: list[list[Text]] | None = Field(
        None, description="Orders of the places to compare, each naming all of them; default: as they are written."
    )
    chains: list[list[dict[str, Any]]] = Field(
        default_factory=list,
        description="Whole preprocessings to compare beside those of [[screen.choice]], or instead: lists of steps, in "
        "which vary is allowed, too; [] is no step.",
    )
    ranges: RangesTable | None = Field(None, description="Ranges to compare; none: all points.")
    budget: Positive = Field(
        20000, description="The most candidates; of more, so many are drawn at random. forward_backward: shared out."
    )
    leaders: Positive = Field(10, description="Leading candidates that are scored again by refitting.")
    prefer: Literal["simpler", "lowest"] = Field(
        "simpler",
        description="simpler: of the candidates within one standard error of the lowest RMSECV the one with fewest "
        "factors, then ranges, then steps; lowest: the lowest RMSECV.",
    )
    seed: int = Field(1, ge=0, description="Of outer folds, permutations and draws.")
    nested: NestedTable = Field(
        default_factory=lambda: NestedTable.model_validate({}),
        description="The whole search repeated without samples that it is then judged by.",
    )
    chance: ChanceTable = Field(
        default_factory=lambda: ChanceTable.model_validate({}),
        description="The search repeated on reference values dealt out at random.",
    )
    new: list[Text] = Field(
        default_factory=list,
        description="Files with new spectra, without values, on which near-ties are compared; default: the spectra of "
        "the validation samples.",
    )

    @model_validator(mode="after")
    def _names_fit(self) -> "ScreenTable":
        names = [table.name for table in self.choice]
        if twice := sorted({name for name in names if names.count(name) > 1}):
            raise ValueError(f"more than one [[screen.choice]] is called {', '.join(twice)}; expected one each")
        for order in self.orders or []:
            if sorted(order) != sorted(names):
                raise ValueError(
                    f"orders holds {order}; expected every name of a [[screen.choice]] once: {', '.join(names)}"
                )
        return self
