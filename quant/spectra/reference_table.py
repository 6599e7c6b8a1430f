"""Reference values from the laboratory."""

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.provenance import Source


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
    """

    name: str
    unit: str = ""
    laboratory_error: float | None = None

    def __post_init__(self) -> None:
        if self.laboratory_error is not None and not (
            np.isfinite(self.laboratory_error) and self.laboratory_error >= 0
        ):
            raise ParameterError(
                f"laboratory_error of {self.name} is {self.laboratory_error}; expected a standard error of 0 or more."
            )


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

    def __init__(
        self,
        sample_ids: Sequence[str],
        analytes: Sequence[Analyte],
        values: ArrayLike,
        notes: Sequence[Mapping[str, str]] | None = None,
        sources: Sequence[Source] = (),
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
                "Keep one row a sample (the mean of repeated determinations)."
            )
        matrix.flags.writeable = False
        object.__setattr__(self, "sample_ids", tuple(str(sample) for sample in sample_ids))
        object.__setattr__(self, "analytes", tuple(analytes))
        object.__setattr__(self, "values", matrix)
        object.__setattr__(self, "notes", tuple(MappingProxyType(dict(row)) for row in rows))
        object.__setattr__(self, "sources", tuple(sources))

    def __len__(self) -> int:
        return len(self.sample_ids)

    def __str__(self) -> str:
        """How many samples, which analytes."""
        names = ", ".join(f"{a.name} [{a.unit}]" if a.unit else a.name for a in self.analytes)
        return f"{len(self)} samples with reference values of {names}"
