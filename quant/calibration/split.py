"""Which samples calibrate, and which take no part in it."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray
from quant.calibration.folds import groups_together
from quant.checks import name_some
from quant.errors import ParameterError, SampleMismatchError
from quant.preprocessing.chain import fit_chain
from quant.recipe.pipeline import build_steps
from quant.recipe.schema import Recipe
from quant.spectra.concentration import refuse_other_scale
from quant.spectra.sample_ids import expand_ids, range_hint
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
    below_limit: tuple[SampleSet, ...] = ()  # those of them that only have an upper limit, from either set

    def remarks(self) -> tuple[str, ...]:
        """Name validation samples whose spectrum is also among the calibration's: their errors come out too small."""
        if self.validation is None:
            return ()
        known = {spectrum.tobytes() for spectrum in self.calibration.spectra.values}
        spectra = self.validation.spectra
        pairs = zip(spectra.sample_ids, spectra.values, strict=True)
        twins = list(dict.fromkeys(sample for sample, spectrum in pairs if spectrum.tobytes() in known))
        if not twins:
            return ()
        return (
            f"{len(twins)} of {len(self.validation)} validation samples have a spectrum that is also among the "
            f"calibration's, equal to the last bit ({name_some(twins)}): RMSEP is a little too good",
        )


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
        A sample named in the recipe does not exist, nothing is left, a separate validation sample is also among the
        calibration's, or the two tables differ in unit or basis.
    """
    _check_ways(recipe, separate)
    kept, left_out = _excluded(recipe, samples, separate)
    kept, without, below = _with_values(kept, analyte)
    if separate is not None:
        refuse_other_scale(samples.analyte(analyte)[0], separate.analyte(analyte)[0])
        named = {item.sample for item in left_out}
        separate = separate.subset(np.array([sample not in named for sample in separate.sample_ids], dtype=bool))
        separate, more, further = _with_values(separate, analyte)
        both = [sample for sample in separate.sample_ids if sample in set(kept.sample_ids)]
        if both:
            raise SampleMismatchError(
                f"Both among the calibration samples and the validation samples: {name_some(both)}; expected different "
                "ones. Give separately prepared material its own sample IDs."
            )
        how = f"{len(separate)} samples from separate files"
        return Split(kept, separate, INDEPENDENT, how, (*left_out, *without, *more), _filled(below, further))
    mask, kind, how = _validation_mask(recipe, samples, kept)
    validation = kept.subset(mask) if mask.any() else None
    return Split(kept.subset(~mask), validation, kind, how, (*left_out, *without), _filled(below))


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
            f"Expected some of {name_some(known)}. Check the spelling.{range_hint(missing)}"
        )
    named = {item.sample for item in items}
    return samples.subset(np.array([sample not in named for sample in samples.sample_ids], dtype=bool)), items


def _with_values(samples: SampleSet, name: str) -> tuple[SampleSet, list[LeftOut], SampleSet]:
    """Return the samples with a value, why the others are left out, and those of them that have an upper limit."""
    analyte, values = samples.analyte(name)
    limits, absent = samples.upper_limits(name), np.isnan(values)
    reasons = [
        f"no reference value of {name}"
        if np.isnan(limit)
        else f"{name} below the detection limit of {limit:.4g} {analyte.printed_unit}".rstrip()
        for limit in limits
    ]
    left_out = [LeftOut(samples.sample_ids[i], reasons[i]) for i in np.flatnonzero(absent)]
    return samples.subset(~absent), left_out, samples.subset(absent & np.isfinite(limits))


def _filled(*sets: SampleSet) -> tuple[SampleSet, ...]:
    return tuple(each for each in sets if len(each))


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
        ties = recipe.cross_validation
        groups = groups_together(samples, ties.group, duplicates=ties.duplicates_together)
        if table.split == "kennard_stone":
            _, processed = fit_chain(
                build_steps(recipe, samples.spectra.axis, samples.spectra.quantity), samples.spectra.values
            )
            _, out = splits.kennard_stone_split(samples.mean_by_sample(processed), table.fraction, groups)
            how = "Kennard-Stone on the processed spectra keeps the others for calibration"
        else:
            _, out = splits.random_split(n, table.fraction, ties.seed, groups)
            how = f"drawn at random, seed {ties.seed}"
        mask[out] = True
        kind, how = INTERNAL, f"{int(mask.sum())} samples of one set: {how}"
    if not mask.any() or mask.all():
        raise SampleMismatchError(f"[validation] picks {int(mask.sum())} of {n} samples; expected some, but not all.")
    return mask, kind, how
