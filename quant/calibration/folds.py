"""Which samples are left out together."""

from dataclasses import dataclass

from quant.arrays import IntArray
from quant.errors import RecipeError
from quant.recipe.schema import CrossValidationTable
from quant.spectra.sample_set import SampleSet
from quant.statistics import splits
from quant.statistics.groups import connected_groups

BATCH = "batch"
FEWEST_BATCHES = 4  # fewer leave too little to learn from when one is left out
SMALL_SET = 30  # below this, every sample is left out alone


@dataclass(frozen=True)
class Folds:
    """Fold numbers of the samples, one array of shape (n_samples,) a repeat, and the scheme in words."""

    scheme: str
    repeats: tuple[IntArray, ...]
    n_units: int  # independent units: groups where samples of one group are alike, else samples


def make_folds(samples: SampleSet, table: CrossValidationTable) -> Folds:
    """Divide samples as a recipe says.

    Replicates follow their sample; samples of one group, and duplicates where asked, stay together.

    Raises
    ------
    RecipeError
        leave_one_group_out without a group.
    SampleMismatchError
        A sample lacks the note named by `group`.
    ParameterError, NotEnoughDataError
        More folds than samples or groups, or a single group.
    """
    scheme = _resolve(samples, table)
    note = table.group or (BATCH if scheme == "leave_one_group_out" and table.scheme == "auto" else None)
    groups = groups_together(samples, note, duplicates=table.duplicates_together)
    n, k = len(samples), table.folds
    duplicates = "duplicate spectra" if table.duplicates_together else ""
    together = _together(f"equal {note!r}" if note else "", duplicates)
    match scheme:
        case "leave_one_group_out":
            if note is None or groups is None:
                raise RecipeError(
                    'scheme = "leave_one_group_out" under [cross_validation] needs group = "<note>", '
                    'such as group = "batch".'
                )
            words, repeats = f"leave one {note} out{_together(duplicates)}", [splits.leave_one_group_out(groups)]
        case "leave_one_out":
            words, repeats = f"leave one sample out{together}", [splits.leave_one_out(n, groups)]
        case "contiguous_blocks":
            words, repeats = f"{k} contiguous blocks{together}", [splits.contiguous_blocks(n, k, groups)]
        case "interleaved":
            words, repeats = f"{k} interleaved folds{together}", [splits.interleaved(n, k, groups)]
        case _:
            seeds = [(table.seed, repeat) for repeat in range(table.repeats)]  # all from the one seed of the recipe
            words = f"{k} random folds, {table.repeats} repeats{together}"
            repeats = [splits.random_folds(n, k, seed, groups) for seed in seeds]
    return Folds(words, tuple(repeats), n if groups is None else int(groups.max()) + 1)


def _resolve(samples: SampleSet, table: CrossValidationTable) -> str:
    if table.scheme != "auto":
        return table.scheme
    batches = [row.get(BATCH) for row in samples.notes]
    if table.group is None and all(batches) and len(set(batches)) >= FEWEST_BATCHES:
        return "leave_one_group_out"
    return "leave_one_out" if len(samples) < SMALL_SET else "random_folds"


def groups_together(samples: SampleSet, note: str | None, *, duplicates: bool) -> IntArray | None:
    """Return the group of each sample, numbered in the order of first appearance, or None if each stands alone.

    Parameters
    ----------
    samples : SampleSet
    note : str, optional
        Samples in which this note is equal belong together ...
    duplicates : bool
        ... and so do samples that share a spectrum, equal to the last bit. Both ties hold through others, too.

    Raises
    ------
    SampleMismatchError
        A sample lacks the note.
    """
    if note is None and not duplicates:
        return None
    marks: list[list[str | bytes]] = [[text] for text in samples.groups(note)] if note else [[] for _ in samples.notes]
    if duplicates:
        for sample, spectrum in zip(samples.sample_index.tolist(), samples.spectra.values, strict=True):
            marks[sample].append(spectrum.tobytes())
    return connected_groups(marks)


def _together(*what: str) -> str:
    named = " and ".join(filter(None, what))
    return f", {named} together" if named else ""
