"""What some regressions need of a sample besides its value: other components' contents, a standard deviation."""

from collections.abc import Sequence

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import ParameterError, SampleMismatchError
from quant.spectra.sample_set import SampleSet


def with_companions(samples: SampleSet, values: FloatArray, names: Sequence[str]) -> FloatArray:
    """Return the values of shape (n_samples,), or with a column for each companion, (n_samples, 1 + len(names)).

    Parameters
    ----------
    samples : SampleSet
    values : array of shape (n_samples,)
        Reference values of the analyte to predict.
    names : sequence of str
        Analytes of the set, or columns and notes of its samples.

    Raises
    ------
    ParameterError
        A note that is no number.
    SampleMismatchError
        Samples that lack a value.
    """
    if not names:
        return values
    return np.column_stack([values, *(_column(samples, name) for name in names)])


def _column(samples: SampleSet, name: str) -> FloatArray:
    if any(analyte.name == name for analyte in samples.analytes):
        column = samples.analyte(name)[1]
    else:
        column = np.array([_number(name, text) for text in samples.groups(name)])
    lacking = [sample for sample, value in zip(samples.sample_ids, column, strict=True) if not np.isfinite(value)]
    if lacking:
        raise SampleMismatchError(
            f"{len(lacking)} of {len(samples)} samples have no value of {name}: {name_some(lacking)}. The regression "
            "needs it of every calibration sample: supply it, or exclude these samples."
        )
    return column


def _number(name: str, text: str) -> float:
    try:
        return float(text.replace(",", "."))
    except ValueError:
        raise ParameterError(
            f"Column {name!r} holds {text!r}; expected a number for every calibration sample. Check the table."
        ) from None
