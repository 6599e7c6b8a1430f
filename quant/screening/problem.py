"""What a search works on, and the recipes of its candidates."""

from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.calibration.cross_validation import factor_limit
from quant.calibration.folds import BATCH, FEWEST_BATCHES, Folds, groups_together, make_folds
from quant.estimator.base import Step
from quant.recipe.pipeline import axis_behind, build_steps
from quant.recipe.schema import Recipe
from quant.recipe.screen_schema import ScreenTable
from quant.screening.pieces import Kept, pieces_of, points_kept, ranges_kept
from quant.screening.space import Chain, chains_of, screen_table
from quant.spectra.sample_set import SampleSet


@dataclass(frozen=True, kw_only=True)
class Candidate:
    """One preprocessing with the ranges it keeps, and how it does.

    Attributes
    ----------
    chain : int
        Number of the preprocessing among the problem's.
    kept : tuple of int or range
        Pieces of the axis; empty: all points.
    n_points, n_ranges, n_steps : int
        Points kept; intervals kept (a window is one, and so is everything); steps of the preprocessing.
    factors : int
        By the recipe's rule.
    rmsecv, rmsecv_se : float
        With them; standard error over samples. [unit of the analyte]
    """

    chain: int
    kept: Kept
    n_points: int
    n_ranges: int
    n_steps: int
    factors: int
    rmsecv: float
    rmsecv_se: float

    @property
    def order(self) -> tuple[float, int, tuple[int, ...]]:
        """Key of the table: rising RMSECV; ties in the order of alternatives."""
        return self.rmsecv, self.chain, tuple(self.kept)


@dataclass(frozen=True)
class Layout:
    """One preprocessing: its steps, not fitted, the axis values behind them, and the pieces to choose from."""

    steps: list[Step]
    axis: FloatArray  # before ranges are cut [axis unit]
    pieces: tuple[slice, ...]


@dataclass(frozen=True, eq=False)
class Problem:
    """Samples, the analyte and the recipe with its table [screen]; what follows from them is worked out when needed."""

    samples: SampleSet
    recipe: Recipe
    analyte: str
    layouts: dict[int, Layout] = field(default_factory=dict)  # by preprocessing; parts of a problem share them

    @cached_property
    def table(self) -> ScreenTable:
        """The table [screen]."""
        return screen_table(self.recipe)

    @cached_property
    def chains(self) -> tuple[Chain, ...]:
        """Every preprocessing."""
        return chains_of(self.recipe)

    @cached_property
    def values(self) -> FloatArray:
        """Reference values, shape (n_samples,). [unit of the analyte]"""
        return self.samples.analyte(self.analyte)[1]

    @cached_property
    def folds(self) -> Folds:
        """Who is left out together."""
        return make_folds(self.samples, self.recipe.cross_validation)

    @cached_property
    def groups(self) -> IntArray | None:
        """Group of each sample where the cross-validation holds samples together, or None."""
        table = self.recipe.cross_validation
        note = table.group
        if note is None and table.scheme in ("auto", "leave_one_group_out"):
            batches = [row.get(BATCH) for row in self.samples.notes]
            note = BATCH if all(batches) and len(set(batches)) >= FEWEST_BATCHES else None
        return groups_together(self.samples, note, duplicates=table.duplicates_together)

    def layout(self, chain: int) -> Layout:
        """Return the steps of a preprocessing, and the axis behind it."""
        if chain not in self.layouts:
            spectra = self.samples.spectra
            steps = build_steps(self._recipe(list(self.chains[chain].steps)), spectra.axis, spectra.quantity)
            axis = axis_behind(steps, spectra.axis)
            self.layouts[chain] = Layout(steps, axis, pieces_of(self.table.ranges, axis))
        return self.layouts[chain]

    def ranges(self, candidate: Candidate) -> tuple[tuple[float, float], ...]:
        """Return the ranges a candidate keeps; empty: all points. [axis unit]"""
        layout = self.layout(candidate.chain)
        return ranges_kept(layout.pieces, candidate.kept, layout.axis)

    def candidate_recipe(self, candidate: Candidate) -> Recipe:
        """Return a candidate as a recipe of its own: its steps, its ranges, and no more factors than it can carry."""
        steps = list(self.chains[candidate.chain].steps)
        if ranges := self.ranges(candidate):
            steps.append({"step": "keep_ranges", "ranges": [list(ends) for ends in ranges]})
        return capped(self._recipe(steps), candidate.n_points)

    def _recipe(self, steps: list[dict[str, object]]) -> Recipe:
        changed = self.recipe.model_copy(update={"preprocessing": steps, "screen": None})
        changed._folder, changed._name = self.recipe.folder, self.recipe.name
        return changed

    def most_factors(self, n_points: int) -> int:
        """Return the most factors to look at where so many points are kept."""
        return factor_limit(capped(self.recipe, n_points), self.folds, n_points)

    def part(self, kept: BoolArray) -> "Problem":
        """Return the same search on some of the samples, with no more factors than they can carry."""
        samples = self.samples.subset(kept)
        folds = make_folds(samples, self.recipe.cross_validation)
        smallest = min(int(labels.size - np.bincount(labels).max()) for labels in folds.repeats)
        return Problem(samples, capped(self.recipe, smallest - 1), self.analyte, self.layouts)

    def with_values(self, values: FloatArray) -> "Problem":
        """Return the same search for other reference values of the analyte, shape (n_samples,)."""
        every = self.samples.values.copy()
        every[:, [one.name for one in self.samples.analytes].index(self.analyte)] = values
        return Problem(replace(self.samples, values=every), self.recipe, self.analyte, self.layouts)


def measure(problem: Problem, chain: int, kept: Kept) -> tuple[int, int, int]:
    """Return points, ranges (a window is one, so is everything; else intervals) and steps of a selection."""
    layout = problem.layout(chain)
    n_ranges = len(kept) if isinstance(kept, tuple) and kept else 1
    return points_kept(layout.pieces, kept, layout.axis.size), n_ranges, len(problem.chains[chain].steps)


def capped(recipe: Recipe, most: int) -> Recipe:
    """Return the recipe with max_factors no larger than can be carried; a number asked for by `factors` stays."""
    asked = recipe.regression.max_factors
    if not isinstance(asked, int) or asked <= most:
        return recipe
    table = recipe.regression.model_copy(update={"max_factors": max(most, 1)})
    changed = recipe.model_copy(update={"regression": table})
    changed._folder, changed._name = recipe.folder, recipe.name
    return changed
