"""Samples: spectra and reference values joined by sample ID."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.checks import name_some, one_of
from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.frozen import FrozenMapping
from quant.spectra.provenance import Source
from quant.spectra.reference_table import NO_LIMIT, Analyte, ReferenceTable, Repeatability
from quant.spectra.sample_ids import range_hint
from quant.spectra.spectra_set import SpectraSet

ORIGINS = ("process", "spiked", "blended")
"""Where a standard came from: drawn from the process, spiked with the analyte, or blended from pure components."""

NOT_STATED = "not stated"


@dataclass(frozen=True, eq=False)
class SampleSet:
    """Samples with their spectra and reference values; replicate spectra of one sample are grouped.

    Made by `pair_samples`; selecting samples keeps everything together.

    Attributes
    ----------
    spectra : SpectraSet
        The paired spectra, in the order they were read.
    sample_ids : tuple of str
        One a sample, in order of first appearance among the spectra.
    sample_index : array of int, shape (n_spectra,)
        The sample (position in `sample_ids`) that each spectrum belongs to.
    analytes : tuple of Analyte
    values : array of shape (n_samples, n_analytes)
        Reference values, NaN where there is none. [unit of each analyte]
    notes : tuple of mappings
        One row a sample: what the reference table says, and what all its spectra agree in.
    spectra_without_values, values_without_spectra : tuple of str
        Sample IDs that found no partner.
    censored : array of shape (n_samples, n_analytes)
        Upper limits of values that are only known to lie below one, NaN for all others. [unit of each analyte]
    determinations : array of int, shape (n_samples, n_analytes)
        How many laboratory determinations each value is the mean of.
    reference_sources : tuple of Source
        The files of the reference values.
    repeatability : mapping of str to Repeatability
        By the analyte's name, where the reference table holds repeated determinations.
    """

    spectra: SpectraSet
    sample_ids: tuple[str, ...]
    sample_index: IntArray
    analytes: tuple[Analyte, ...]
    values: FloatArray
    notes: tuple[Mapping[str, str], ...]
    spectra_without_values: tuple[str, ...] = ()
    values_without_spectra: tuple[str, ...] = ()
    censored: FloatArray = field(default_factory=lambda: np.array(NO_LIMIT))
    determinations: IntArray = field(default_factory=lambda: np.array(1))
    repeatability: Mapping[str, Repeatability] = field(default_factory=dict)
    reference_sources: tuple[Source, ...] = ()

    def __post_init__(self) -> None:
        for name in ("censored", "determinations"):  # one number stands for all
            object.__setattr__(self, name, np.broadcast_to(getattr(self, name), self.values.shape))

    def __len__(self) -> int:
        return len(self.sample_ids)

    def __str__(self) -> str:
        """How many samples and spectra, which analytes."""
        names = ", ".join(analyte.name for analyte in self.analytes)
        return f"{len(self)} samples ({len(self.spectra)} spectra) with {names}"

    @property
    def origins(self) -> tuple[str, ...]:
        """Origin of each sample: "process", "spiked", "blended", or "not stated"."""
        return tuple(row.get("origin", NOT_STATED) for row in self.notes)

    @property
    def replicates(self) -> IntArray:
        """Number of spectra of each sample, shape (n_samples,)."""
        return np.bincount(self.sample_index, minlength=len(self))

    @property
    def weights(self) -> FloatArray:
        """Training weight of each spectrum, 1/m for m replicates, shape (n_spectra,)."""
        return np.asarray(1.0 / self.replicates[self.sample_index])

    def analyte(self, name: str) -> tuple[Analyte, FloatArray]:
        """Return an analyte and its values, shape (n_samples,).

        Raises
        ------
        ParameterError
            No analyte of that name.
        """
        column = self._column(name)
        return self.analytes[column], self.values[:, column]

    def upper_limits(self, name: str) -> FloatArray:
        """Return the limits of an analyte's values below a detection limit, NaN for all others, shape (n_samples,)."""
        return self.censored[:, self._column(name)]

    def determinations_of(self, name: str) -> IntArray:
        """Return how many determinations each value of an analyte is the mean of, shape (n_samples,)."""
        return self.determinations[:, self._column(name)]

    def _column(self, name: str) -> int:
        for position, analyte in enumerate(self.analytes):
            if analyte.name == name:
                return position
        raise ParameterError(f"No analyte {name!r}; expected one of {name_some(a.name for a in self.analytes)}.")

    def mean_by_sample(self, rows: ArrayLike) -> FloatArray:
        """Average rows that belong to spectra, shape (n_spectra, ...), over each sample, shape (n_samples, ...)."""
        return mean_by_sample(np.asarray(rows, dtype=np.float64), self.sample_index, len(self))

    def subset(self, samples: IntArray | BoolArray) -> "SampleSet":
        """Return the samples at the positions given (or where true), in the set's own order."""
        chosen = np.unique(np.arange(len(self))[samples])
        place = np.full(len(self), -1)
        place[chosen] = np.arange(chosen.size)
        rows = np.flatnonzero(place[self.sample_index] >= 0)
        return SampleSet(
            self.spectra[rows],
            tuple(self.sample_ids[i] for i in chosen),
            place[self.sample_index[rows]],
            self.analytes,
            self.values[chosen],
            tuple(self.notes[i] for i in chosen),
            censored=self.censored[chosen],
            determinations=self.determinations[chosen],
            repeatability=self.repeatability,
            reference_sources=self.reference_sources,
        )

    def positions(self, sample_ids: Sequence[str]) -> IntArray:
        """Return the positions of samples named.

        Raises
        ------
        SampleMismatchError
            A sample that is not in the set.
        """
        place = {sample: i for i, sample in enumerate(self.sample_ids)}
        missing = [sample for sample in sample_ids if sample not in place]
        if missing:
            raise SampleMismatchError(
                f"No sample {name_some(missing)} among the {len(self)} paired samples ({name_some(self.sample_ids)}). "
                f"Check the spelling of the sample IDs.{range_hint(missing)}"
            )
        return np.array([place[sample] for sample in sample_ids], dtype=np.intp)

    def groups(self, note: str) -> tuple[str, ...]:
        """Return the value of a note for every sample.

        Raises
        ------
        SampleMismatchError
            A sample does not have that note (or its replicates disagree in it).
        """
        missing = [sample for sample, row in zip(self.sample_ids, self.notes, strict=True) if note not in row]
        if missing:
            known = dict.fromkeys(key for row in self.notes for key in row)
            raise SampleMismatchError(
                f"No note {note!r} for {len(missing)} of {len(self)} samples: {name_some(missing)}. "
                f"Notes there are: {name_some(known, 12) or 'none'}. Supply it as a column, or choose another."
            )
        return tuple(row[note] for row in self.notes)


def mean_by_sample(rows: FloatArray, sample_index: IntArray, n_samples: int) -> FloatArray:
    """Average rows of shape (n_spectra, ...) over the spectra of each sample, shape (n_samples, ...)."""
    sums = np.zeros((n_samples, *rows.shape[1:]))
    np.add.at(sums, sample_index, rows)
    count = np.bincount(sample_index, minlength=n_samples)
    return sums / count.reshape(-1, *[1] * (rows.ndim - 1))


def pair_samples(
    spectra: SpectraSet, reference: ReferenceTable, *, unmatched: str = "refuse", missing: str = "refuse"
) -> SampleSet:
    """Join spectra and reference values by sample ID.

    Parameters
    ----------
    spectra, reference
        What was read. Values without a spectrum are only named in the result.
    unmatched : {"refuse", "drop"}
        What to do with spectra that have no row in the reference table.
    missing : {"refuse", "drop"}
        What to do with samples whose row lacks a value. "drop" keeps NaN: the sample is left out for that analyte only.

    Raises
    ------
    SampleMismatchError
        Spectra without a row, or with neither value nor upper limit (unless "drop"), or no pair at all.
    ParameterError
        A word that is not among those listed, or an origin that is not one of `ORIGINS`.
    """
    one_of("unmatched", unmatched, ("refuse", "drop"))
    one_of("missing", missing, ("refuse", "drop"))
    place = {sample: i for i, sample in enumerate(reference.sample_ids)}
    ids = list(dict.fromkeys(spectra.sample_ids))
    alone = [sample for sample in ids if sample not in place]
    paired = [sample for sample in ids if sample in place]
    if not paired:
        raise SampleMismatchError(
            f"Not one of {len(ids)} samples with spectra ({name_some(ids, 3)}) is in the reference table "
            f"({name_some(reference.sample_ids, 3)}). Check how the sample ID is found: sample_column, sample_label or "
            "sample_pattern under [spectra], sample_column under [reference]."
        )
    if alone and unmatched == "refuse":
        raise SampleMismatchError(
            f"{len(alone)} of {len(ids)} samples with spectra have no row in the reference table: {name_some(alone)}. "
            'Add the rows, or set unmatched = "drop" under [reference].'
        )
    chosen = [place[sample] for sample in paired]
    values, limits = reference.values[chosen], reference.censored[chosen]
    if missing == "refuse":
        _refuse_missing(reference, chosen)
    with_spectra = set(ids)
    keep = np.array([sample in place for sample in spectra.sample_ids])
    kept = spectra[keep]
    number = {sample: i for i, sample in enumerate(paired)}
    index = np.array([number[sample] for sample in kept.sample_ids], dtype=np.intp)
    notes = [_common_notes(kept, np.flatnonzero(index == i)) for i in range(len(paired))]
    rows = [{**shared, **reference.notes[place[sample]]} for shared, sample in zip(notes, paired, strict=True)]
    for sample, row in zip(paired, rows, strict=True):
        if row.get("origin", "process") not in (*ORIGINS, NOT_STATED):
            raise ParameterError(f"Sample {sample} has origin {row['origin']!r}; expected one of {', '.join(ORIGINS)}.")
    return SampleSet(
        kept,
        tuple(paired),
        index,
        reference.analytes,
        values,
        tuple(FrozenMapping(row) for row in rows),
        tuple(alone),
        tuple(sample for sample in reference.sample_ids if sample not in with_spectra),
        limits,
        reference.determinations[chosen],
        reference.repeatability,
        reference.sources,
    )


def _refuse_missing(reference: ReferenceTable, rows: Sequence[int]) -> None:
    known = ~(np.isnan(reference.values) & np.isnan(reference.censored))
    for column, analyte in enumerate(reference.analytes):
        without = [row for row in rows if not known[row, column]]
        if without:
            raise SampleMismatchError(
                f"{reference.where(without[0])}{len(without)} of {len(rows)} samples have no reference value of "
                f"{analyte.name}: {name_some(reference.sample_ids[row] for row in without)}. Supply the values, or set "
                'missing = "drop" under [reference].'
            )


def _common_notes(spectra: SpectraSet, rows: IntArray) -> dict[str, str]:
    """Notes in which all spectra of one sample agree."""
    first = dict(spectra.notes[rows[0]])
    return {key: value for key, value in first.items() if all(spectra.notes[i].get(key) == value for i in rows[1:])}
