"""Compare many candidate recipes, and say what the winner's score is worth."""

from pathlib import Path

import numpy as np

from quant.calibration.cross_validation import check_calibration_values
from quant.calibration.split import Split, split_samples
from quant.errors import NotEnoughDataError
from quant.readers.read import read_spectra
from quant.recipe.load import load_samples, load_validation_samples
from quant.recipe.schema import Recipe
from quant.screening.chance import chance_level
from quant.screening.near_ties import near_ties
from quant.screening.nested import nested
from quant.screening.problem import Candidate, Problem
from quant.screening.result import ScreenResult, ScreenRow, WindowMap, window_edges
from quant.screening.search import Search, search
from quant.screening.space import screen_table
from quant.screening.work import workers
from quant.spectra.sample_set import SampleSet
from quant.spectra.spectra_set import SpectraSet


def screen(
    recipe: Recipe,
    samples: SampleSet | None = None,
    validation: SampleSet | None = None,
    *,
    analyte: str | None = None,
    new: SpectraSet | None = None,
    n_workers: int = 1,
    cluster: str | None = None,
) -> ScreenResult:
    """Compare the alternatives under [screen] of a recipe by cross-validation, and judge the winner honestly.

    Validation samples of the recipe take no part, except that near-ties may be compared on their spectra. An
    interruption (Ctrl-C) keeps what was found until then.

    Parameters
    ----------
    recipe : Recipe
        With a table [screen].
    samples, validation : SampleSet, optional
        Samples at hand, instead of the files that the recipe names.
    analyte : str, optional
        Default: the first one.
    new : SpectraSet, optional
        Spectra on which near-ties are compared, instead of the files that the recipe names.
    n_workers : int
        Processes; −1: one a core. The result does not depend on it.
    cluster : str, optional
        Address of a running Dask cluster that does the work instead.

    Returns
    -------
    ScreenResult

    Raises
    ------
    RecipeError
        No table [screen], or one that cannot be searched.
    NotEnoughDataError
        Too few samples, or interrupted before anything was found.
    ParameterError
        Alternatives that do not fit the spectra.
    """
    table = screen_table(recipe)
    name = analyte or recipe.analyte[0].name
    everything = load_samples(recipe) if samples is None else samples
    separate = load_validation_samples(recipe) if samples is None and validation is None else validation
    split = split_samples(recipe, everything, separate, name)
    problem = Problem(split.calibration, recipe, name)
    check_calibration_values(name, problem.values)
    spectra, compared_on = _compared_on(recipe, split, new)
    with workers(n_workers, cluster) as hands:
        found = search(problem, hands)
        if found is None:
            raise NotEnoughDataError(
                "Interrupted before a candidate was scored; there is nothing to keep. Start again."
            )
        stopped, outer, chance = found.interrupted, None, None
        if table.nested.repeats and not stopped:
            outer, stopped = nested(problem, hands)
        if table.chance.permutations and not stopped:
            chance, stopped = chance_level(problem, found.winner.candidate, found.candidates, hands)
    rows = _rows(problem, found)
    substance = problem.samples.analyte(name)[0]
    return ScreenResult(
        title=recipe.title,
        analyte=name,
        unit=substance.printed_unit,
        axis_unit=problem.samples.spectra.axis.unit,
        scheme=problem.folds.scheme,
        rule=str(recipe.regression.factors).replace("_", " "),
        prefer="the simplest within one standard error" if table.prefer == "simpler" else "the lowest RMSECV",
        n_samples=len(problem.samples),
        n_candidates=len(found.candidates),
        n_possible=found.possible,
        rows=rows,
        leaders=rows[: len(found.leaders)],
        winner=next(row for row in rows if row.winner),
        naive_q2=1 - float(found.winner.squared.mean() / np.mean((problem.values - problem.values.mean()) ** 2)),
        nested=outer,
        chance=chance,
        near_ties=near_ties(problem, found.leaders, found.winner, spectra),
        compared_on=compared_on,
        windows=_windows(problem, found),
        interrupted=stopped,
        winner_recipe=problem.candidate_recipe(found.winner.candidate),
    )


def _compared_on(recipe: Recipe, split: Split, new: SpectraSet | None) -> tuple[SpectraSet | None, str]:
    """Spectra for near-ties, on the calibration's axis, and what they are called."""
    axis, table = split.calibration.spectra.axis, screen_table(recipe)
    if new is None and table.new:
        files = [str(Path(recipe.folder) / file) for file in table.new]
        new = read_spectra(files, recipe.spectra.options())
    words = "new spectra"
    if new is None and split.validation is not None:
        new, words = split.validation.spectra, "the validation samples' spectra"
    if new is None:
        return None, "left-out samples"
    return new.on_axis(axis, resample=recipe.spectra.resample), f"{len(set(new.sample_ids))} samples: {words},"


def _rows(problem: Problem, found: Search) -> tuple[ScreenRow, ...]:
    leading = {_key(leader.candidate) for leader in found.leaders}
    refitted = [leader.candidate for leader in found.leaders]
    others = [one for one in found.candidates if _key(one) not in leading]
    return tuple(
        _row(problem, one, rank, refitted=rank <= len(refitted), winner=one is found.winner.candidate)
        for rank, one in enumerate([*refitted, *others], 1)
    )


def _key(one: Candidate) -> tuple[int, tuple[int, ...]]:
    return one.chain, tuple(one.kept)


def _row(problem: Problem, one: Candidate, rank: int, *, refitted: bool, winner: bool) -> ScreenRow:
    return ScreenRow(
        rank=rank,
        preprocessing=str(problem.chains[one.chain]),
        ranges=problem.ranges(one),
        n_points=one.n_points,
        factors=one.factors,
        rmsecv=one.rmsecv,
        rmsecv_se=one.rmsecv_se,
        refitted=refitted,
        winner=winner,
    )


def _windows(problem: Problem, found: Search) -> WindowMap | None:
    """Gram scores of the windows behind the winner's preprocessing."""
    ranges, chain = problem.table.ranges, found.winner.candidate.chain
    if ranges is None or ranges.block is None:
        return None
    edges = window_edges(problem.layout(chain).axis, ranges.block)
    own = [one for one in found.candidates if one.chain == chain]
    ends = [(one.kept[0], one.kept[-1] + 1) if one.kept else (0, edges.size - 1) for one in own]
    return WindowMap(
        edges=edges,
        start=tuple(start for start, _ in ends),
        stop=tuple(stop for _, stop in ends),
        rmsecv=np.array([one.rmsecv for one in own]),
    )
