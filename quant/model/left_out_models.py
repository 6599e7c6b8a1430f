"""What jackknife+ and CV+ need of the models that samples were left out of, small enough to travel with the model.

Each of those models predicts linearly in the same features as the whole one: the processed spectrum less its mean, or
for a band area the band's signal. Only differences to the whole model are kept, in single precision.
"""

from dataclasses import dataclass
from typing import Any, Self

import numpy as np

from quant.arrays import AnyArray, FloatArray, IntArray
from quant.errors import ParameterError
from quant.regression.method import LineMethod, Method
from quant.statistics.conformal import Intervals, LevelFunction, jackknife_plus, least_samples


@dataclass(frozen=True, kw_only=True, eq=False)
class LeftOutModels:
    """The models without each sample, or without each fold, as differences to the whole model.

    Attributes
    ----------
    way : str
        "jackknife+" where samples were left out singly, else "CV+".
    probability : float
        Marginal coverage asked for.
    vectors : array of shape (n_models, n_features), single precision
        Difference of the regression vectors. [unit of the analyte / unit of the features]
    offsets : array of shape (n_models,)
        Difference of the predictions where all features are zero. [unit of the analyte]
    fold : array of int, shape (n_samples,)
        The model that each calibration sample was left out of.
    residuals, left_out : arrays of shape (n_samples,)
        Left-out errors (predicted - reference) and left-out predictions. [unit of the analyte]
    level : array of shape (3,)
        Intercept, slope and floor of the line that tells the size of errors at a level.
    """

    way: str
    probability: float
    vectors: AnyArray
    offsets: FloatArray
    fold: IntArray
    residuals: FloatArray
    left_out: FloatArray
    level: FloatArray

    def __post_init__(self) -> None:
        n_models, n_samples = len(self.vectors), self.residuals.size
        fits = self.offsets.shape == (n_models,) and self.fold.shape == self.left_out.shape == (n_samples,)
        if not (fits and self.level.shape == (3,) and n_samples and 0 <= self.fold.min() <= self.fold.max() < n_models):
            raise ParameterError("The left-out models and their residuals do not fit together; expected one fold each.")
        numbers = (self.vectors, self.offsets, self.residuals, self.left_out, self.level)
        if not all(np.isfinite(array).all() for array in numbers):
            raise ParameterError("The left-out models hold numbers that are not finite. Calibrate again.")

    def predictions(self, method: Method, mean: FloatArray, value: FloatArray) -> FloatArray:
        """Predict samples by each of the models, shape (n_models, n_samples). [unit of the analyte]

        Parameters
        ----------
        method : Method
            The whole model's regression.
        mean : array of shape (n_samples, n_points_after)
            Processed spectra, one a sample.
        value : array of shape (n_samples,)
            Their predictions by the whole model. [unit of the analyte]
        """
        moved = self.vectors.astype(np.float64) @ linear_features(method, mean).T
        shifted: FloatArray = value + self.offsets[:, None] + moved
        return shifted

    def intervals(self, method: Method, mean: FloatArray, value: FloatArray, *, scaled: bool = False) -> Intervals:
        """Return intervals for new reference results; with `scaled`, errors are taken to grow with the level.

        Their coverage is marginal: over calibration sets and samples, not at each level.

        Parameters
        ----------
        method, mean, value
            As `predictions` takes them.
        scaled : bool
            Whether residuals are divided by the size of errors at their level.
        """
        each = self.predictions(method, mean, value)[self.fold]
        if not scaled:
            return jackknife_plus(each, self.residuals, self.probability)
        size = LevelFunction(intercept=float(self.level[0]), slope=float(self.level[1]), least=float(self.level[2]))
        return jackknife_plus(each, self.residuals, self.probability, scales=size(self.left_out), new_scales=size(each))

    @property
    def finite(self) -> bool:
        """Whether there are samples enough for intervals with two ends."""
        return self.residuals.size >= least_samples(self.probability)

    @property
    def note(self) -> str:
        """What the intervals are, or why they have no end."""
        if not self.finite:
            least = least_samples(self.probability)
            return f"{self.residuals.size} samples are too few for {100 * self.probability:g} %; {least} are needed"
        return f"{self.way}, {100 * self.probability:g} %, marginal coverage"

    def state(self) -> tuple[dict[str, Any], dict[str, AnyArray]]:
        """Return plain values and arrays for the manifest; few arrays, since each costs everyday prediction time."""
        samples = np.column_stack([self.fold, self.residuals, self.left_out])
        plain = {"way": self.way, "probability": self.probability, "level": self.level.tolist()}
        return plain, {"vectors": self.vectors, "offsets": self.offsets, "samples": samples}

    @classmethod
    def from_state(cls, plain: dict[str, Any], arrays: dict[str, AnyArray]) -> Self:
        """Return what `state` described."""
        fold, residuals, left_out = arrays["samples"].T
        return cls(
            way=plain["way"],
            probability=plain["probability"],
            vectors=arrays["vectors"],
            offsets=arrays["offsets"],
            fold=fold.astype(np.intp),
            residuals=residuals,
            left_out=left_out,
            level=np.array(plain["level"]),
        )


def linear_features(method: Method, mean: FloatArray) -> FloatArray:
    """Return what predictions are linear in, shape (n_samples, n_features).

    Parameters
    ----------
    method : Method
    mean : array of shape (n_samples, n_points_after)
        Processed spectra, one a sample.
    """
    if isinstance(method, LineMethod):
        return method.signals(mean)[:, None]
    centre: Any = getattr(method, "x_mean_", 0.0)
    features: FloatArray = mean - centre
    return features
