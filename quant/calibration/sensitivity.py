"""What would break a calibration: how large each change of the instrument may be before too much is lost.

The calibration's own spectra are changed as an instrument would change them and predicted again. A change moves all
predictions (bias) and spreads them (SEP); its size is raised until one of the two reaches what is allowed.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from quant.arrays import FloatArray
from quant.calibration.validate import ValidationResult
from quant.errors import QuantityError
from quant.model.calibration import Calibration
from quant.model.revalidation_basis import MonitoringLimit, RevalidationBasis
from quant.recipe.audit_schema import table_of
from quant.recipe.schema import Recipe
from quant.spectra.axis import SpectralAxis
from quant.spectra.resampling import apply_weights, interpolation_weights
from quant.spectra.sample_set import SampleSet
from quant.spectra.simulate_effects import gaussian_line_shape, water_vapour_spectrum
from quant.units import AXIS_UNITS

ALLOWED_BIAS, ALLOWED_SEP = 1.0, 2.0  # defaults, as multiples of the validated SEP
MOST_SAMPLES = 12  # looked at, spread over the range: the time of a calibration must not go here
GROWTH = 4.0  # from one size tried to the next
FEWEST_POINTS = 4  # below, there is no spectrum to shift or to blur
STEPS = 6  # from the first size tried to the last: a factor of 4096
HALVINGS = 12  # of the interval of sizes: three digits
SEED = 20260301  # of the noise that is added
NOISY = 120  # noisy spectra altogether


@dataclass(frozen=True)
class _Kind:
    """A change of the instrument: its name, unit, the last size tried, and what it does to spectra."""

    name: str
    unit: str
    tried: float
    change: Callable[[FloatArray, float], FloatArray]


def with_revalidation(
    model: Calibration, training: SampleSet, recipe: Recipe, validated: ValidationResult | None
) -> Calibration:
    """Return the model with what a later service visit is judged by.

    Parameters
    ----------
    model : Calibration
    training : SampleSet
        Its calibration samples.
    recipe : Recipe
        Its [revalidation] states what is allowed.
    validated : ValidationResult or None
        Without it, s0 of the left-out samples stands for the SEP.
    """
    if validated is not None and validated.figures.sep and len(validated.sample_ids) > 2:
        sep, n, source = validated.figures.sep, len(validated.sample_ids), validated.kind
    else:
        sep, n = model.uncertainty.s0, model.uncertainty.degrees_of_freedom + 1
        source = "left-out samples of the cross-validation"
    if not sep > 0:
        return model
    table = table_of(recipe.revalidation, model.analyte.name)
    bias = table.allowed_bias if table and table.allowed_bias else ALLOWED_BIAS * sep
    scatter = table.allowed_sep if table and table.allowed_sep else max(ALLOWED_SEP * sep, bias)
    stated = table is not None and bool(table.allowed_bias)
    basis = RevalidationBasis(
        allowed_bias=bias,
        allowed_sep=scatter,
        source="the recipe" if stated else "no [revalidation] in the recipe: one validated SEP, and twice",
        sep=sep,
        n_samples=n,
        sep_source=source,
    )
    mean = training.mean_by_sample(training.spectra.values)
    if np.isnan(mean).any() or mean.shape[1] < FEWEST_POINTS:  # neither gaps nor single points can be shifted
        return replace(model, revalidation=basis)
    return replace(model, revalidation=replace(basis, monitoring=sensitivity(model, mean, basis)))


def sensitivity(model: Calibration, spectra: FloatArray, basis: RevalidationBasis) -> tuple[MonitoringLimit, ...]:
    """Return how large each change may be.

    Parameters
    ----------
    model : Calibration
    spectra : array of shape (n_samples, n_points)
        Spectra of samples the calibration is meant for, on the model's axis. [ordinate]
    basis : RevalidationBasis
        What is allowed, and the SEP before any change.
    """
    order = np.argsort(model.predict_values(spectra), kind="stable")
    chosen = spectra[order[np.unique(np.linspace(0, order.size - 1, MOST_SAMPLES).round().astype(int))]]
    before = model.predict_values(chosen)
    return tuple(_limit(model, chosen, before, basis, kind) for kind in _kinds(model.axis, chosen, model.quantity))


def _limit(
    model: Calibration, spectra: FloatArray, before: FloatArray, basis: RevalidationBasis, kind: _Kind
) -> MonitoringLimit:
    def used(size: float) -> tuple[float, float]:
        """Shares used up of the allowed bias and of the allowed SEP, by the worse sign."""
        signs = (size, -size) if kind.name not in ("resolution", "noise") else (size,)
        shares = [_shares(model, kind.change(spectra, signed), before, basis) for signed in signs]
        return max(shares, key=max)

    sizes = kind.tried / GROWTH ** np.arange(STEPS, -1.0, -1.0)
    high = next((float(size) for size in sizes if max(used(float(size))) >= 1), None)
    if high is None:
        return MonitoringLimit(kind=kind.name, size=None, tried=kind.tried, unit=kind.unit, costs="")
    low = high / GROWTH if high > sizes[0] else 0.0
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        low, high = (middle, high) if max(used(middle)) < 1 else (low, middle)
    bias, scatter = used(high)
    costs = "bias" if bias >= scatter else "SEP"
    return MonitoringLimit(kind=kind.name, size=high, tried=kind.tried, unit=kind.unit, costs=costs)


def _shares(
    model: Calibration, changed: FloatArray, before: FloatArray, basis: RevalidationBasis
) -> tuple[float, float]:
    try:
        moved = model.predict_values(changed).reshape(-1, before.size) - before
    except QuantityError:  # spectra that a step refuses: transmittance pushed below zero
        return np.inf, np.inf
    if not np.isfinite(moved).all():
        return np.inf, np.inf
    scatter = np.sqrt(basis.sep**2 + moved.var())  # what the change adds, beside what was there
    return float(abs(moved.mean()) / basis.allowed_bias), float(scatter / basis.allowed_sep)


def _kinds(axis: SpectralAxis, spectra: FloatArray, quantity: str) -> list[_Kind]:
    x = axis.values
    span, step = float(np.ptp(x)), abs(axis.spacing)
    unit, height = AXIS_UNITS[axis.unit], float(np.ptp(spectra))
    u = 2 * (x - x.min()) / span - 1
    noise = np.random.default_rng(SEED).standard_normal((-(-NOISY // len(spectra)), *spectra.shape))
    kinds = [
        _Kind("shift", unit, 8 * step, lambda s, d: _displaced(s, x, np.full(x.size, d))),
        _Kind("stretch", "%", 100 * 16 * step / span, lambda s, d: _displaced(s, x, d / 100 * (x - x.mean()))),
        _Kind("gain", "%", 50.0, lambda s, d: s * (1 + d / 100)),
        _Kind("offset", quantity, height, lambda s, d: s + d),
        _Kind("slope", f"{quantity} from end to end", height, lambda s, d: s + d * u / 2),
        _Kind("resolution", f"{unit} of added width", 16 * step, lambda s, d: _blurred(s, x, step, d)),
        _Kind("noise", quantity, height, lambda s, d: (s + d * noise).reshape(-1, s.shape[1])),
    ]
    if axis.unit == "cm-1" and quantity == "absorbance":
        vapour = water_vapour_spectrum(x)
        kinds.append(_Kind("vapour", "absorbance of the strongest line", height, lambda s, d: s + d * vapour))
    return kinds


def _displaced(spectra: FloatArray, axis: FloatArray, by: FloatArray) -> FloatArray:
    """Spectra whose bands appear displaced; beyond the ends the end values go on."""
    return apply_weights(spectra, *interpolation_weights(axis, np.clip(axis - by, axis.min(), axis.max())))


def _blurred(spectra: FloatArray, axis: FloatArray, step: float, width: float) -> FloatArray:
    """Spectra through a wider line shape; a width below a point is interpolated, since the kernel needs points."""
    if not np.allclose(np.abs(np.diff(axis)), step, rtol=1e-2):
        return spectra  # an uneven axis has no kernel
    least = 2 * step
    if width >= least:
        return gaussian_line_shape(spectra, step, width)
    return np.asarray(spectra + (width / least) ** 2 * (gaussian_line_shape(spectra, step, least) - spectra))
