"""Reference values from the laboratory."""

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import AnyArray, FloatArray, IntArray
from quant.checks import name_some, one_of
from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.frozen import FrozenMapping, restore
from quant.spectra.provenance import Source

BASES = ("wet", "dry")
"""What a mass fraction is a fraction of: the sample as it is, or its dry matter."""

NO_LIMIT = float("nan")


@dataclass(frozen=True)
class Analyte:
    """What a column of reference values is.

    Parameters
    ----------
    name : str
        As it is printed.
    unit : str
        As it is printed after every value, such as "% m/m".
    laboratory_error : float, optional
        Standard error of the laboratory method for one reported reference value. [unit]
    basis : {"", "wet", "dry"}
        What a mass fraction is a fraction of: the sample as it is, or its dry matter; empty where not stated.

    Raises
    ------
    ParameterError
        A laboratory error below 0, or another basis.
    """

    name: str
    unit: str = ""
    laboratory_error: float | None = None
    basis: str = ""

    def __post_init__(self) -> None:
        one_of(f"basis of {self.name}", self.basis, ("", *BASES))
        if self.laboratory_error is not None and not (
            np.isfinite(self.laboratory_error) and self.laboratory_error >= 0
        ):
            raise ParameterError(
                f"laboratory_error of {self.name} is {self.laboratory_error}; expected a standard error of 0 or more."
            )

    @property
    def printed_unit(self) -> str:
        """Unit and, where stated, basis: "% m/m dry basis"."""
        return " ".join([*([self.unit] if self.unit else []), *([f"{self.basis} basis"] if self.basis else [])])


@dataclass(frozen=True)
class Repeatability:
    """What repeated determinations of one analyte say of the laboratory.

    Parameters
    ----------
    standard_deviation : float
        Of a single determination, pooled over samples. [unit of the analyte]
    degrees_of_freedom : int
        Determinations beyond the first of each sample.
    n_samples : int
        Samples that were determined more than once.
    """

    standard_deviation: float
    degrees_of_freedom: int
    n_samples: int


@dataclass(frozen=True, eq=False)
class ReferenceTable:
    """Reference values, one row a sample, one column an analyte.

    Parameters
    ----------
    sample_ids : sequence of str
        One a row, each only once.
    analytes : sequence of Analyte
        One a column.
    values : array of shape (n_samples, n_analytes)
        Reference values; NaN where the laboratory gave none. [unit of each analyte]
    notes : sequence of mappings, optional
        What else the table says of each sample: batch, origin, date ...
    sources : sequence of Source, optional
        The file it came from.
    censored : array of shape (n_samples, n_analytes), optional
        Upper limits of values that the laboratory only knows to lie below one ("<0.05"); NaN for all others. Where
        there is a limit there is no value. [unit of each analyte]
    determinations : array of int, shape (n_samples, n_analytes), optional
        How many determinations each value is the mean of; one each when not given.
    repeatability : mapping of str to Repeatability, optional
        By the analyte's name, where samples were determined more than once.
    lines : sequence of int, optional
        Line of the file that each sample stands in (first stands in), for messages.

    Raises
    ------
    SampleMismatchError
        A sample ID that comes twice.
    ParameterError
        The parts do not fit each other.
    """

    sample_ids: tuple[str, ...]
    analytes: tuple[Analyte, ...]
    values: FloatArray
    notes: tuple[Mapping[str, str], ...]
    sources: tuple[Source, ...]
    censored: FloatArray
    determinations: IntArray
    repeatability: Mapping[str, Repeatability]
    lines: tuple[int, ...]

    def __init__(
        self,
        sample_ids: Sequence[str],
        analytes: Sequence[Analyte],
        values: ArrayLike,
        notes: Sequence[Mapping[str, str]] | None = None,
        sources: Sequence[Source] = (),
        censored: ArrayLike = NO_LIMIT,
        determinations: ArrayLike = 1,
        repeatability: Mapping[str, Repeatability] | None = None,
        lines: Sequence[int] = (),
    ) -> None:
        matrix = np.array(values, dtype=np.float64)
        rows = [{}] * len(sample_ids) if notes is None else notes
        if matrix.shape != (len(sample_ids), len(analytes)) or len(rows) != len(sample_ids):
            raise ParameterError(
                f"Reference values of shape {matrix.shape} for {len(sample_ids)} samples and {len(analytes)} analytes; "
                "expected one row a sample and one column an analyte."
            )
        twice = sorted(sample for sample, times in Counter(sample_ids).items() if times > 1)
        if twice:
            raise SampleMismatchError(
                f"The reference table has more than one row for {name_some(twice)}; expected one. "
                'Keep one row a sample; if they are repeated determinations, set replicates = "average" under '
                "[reference]."
            )
        limits = _one_a_value("censored", np.asarray(censored, dtype=np.float64), matrix)
        if (both := np.isfinite(limits) & ~np.isnan(matrix)).any():
            culprits = name_some(sample_ids[i] for i in np.flatnonzero(both.any(axis=1)).tolist())
            raise ParameterError(f"Both a value and an upper limit for {culprits}; expected one of the two.")
        matrix.flags.writeable = False
        object.__setattr__(self, "sample_ids", tuple(str(sample) for sample in sample_ids))
        object.__setattr__(self, "analytes", tuple(analytes))
        object.__setattr__(self, "values", matrix)
        object.__setattr__(self, "notes", tuple(FrozenMapping(row) for row in rows))
        object.__setattr__(self, "sources", tuple(sources))
        object.__setattr__(self, "censored", limits)
        object.__setattr__(self, "determinations", _one_a_value("determinations", np.asarray(determinations), matrix))
        object.__setattr__(self, "repeatability", FrozenMapping(repeatability or {}))
        object.__setattr__(self, "lines", tuple(lines))

    def __setstate__(self, state: dict[str, Any]) -> None:
        restore(self, state)

    def __len__(self) -> int:
        return len(self.sample_ids)

    def where(self, row: int) -> str:
        """Return file and line of a row, for a message: "reference.csv, line 5: "; empty where they are not known."""
        file = self.sources[0].name if self.sources else ""
        return f"{file}, line {self.lines[row]}: " if file and self.lines else f"{file}: " if file else ""

    def __str__(self) -> str:
        """How many samples, which analytes."""
        names = ", ".join(f"{a.name} [{a.printed_unit}]" if a.printed_unit else a.name for a in self.analytes)
        return f"{len(self)} samples with reference values of {names}"


def _one_a_value(name: str, given: AnyArray, values: FloatArray) -> AnyArray:
    """Return a read-only array of the values' shape; one number stands for all."""
    if given.ndim and given.shape != values.shape:
        raise ParameterError(f"{name} has shape {given.shape}; expected that of the values, {values.shape}.")
    return np.broadcast_to(given, values.shape)
