"""What the checks look at: everything that was read, once, in the forms that they need."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.recipe.schema import Recipe
from quant.spectra.sample_set import SampleSet, mean_by_sample
from quant.spectra.spectra_set import SpectraSet


@dataclass(frozen=True, eq=False)
class Reading:
    """The files of one set of spectra.

    Attributes
    ----------
    name : str
        "calibration" or "validation".
    parts : tuple of (str, SpectraSet)
        Every file that could be read, by its name, as it is.
    unread : tuple of (str, str)
        Files that could not be read, and why.
    spectra : SpectraSet
        What can be put on one axis: the files that agree with most spectra.
    other : tuple of (str, SpectraSet, str)
        Files that cannot, and in what they differ ("axis", "quantity").
    samples : SampleSet
        `spectra` paired with reference values.
    """

    name: str
    parts: tuple[tuple[str, SpectraSet], ...]
    unread: tuple[tuple[str, str], ...]
    spectra: SpectraSet
    other: tuple[tuple[str, SpectraSet, str], ...]
    samples: SampleSet


@dataclass(frozen=True, eq=False)
class Material:
    """Spectra and values of one recipe.

    Attributes
    ----------
    recipe : Recipe
    readings : tuple of Reading
        The calibration's files, then those of separate validation samples.
    calibration, validation : SampleSet
        Samples that calibrate and samples that are set apart (or None), excluded ones left out of both. A sample may
        lack a value (NaN).
    in_both : tuple of str
        Samples named in both sets; they stay in the calibration set here.
    spectra : SpectraSet
        All their spectra, the calibration's first.
    sample_ids : tuple of str
        All samples, the calibration's first.
    sample_index : array of int, shape (n_spectra,)
        The sample of each spectrum.
    absorbance : array of shape (n_spectra, n_points)
        Transmittance turned into absorbance, any other quantity as it is; gaps (missing, or T ≤ 0) bridged by straight
        lines along the axis.
    missing : array of bool, shape (n_spectra, n_points)
        Points that the files leave out.
    used : array of bool, shape (n_points,)
        Points that reach the regression.
    processed : array of shape (n_spectra, n_points_after) or None
        Behind the recipe's preprocessing, which learnt from the calibration's spectra; None where it cannot be applied.
    trouble : str
        Why it cannot.
    """

    recipe: Recipe
    readings: tuple[Reading, ...]
    calibration: SampleSet
    validation: SampleSet | None
    in_both: tuple[str, ...]
    spectra: SpectraSet
    sample_ids: tuple[str, ...]
    sample_index: IntArray
    absorbance: FloatArray
    missing: BoolArray
    used: BoolArray
    processed: FloatArray | None
    trouble: str

    @property
    def is_absorbance(self) -> bool:
        """Whether `absorbance` is absorbance, and not log 1/R or anything else."""
        return self.spectra.quantity in ("absorbance", "transmittance")

    @property
    def n_calibration(self) -> int:
        """Number of calibration spectra; they come first."""
        return len(self.calibration.spectra)

    def mean_by_sample(self, rows: FloatArray) -> FloatArray:
        """Average rows that belong to spectra over all samples, shape (n_samples, ...)."""
        return mean_by_sample(rows, self.sample_index, len(self.sample_ids))

    def named(self, spectra: Sequence[int] | IntArray | BoolArray) -> tuple[str, ...]:
        """Return the samples of spectra at positions (or where true), each once; one of several replicates by number.

        A sample all of whose spectra are meant is named alone; "K7 (spectrum 2)" is its second spectrum.
        """
        rows = np.arange(len(self.sample_index))[np.asarray(spectra)]
        count = np.bincount(self.sample_index, minlength=len(self.sample_ids))
        names: dict[str, None] = {}
        for row in rows.tolist():
            sample = int(self.sample_index[row])
            mates = np.flatnonzero(self.sample_index == sample)
            whole = count[sample] == 1 or np.isin(mates, rows).all()
            number = int(np.searchsorted(mates, row)) + 1
            names[self.sample_ids[sample] if whole else f"{self.sample_ids[sample]} (spectrum {number})"] = None
        return tuple(names)
