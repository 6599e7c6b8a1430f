"""The pipeline that a recipe describes: fresh steps and a fresh regression for one axis."""

from collections.abc import Sequence
from functools import partial

from quant.arrays import FloatArray
from quant.errors import QuantityError
from quant.estimator.base import Step
from quant.preprocessing.chain import chain_axes, place_on_axis
from quant.recipe.schema import Recipe
from quant.recipe.step_files import step_spectra
from quant.recipe.steps import make_step
from quant.regression.band_area import BandArea
from quant.regression.classical_least_squares import ClassicalLeastSquares
from quant.regression.method import Method
from quant.regression.pcr import PCR
from quant.regression.pls import PLS
from quant.spectra.axis import SpectralAxis
from quant.units import QUANTITIES


def build_steps(recipe: Recipe, axis: SpectralAxis, quantity: str) -> list[Step]:
    """Return the recipe's preprocessing steps for spectra on an axis, not yet fitted.

    Raises
    ------
    RecipeError
        An unknown step or option, or a file of spectra for a step behind one that is not linear.
    ParameterError
        A range or position that does not fit the axis.
    QuantityError
        Transmittance that no step turns into absorbance, or absorbance that a step would turn again.
    AxisMismatchError, FileFormatError
        A file that a step names does not fit, or cannot be read.
    """
    names = [table.get("step") for table in recipe.preprocessing]
    if quantity == "transmittance" and "absorbance" not in names:
        raise QuantityError(
            "The spectra are transmittance, which is not proportional to concentration; expected absorbance. "
            'Add [[preprocessing]] with step = "absorbance" before the other steps that need it.'
        )
    if quantity != "transmittance" and "absorbance" in names:
        raise QuantityError(
            f"The step 'absorbance' needs transmittance, but the spectra are {QUANTITIES[quantity]}. "
            'Remove the step, or state quantity = "percent_transmittance" under [spectra] if that is what they are.'
        )
    steps: list[Step] = []
    for number, table in enumerate(recipe.preprocessing, 1):
        place = f"{recipe.name}, [[preprocessing]] number {number}"
        read = partial(step_spectra, recipe=recipe, axis=axis, quantity=quantity, before=tuple(steps), place=place)
        steps.append(make_step(table, place, read))
    return place_on_axis(steps, axis.values)


def axis_behind(steps: Sequence[Step], axis: SpectralAxis) -> FloatArray:
    """Return the axis values that the last step gives out, shape (n_points_after,). [axis unit]"""
    return chain_axes(steps, axis.values)[-1]


def build_method(recipe: Recipe, axis_after_steps: FloatArray, max_factors: int, analyte: str | None = None) -> Method:
    """Return the recipe's regression, not yet fitted.

    Parameters
    ----------
    recipe : Recipe
    axis_after_steps : array of shape (n_points_after,)
        [axis unit]
    max_factors : int
        The most factors, of a method that has any.
    analyte : str, optional
        The analyte to predict; default: the first. The others are components beside it.
    """
    table = recipe.regression
    if table.method == "pls":
        return PLS(n_factors=max_factors)
    if table.method == "pcr":
        return PCR(n_factors=max_factors)
    if table.method == "classical_least_squares":
        names = [entry.name for entry in recipe.analyte]
        own = names[0] if analyte is None else analyte
        return ClassicalLeastSquares(
            components=[name for name in [*names, *table.components] if name != own],
            background=table.background,
            baseline=table.baseline,
            non_negative=table.non_negative,
            axis=axis_after_steps,
        )
    return BandArea(
        bands=[band.model_dump(exclude_none=True) for band in table.bands or []],
        reference_band=table.reference_band.model_dump(exclude_none=True) if table.reference_band else None,
        through_origin=table.through_origin,
        axis=axis_after_steps,
        curve=table.curve,
        line_weights=table.line_weights,
        sd_column=table.sd_column,
    )
