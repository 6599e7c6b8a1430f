"""A set of spectra on one axis: numbers, axis, notes, never apart."""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import BoolArray, FloatArray, IntArray
from quant.checks import name_some, one_of
from quant.errors import AxisMismatchError, ParameterError, QuantityError, SampleMismatchError
from quant.spectra.axis import SpectralAxis
from quant.spectra.frozen import FrozenMapping, is_frozen, restore
from quant.spectra.provenance import Source
from quant.spectra.resampling import interpolate
from quant.spectra.sample_ids import range_hint
from quant.units import QUANTITIES

if TYPE_CHECKING:
    import pandas as pd

LARGEST_ORDINATE = 1e100  # beyond, sums of squares run over

Notes = Mapping[str, str]


@dataclass(frozen=True, eq=False)
class SpectraSet:
    """Spectra that share an axis. Nothing in it can be changed; slicing keeps everything together.

    Parameters
    ----------
    values : array of shape (n_spectra, n_points)
        Ordinates, kept read-only as float64. A missing point is NaN. [quantity]
    axis : SpectralAxis
        Positions of the points.
    sample_ids : sequence of str
        One a spectrum. Spectra that share an ID are replicates of one sample.
    quantity : {"absorbance", "transmittance", "reflectance", "log_reflectance", "arbitrary"}
        What the ordinate is. Transmittance and reflectance are fractions, not percent.
    notes : sequence of mappings, optional
        One row of notes a spectrum: batch, instrument, technique, resolution, accessory, file ...
    sources : sequence of Source, optional
        The files the spectra came from.

    Raises
    ------
    ParameterError
        The parts do not fit each other.
    QuantityError
        An ordinate is infinite, or so large that its square would be.
    """

    values: FloatArray
    axis: SpectralAxis
    sample_ids: tuple[str, ...]
    quantity: str
    notes: tuple[Notes, ...]
    sources: tuple[Source, ...]

    def __init__(
        self,
        values: ArrayLike,
        axis: SpectralAxis,
        sample_ids: Sequence[str],
        quantity: str = "absorbance",
        notes: Sequence[Notes] | None = None,
        sources: Sequence[Source] = (),
    ) -> None:
        matrix = values if is_frozen(values) else np.array(values, dtype=np.float64)
        rows = [{}] * len(sample_ids) if notes is None else notes
        if matrix.ndim != 2 or matrix.shape != (len(sample_ids), len(axis)) or len(rows) != len(sample_ids):
            raise ParameterError(
                f"Spectra of shape {matrix.shape} with {len(sample_ids)} sample IDs, {len(rows)} rows of notes and an "
                f"axis of {len(axis)} points; expected one ID and one row of notes a spectrum, one column a point."
            )
        beyond = np.flatnonzero((np.abs(matrix) > LARGEST_ORDINATE).any(axis=1))
        if beyond.size:
            raise QuantityError(
                f"Ordinates beyond {LARGEST_ORDINATE:g} in {name_some(sample_ids[i] for i in beyond.tolist())}; "
                "expected numbers that a spectrometer gives. Export them again."
            )
        matrix.flags.writeable = False
        object.__setattr__(self, "values", matrix)
        object.__setattr__(self, "axis", axis)
        object.__setattr__(self, "sample_ids", tuple(str(sample) for sample in sample_ids))
        object.__setattr__(self, "quantity", one_of("quantity", quantity, tuple(QUANTITIES)))
        object.__setattr__(self, "notes", tuple(FrozenMapping(row) for row in rows))
        object.__setattr__(self, "sources", tuple(sources))

    def __setstate__(self, state: dict[str, Any]) -> None:
        restore(self, state)

    def __len__(self) -> int:
        return len(self.sample_ids)

    def __getitem__(self, rows: slice | IntArray | BoolArray) -> "SpectraSet":
        """Select spectra by a slice, an array of positions, or an array of truth values."""
        chosen = np.atleast_1d(np.arange(len(self))[rows])
        return SpectraSet(
            self.values[chosen],
            self.axis,
            [self.sample_ids[i] for i in chosen],
            self.quantity,
            [self.notes[i] for i in chosen],
            self.sources,
        )

    def __repr__(self) -> str:
        return f"<SpectraSet: {self}>"

    def __str__(self) -> str:
        """How many spectra of how many samples, the quantity, the axis."""
        samples = len(dict.fromkeys(self.sample_ids))
        return f"{len(self)} spectra of {samples} samples, {QUANTITIES[self.quantity]}, {self.axis}"

    def select(self, sample_ids: Iterable[str]) -> "SpectraSet":
        """Return all spectra of the samples named, in the set's own order.

        Raises
        ------
        SampleMismatchError
            A sample that is not in the set.
        """
        wanted = set(sample_ids)
        missing = sorted(wanted - set(self.sample_ids))
        if missing:
            raise SampleMismatchError(
                f"No spectrum of {name_some(missing)}; the set holds {name_some(dict.fromkeys(self.sample_ids))}. "
                f"Check the spelling of the sample IDs.{range_hint(missing)}"
            )
        return self[np.array([sample in wanted for sample in self.sample_ids], dtype=bool)]

    def on_axis(self, axis: SpectralAxis, *, resample: bool = False) -> "SpectraSet":
        """Return the spectra on another axis: unchanged, reversed, or (only if asked) interpolated.

        Parameters
        ----------
        axis : SpectralAxis
            The axis wanted.
        resample : bool
            Interpolate when the positions differ (local cubic, never beyond the ends of the measured axis).

        Raises
        ------
        AxisMismatchError
            Units differ, positions differ and `resample` is false, or the measured axis does not cover the one wanted.
        """
        if axis is self.axis:
            return self
        if self.axis.same_positions(axis):
            return replace(self, axis=axis)
        if self.axis.reversed().same_positions(axis):
            return replace(self, values=self.values[:, ::-1], axis=axis)
        problem = f"The spectra of {name_some(dict.fromkeys(self.sample_ids))} lie on {self.axis}; expected {axis}."
        if self.axis.unit != axis.unit:
            raise AxisMismatchError(f"{problem} The units differ: export them in one unit, or state axis_unit.")
        if not resample:
            raise AxisMismatchError(f"{problem} Measure on the same axis, or set resample = true under [spectra].")
        try:
            values = interpolate(self.values, self.axis.values, axis.values)
        except ParameterError as reason:
            raise AxisMismatchError(f"{problem} They cannot be resampled: {reason}") from reason
        notes = tuple({**row, "resampled": f"from {self.axis}"} for row in self.notes)
        return replace(self, values=values, axis=axis, notes=notes)

    def with_notes(self, notes: Notes) -> "SpectraSet":
        """Return the set with notes added to every spectrum where the spectrum does not state them itself."""
        return replace(self, notes=tuple({**notes, **row} for row in self.notes))

    def to_frame(self) -> "pd.DataFrame":
        """Return a pandas table: one row a spectrum, first the sample ID and the notes, then one column a point."""
        import pandas as pd  # deferred: start-up

        left = pd.DataFrame(
            [{"sample": sample, **row} for sample, row in zip(self.sample_ids, self.notes, strict=True)]
        )
        right = pd.DataFrame(self.values, columns=pd.Index(self.axis.values))
        return pd.concat([left, right], axis=1)


def join_spectra(sets: Sequence[SpectraSet], *, resample: bool = False) -> SpectraSet:
    """Put sets together on the axis of the first.

    Raises
    ------
    AxisMismatchError
        The axes differ (and `resample` is false or cannot help).
    QuantityError
        Absorbance among transmittance, or the like.
    ParameterError
        No set at all.
    """
    if not sets:
        raise ParameterError("No spectra to put together; expected at least one set.")
    first = sets[0]
    if len(sets) == 1:
        return first
    for other in sets[1:]:
        if other.quantity != first.quantity:
            raise QuantityError(
                f"{name_some(dict.fromkeys(other.sample_ids))} is {QUANTITIES[other.quantity]} but "
                f"{name_some(dict.fromkeys(first.sample_ids), 1)} is {QUANTITIES[first.quantity]}; expected one "
                "quantity. Export all spectra alike."
            )
    aligned = [spectra.on_axis(first.axis, resample=resample) for spectra in sets]
    return SpectraSet(
        np.concatenate([spectra.values for spectra in aligned]),
        first.axis,
        [sample for spectra in aligned for sample in spectra.sample_ids],
        first.quantity,
        [row for spectra in aligned for row in spectra.notes],
        list(dict.fromkeys(source for spectra in aligned for source in spectra.sources)),
    )
