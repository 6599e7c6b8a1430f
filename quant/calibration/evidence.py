"""What the audit of one calibration looks at: the model, its samples, and what cross-validation found."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.cross_validation_result import CrossValidationResult
from quant.model.calibration import Calibration
from quant.recipe.schema import Recipe
from quant.regression.band_area import BandArea
from quant.spectra.sample_set import SampleSet


@dataclass(frozen=True, eq=False)
class Evidence:
    """One fitted calibration with everything it was made from.

    Attributes
    ----------
    recipe : Recipe
    model : Calibration
    training : SampleSet
        Calibration samples.
    values : array of shape (n_samples,)
        Their reference values. [unit of the analyte]
    crossed : CrossValidationResult
    processed : array of shape (n_spectra, n_points_after)
        Their processed spectra.
    axis_after : array of shape (n_points_after,)
        [axis unit]
    """

    recipe: Recipe
    model: Calibration
    training: SampleSet
    values: FloatArray
    crossed: CrossValidationResult
    processed: FloatArray
    axis_after: FloatArray

    @property
    def unit(self) -> str:
        """Unit of the analyte, as printed."""
        return self.model.analyte.printed_unit

    @cached_property
    def mean(self) -> FloatArray:
        """Processed spectra, one a sample, shape (n_samples, n_points_after)."""
        return self.training.mean_by_sample(self.processed)

    @cached_property
    def errors(self) -> FloatArray:
        """Errors of the fit, shape (n_samples,). [unit of the analyte]"""
        return self.model.method.predict(self.mean) - self.values

    @cached_property
    def weighted_errors(self) -> FloatArray:
        """The same, each times the root of its standard's weight where a line is weighted. [unit of the analyte]"""
        method = self.model.method
        return self.errors * np.sqrt(method.weights_at(self.values)) if isinstance(method, BandArea) else self.errors

    @cached_property
    def leverage(self) -> FloatArray:
        """Leverages, 1/n included, shape (n_samples,)."""
        leverages: FloatArray = self.model.method.leverage_each(self.mean)[-1]
        return leverages

    @cached_property
    def left_out(self) -> FloatArray:
        """Left-out predictions, mean over repeats, shape (n_samples,). [unit of the analyte]"""
        return self.crossed.left_out_predictions(self.model.factors)

    @cached_property
    def scores(self) -> FloatArray:
        """Scores, shape (n_samples, n_factors): of a method without scores its predictions."""
        rotations = getattr(self.model.method, "rotations_", None)
        if rotations is None:
            return self.model.method.predict(self.mean)[:, None]
        centred = self.mean - getattr(self.model.method, "x_mean_", 0.0)
        return np.asarray(centred @ rotations)

    @property
    def vector(self) -> FloatArray | None:
        """Regression vector, shape (n_points_after,), or None. [unit of the analyte / ordinate]"""
        coefficients = getattr(self.model.method, "coefficients_", None)
        return None if coefficients is None else np.asarray(coefficients[-1])

    @property
    def n_terms(self) -> int:
        """Terms of the model: the factors and the mean."""
        return len(self.training) - self.model.uncertainty.degrees_of_freedom

    @property
    def band_area(self) -> bool:
        """Whether a band is read off a line."""
        return isinstance(self.model.method, BandArea)

    @property
    def classical(self) -> bool:
        """Whether spectra are a function of the values, read backwards: predictions scatter about the truth."""
        return self.model.method.classical
