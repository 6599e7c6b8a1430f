"""Which samples calibrate, and which take no part in it."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray
from quant.checks import name_some
from quant.errors import ParameterError, SampleMismatchError
from quant.preprocessing.chain import fit_chain
from quant.recipe.pipeline import build_steps
from quant.recipe.schema import Recipe
from quant.spectra.sample_ids import expand_ids
from quant.spectra.sample_set import SampleSet
from quant.statistics import splits

INDEPENDENT = "independent validation"
INTERNAL = "internal test"


@dataclass(frozen=True)
class LeftOut:
    """A sample that the recipe leaves out, and why."""

    sample: str
    reason: str


@dataclass(frozen=True)
class Split:
    """Calibration samples, validation samples (or None) and how they were told apart, and what was left out."""

    calibration: SampleSet
    validation: SampleSet | None
    kind: str  # INDEPENDENT, INTERNAL, or "" without validation
    how: str
    left_out: tuple[LeftOut, ...]


def split_samples(recipe: Recipe, samples: SampleSet, separate: SampleSet | None, analyte: str) -> Split:
    """Leave out what the recipe excludes or what has no value, and set the validation samples apart.

    Parameters
    ----------
    recipe : Recipe
    samples : SampleSet
        All samples of the recipe's spectra.
    separate : SampleSet or None
        Samples of the separate validation files.
    analyte : str
        The analyte to calibrate.

    Raises
    ------
    SampleMismatchError
        A sample named in the recipe does not exist, nothing is left, or a separate validation sample is also among the
        calibration's.
    """
    _check_ways(recipe, separate)
    kept, left_out = _excluded(recipe, samples, separate)
    kept, without = _with_values(kept, analyte)
    if separate is not None:
        named = {item.sample for item in left_out}
        separate = separate.subset(np.array([sample not in named for sample in separate.sample_ids], dtype=bool))
        separate, more = _with_values(separate, analyte)
        both = [sample for sample in separate.sample_ids if sample in set(kept.sample_ids)]
        if both:
            raise SampleMismatchError(
                f"Both among the calibration samples and the validation samples: {name_some(both)}; expected different "
                "ones. Give separately prepared material its own sample IDs."
            )
        how = f"{len(separate)} samples from separate files"
        return Split(kept, separate, INDEPENDENT, how, (*left_out, *without, *more))
    mask, kind, how = _validation_mask(recipe, samples, kept)
    return Split(kept.subset(~mask), kept.subset(mask) if mask.any() else None, kind, how, (*left_out, *without))


def _check_ways(recipe: Recipe, separate: SampleSet | None) -> None:
    """Refuse samples at hand that say one thing where the recipe says another."""
    table = recipe.validation
    if separate is None and table is not None and table.files is not None:
        raise ParameterError(
            "The recipe names separate validation files, but only calibration samples were given; expected "
            "both. Give validation=..., too, or let the recipe read all its files."
        )
    if separate is not None and table is not None and table.files is None:
        raise ParameterError(
            "Separate validation samples were given, but [validation] of the recipe picks others; expected one of "
            "the two. Remove [validation] from the recipe, or do not give them."
        )


def _excluded(recipe: Recipe, samples: SampleSet, separate: SampleSet | None) -> tuple[SampleSet, list[LeftOut]]:
    known = dict.fromkeys([*samples.sample_ids, *(separate.sample_ids if separate else ())])
    items = [LeftOut(sample, table.reason) for table in recipe.exclude for sample in expand_ids(table.samples)]
    missing = [item.sample for item in items if item.sample not in known]
    if missing:
        raise SampleMismatchError(
            f"[[exclude]] names what is not among the {len(known)} paired samples: {name_some(missing)}. "
            f"Expected some of {name_some(known)}. Check the spelling."
        )
    named = {item.sample for item in items}
    return samples.subset(np.array([sample not in named for sample in samples.sample_ids], dtype=bool)), items


def _with_values(samples: SampleSet, analyte: str) -> tuple[SampleSet, list[LeftOut]]:
    _, values = samples.analyte(analyte)
    absent = np.isnan(values)
    reason = f"no reference value of {analyte}"
    return samples.subset(~absent), [LeftOut(samples.sample_ids[i], reason) for i in np.flatnonzero(absent)]


def _validation_mask(recipe: Recipe, everything: SampleSet, samples: SampleSet) -> tuple[BoolArray, str, str]:
    """Mark the validation samples among those that were kept; say of what kind they are and how they were found."""
    table, n = recipe.validation, len(samples)
    mask = np.zeros(n, dtype=bool)
    if table is None:
        return mask, "", ""
    if table.samples is not None:
        named = expand_ids(table.samples)
        everything.positions(named)  # refuses a name that does not exist; one that was left out may be named
        mask = np.isin(samples.sample_ids, named)
        kind, how = INDEPENDENT, f"{int(mask.sum())} samples named in the recipe"
    elif table.note is not None:
        wanted = set(table.values or ())
        mask = np.array([value in wanted for value in samples.groups(table.note)], dtype=bool)
        kind, how = INDEPENDENT, f"{int(mask.sum())} samples whose {table.note} is {', '.join(sorted(wanted))}"
    else:
        group = recipe.cross_validation.group
        groups = samples.groups(group) if group else None
        if table.split == "kennard_stone":
            _, processed = fit_chain(
                build_steps(recipe, samples.spectra.axis, samples.spectra.quantity), samples.spectra.values
            )
            _, out = splits.kennard_stone_split(samples.mean_by_sample(processed), table.fraction, groups)
            how = "Kennard-Stone on the processed spectra keeps the others for calibration"
        else:
            _, out = splits.random_split(n, table.fraction, recipe.cross_validation.seed, groups)
            how = f"drawn at random, seed {recipe.cross_validation.seed}"
        mask[out] = True
        kind, how = INTERNAL, f"{int(mask.sum())} samples of one set: {how}"
    if not mask.any() or mask.all():
        raise SampleMismatchError(f"[validation] picks {int(mask.sum())} of {n} samples; expected some, but not all.")
    return mask, kind, how
