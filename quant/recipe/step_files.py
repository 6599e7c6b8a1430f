"""Files that a preprocessing step names: spectra of interferents, analytes, differences."""

from collections.abc import Sequence
from dataclasses import replace
from itertools import takewhile
from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.checks import name_some
from quant.errors import AxisMismatchError, QuantError, QuantityError, RecipeError
from quant.estimator.base import Step
from quant.preprocessing.chain import chain_axes, fit_chain, place_on_axis
from quant.readers.options import ReadingOptions
from quant.readers.read import find_files, read_spectra
from quant.recipe.schema import Recipe
from quant.recipe.steps import file_options
from quant.spectra.axis import SpectralAxis
from quant.spectra.provenance import Source, source_of
from quant.spectra.resampling import interpolate
from quant.spectra.spectra_set import SpectraSet
from quant.units import AXIS_UNITS, QUANTITIES, absorbance_from_transmittance


def step_spectra(
    file: str, recipe: Recipe, axis: SpectralAxis, quantity: str, before: Sequence[Step], place: str
) -> FloatArray:
    """Read the spectra that a step names, in the form in which spectra arrive at that step.

    They are read with the axis unit, quantity and signs of [spectra] (a file that names its ordinate is believed),
    turned into absorbance where the recipe does so, put on the axis by local cubics, and taken through the steps
    before, which therefore have to be linear.

    Parameters
    ----------
    file : str
        Counted from the recipe's folder.
    recipe : Recipe
        What the file does not say itself is taken from its [spectra].
    axis, quantity : SpectralAxis, str
        Those of the spectra that enter the first step.
    before : sequence of Step
        The steps before this one.
    place : str
        Where the step stands, for messages.

    Returns
    -------
    array of shape (spectra in the file, points that arrive at the step)

    Raises
    ------
    RecipeError
        A step before that is not linear.
    AxisMismatchError
        Another axis unit, or an axis that does not cover the points that arrive at the step.
    QuantityError
        Another quantity than that of the spectra that arrive at the step.
    FileFormatError
        The file cannot be read.
    """
    cuts = list(takewhile(lambda step: step.allow_nan or step.name == "absorbance", before))  # point by point
    rest = before[len(cuts) :]
    bent = [step.name for step in rest if not step.linear]
    if bent:
        raise RecipeError(
            f"{place}: the spectra of {file} go through the steps before; expected linear ones, but found "
            f"{name_some(bent)}, without meaning for spectra of single substances or differences. Put it behind this "
            "step."
        )
    turned = any(step.name == "absorbance" for step in cuts)
    spectra = _in_quantity(_read(file, recipe), "absorbance" if turned else quantity, f"{place}: {file}")
    kept = chain_axes(cuts, axis.values)[-1]
    return fit_chain(place_on_axis(rest, kept), _on_axis(spectra, kept, axis.unit, f"{place}: {file}"))[1]


def step_sources(recipe: Recipe) -> tuple[Source, ...]:
    """Return the files that the recipe's steps name, with their fingerprints.

    Raises
    ------
    FileFormatError
        A file cannot be read.
    """
    named = [
        str(Path(recipe.folder) / table[option])
        for table in recipe.preprocessing
        for option in file_options(str(table.get("step"))).values()
        if table.get(option) is not None
    ]
    return tuple(source_of(file) for file in find_files(named)) if named else ()


def _read(file: str, recipe: Recipe) -> SpectraSet:
    table, path = recipe.spectra, Path(recipe.folder) / file
    options = ReadingOptions(
        axis_unit=table.axis_unit,
        quantity=table.quantity,
        separator=table.separator,
        decimal=table.decimal,
        thousands=table.thousands,
    )
    try:
        return read_spectra(path, options)
    except QuantityError:  # the file names another ordinate; what else is wrong with it is told when it is read again
        return read_spectra(path, replace(options, quantity=None))


def _in_quantity(spectra: SpectraSet, quantity: str, what: str) -> SpectraSet:
    if spectra.quantity == "transmittance" and quantity == "absorbance":
        return replace(spectra, values=absorbance_from_transmittance(spectra.values), quantity=quantity)
    if spectra.quantity != quantity:
        raise QuantityError(
            f"{what} holds {QUANTITIES[spectra.quantity]}; expected {QUANTITIES[quantity]}, as in the spectra that "
            "arrive at this step. Convert the file, or name its ordinate in it."
        )
    return spectra


def _on_axis(spectra: SpectraSet, positions: FloatArray, unit: str, what: str) -> FloatArray:
    if spectra.axis.unit != unit:
        raise AxisMismatchError(
            f"{what} has its axis in {AXIS_UNITS[spectra.axis.unit]}; expected {AXIS_UNITS[unit]}, as the spectra. "
            "Convert the file, or give axis_unit under [spectra] if it does not say its unit."
        )
    if np.array_equal(spectra.axis.values, positions):
        return spectra.values
    try:
        return interpolate(spectra.values, spectra.axis.values, positions)
    except QuantError as problem:
        raise AxisMismatchError(
            f"{what} does not cover the points that arrive at this step: {problem} Give spectra over the whole range, "
            "or keep less of it before (keep_ranges)."
        ) from problem
