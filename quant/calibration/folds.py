"""Which samples are left out together."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import IntArray
from quant.errors import RecipeError
from quant.recipe.schema import CrossValidationTable
from quant.spectra.sample_set import SampleSet
from quant.statistics import splits

BATCH = "batch"
FEWEST_BATCHES = 4  # fewer leave too little to learn from when one is left out
SMALL_SET = 30  # below this, every sample is left out alone


@dataclass(frozen=True)
class Folds:
    """Fold numbers of the samples, one array of shape (n_samples,) a repeat, and the scheme in words."""

    scheme: str
    repeats: tuple[IntArray, ...]


def make_folds(samples: SampleSet, table: CrossValidationTable) -> Folds:
    """Divide samples as a recipe says. Replicates follow their sample; samples of one group stay together.

    Raises
    ------
    RecipeError
        leave_one_group_out without a group.
    SampleMismatchError
        A sample lacks the note named by `group`.
    ParameterError, NotEnoughDataError
        More folds than samples or groups, or a single group.
    """
    n = len(samples)
    groups = samples.groups(table.group) if table.group else None
    together = f", equal {table.group!r} together" if table.group else ""
    match _resolve(samples, table):
        case "leave_one_group_out":
            note = table.group or BATCH
            if table.group is None and table.scheme == "leave_one_group_out":
                raise RecipeError(
                    'scheme = "leave_one_group_out" under [cross_validation] needs group = "<note>", such as group = "batch".'
                )
            return Folds(f"leave one {note} out", (splits.leave_one_group_out(samples.groups(note)),))
        case "leave_one_out":
            return Folds(f"leave one sample out{together}", (splits.leave_one_out(n, groups),))
        case "contiguous_blocks":
            return Folds(f"{table.folds} contiguous blocks{together}", (splits.contiguous_blocks(n, table.folds, groups),))
        case "interleaved":
            return Folds(f"{table.folds} interleaved folds{together}", (splits.interleaved(n, table.folds, groups),))
        case _:
            # A generator a repeat, all grown from the one seed of the recipe.
            seeds = np.random.SeedSequence(table.seed).spawn(table.repeats)
            repeats = tuple(splits.random_folds(n, table.folds, np.random.default_rng(seed), groups) for seed in seeds)
            return Folds(f"{table.folds} random folds, {table.repeats} repeats{together}", repeats)


def _resolve(samples: SampleSet, table: CrossValidationTable) -> str:
    if table.scheme != "auto":
        return table.scheme
    batches = [row.get(BATCH) for row in samples.notes]
    if table.group is None and all(batches) and len(set(batches)) >= FEWEST_BATCHES:
        return "leave_one_group_out"
    return "leave_one_out" if len(samples) < SMALL_SET else "random_folds"
