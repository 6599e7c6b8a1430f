"""The numbers behind the pictures of a look over spectra and values."""

from dataclasses import dataclass

import numpy as np

from quant.arrays import BoolArray, FloatArray
from quant.inspection.material import Material
from quant.result import Result, documented

MOST_SHOWN = 80  # spectra in a picture, evenly along the reference values


@dataclass(frozen=True, kw_only=True, eq=False)
class InspectionPicture(Result):
    """What the page of an inspection draws."""

    axis: FloatArray = documented("Axis of the spectra", "axis unit")
    axis_unit: str = documented("Unit of the axis")
    quantity: str = documented("Ordinate of the spectra as read")
    used: BoolArray = documented("Points that reach the regression")
    spectra: FloatArray = documented("Mean spectra of the samples drawn, as absorbance where it is one")
    processed_axis: FloatArray | None = documented("Axis behind the preprocessing, or none where it fails", "axis unit")
    processed: FloatArray | None = documented("Mean spectra of the samples drawn, after preprocessing")
    shown: tuple[int, ...] = documented("Positions of these samples, the calibration's first")
    analytes: tuple[tuple[str, str], ...] = documented("Name and unit of each analyte")
    values: FloatArray = documented("Reference values of all samples, one column an analyte")
    n_calibration: int = documented("So many of the samples calibrate; they come first")


def picture_of(material: Material, behind: FloatArray) -> InspectionPicture:
    """Gather what the page draws; `behind` is the axis behind the preprocessing."""
    changed = material.processed is not None and len(material.recipe.preprocessing) > 0
    values = material.calibration.values
    if material.validation is not None:
        values = np.vstack([values, material.validation.values])
    order = np.argsort(values[:, 0], kind="stable")
    shown = np.unique(order[np.linspace(0, order.size - 1, min(order.size, MOST_SHOWN)).round().astype(int)])
    return InspectionPicture(
        axis=material.spectra.axis.values,
        axis_unit=material.spectra.axis.unit,
        quantity="absorbance" if material.spectra.quantity == "transmittance" else material.spectra.quantity,
        used=material.used,
        spectra=material.mean_by_sample(material.absorbance)[shown],
        processed_axis=behind if changed else None,
        processed=material.mean_by_sample(material.processed)[shown]
        if changed and material.processed is not None
        else None,
        shown=tuple(int(i) for i in shown),
        analytes=tuple((analyte.name, analyte.unit) for analyte in material.calibration.analytes),
        values=values,
        n_calibration=len(material.calibration),
    )
