"""The pure-component spectra that a plan names."""

from pathlib import Path

import numpy as np

from quant.arrays import FloatArray, IntArray
from quant.checks import name_some
from quant.errors import AxisMismatchError, QuantityError, SampleMismatchError
from quant.readers.read import read_spectra
from quant.recipe.plan_schema import Plan, PureSpectraTable
from quant.spectra.spectra_set import SpectraSet
from quant.units import QUANTITIES, absorbance_from_transmittance

_LINEAR = ("absorbance", "log_reflectance", "arbitrary")


def pure_files(plan: Plan) -> list[str]:
    """Return the files, patterns or folders of [pure_spectra], if the plan has any."""
    table = plan.pure_spectra
    return [str(Path(plan.folder) / file) for file in table.files] if table else []


def read_pure_spectra(plan: Plan, table: PureSpectraTable) -> FloatArray:
    """Read one spectrum of each component of a plan, per unit of concentration.

    Parameters
    ----------
    plan : Plan
    table : PureSpectraTable
        Its [pure_spectra].

    Returns
    -------
    array of shape (k, n_points)
        In the order of `plan.names`; spectra that share a sample ID are averaged. [ordinate / unit]

    Raises
    ------
    SampleMismatchError
        A component without a spectrum.
    QuantityError
        An ordinate that is not linear in concentration.
    AxisMismatchError
        A range that holds no point.
    FileFormatError
        A file that cannot be read.
    """
    spectra = read_spectra(pure_files(plan), table.options())
    missing = [name for name in plan.names if name not in spectra.sample_ids]
    if missing:
        raise SampleMismatchError(
            f"[pure_spectra]: no spectrum of {name_some(missing)}; the files hold "
            f"{name_some(dict.fromkeys(spectra.sample_ids))}. The sample ID has to be the component's name: rename "
            "it, or use sample_pattern, sample_label or sample_column."
        )
    values = _linear_values(spectra)[:, _chosen(spectra, table)]
    ids = np.array(spectra.sample_ids)
    return np.stack([values[ids == name].mean(axis=0) for name in plan.names]) / table.concentration


def _linear_values(spectra: SpectraSet) -> FloatArray:
    if spectra.quantity == "transmittance":
        return absorbance_from_transmittance(spectra.values)
    if spectra.quantity not in _LINEAR:
        raise QuantityError(
            f"[pure_spectra] are {QUANTITIES[spectra.quantity]}; expected absorbance or what is linear in "
            "concentration. Convert them."
        )
    return spectra.values


def _chosen(spectra: SpectraSet, table: PureSpectraTable) -> IntArray:
    """Return which points lie in the ranges and are there in every spectrum."""
    position = spectra.axis.values
    inside = np.full(position.size, table.ranges is None)
    for first, last in table.ranges or []:
        here = (position >= min(first, last)) & (position <= max(first, last))
        if not here.any():
            raise AxisMismatchError(
                f"[pure_spectra] ranges: no point from {first:g} to {last:g}; the spectra lie on {spectra.axis}. Mend "
                "the range."
            )
        inside |= here
    return np.flatnonzero(inside & np.isfinite(spectra.values).all(axis=0))
