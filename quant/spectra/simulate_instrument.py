"""An instrument in some state, and what it reports of a true spectrum."""

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector
from quant.errors import ParameterError
from quant.spectra import simulate_effects as effects
from quant.spectra.simulate import PureComponent
from quant.units import absorbance_from_transmittance, transmittance_from_absorbance


@dataclass(frozen=True, kw_only=True)
class InstrumentState:
    """All that stands between a true absorbance and a reported one. The default is a perfect instrument.

    What a service visit changes is written by `dataclasses.replace(state, shift=0.4, gain=1.03)`.

    Parameters
    ----------
    noise : float
        Standard deviation of the detector noise on a 100 % line where energy is highest. [transmittance]
    resolution : float
        Width (FWHM) of the Gaussian instrument line shape. [cm⁻¹]
    shift, stretch : float
        Error of the wavenumber scale: a band at ν appears at ν·(1 + stretch) + shift. [cm⁻¹; relative]
    gain : float
        Factor on all absorbances: path length, angle or number of reflections.
    offset : float
        Photometric offset. [absorbance]
    stray_light : float
        Share of false light.
    path_variation : float
        Spectrum to spectrum: standard deviation of ln(path length or contact).
    baseline_offset, baseline_slope, baseline_curvature : float
        Spectrum to spectrum: standard deviations, see `simulate_effects.baseline_drift`. [absorbance]
    water_vapour, carbon_dioxide : float
        Spectrum to spectrum: standard deviation of the height of the strongest line or branch. [absorbance]
    interferent : PureComponent, optional
        A substance that was not there before: residue on a crystal, a new by-product.
    interferent_amount : float
        Its concentration, the same in every spectrum. [unit of the component's heights]

    Raises
    ------
    ParameterError
        A number that is not finite, or is negative where only a size makes sense.
    """

    noise: float = 0.0
    resolution: float = 0.0
    shift: float = 0.0
    stretch: float = 0.0
    gain: float = 1.0
    offset: float = 0.0
    stray_light: float = 0.0
    path_variation: float = 0.0
    baseline_offset: float = 0.0
    baseline_slope: float = 0.0
    baseline_curvature: float = 0.0
    water_vapour: float = 0.0
    carbon_dioxide: float = 0.0
    interferent: PureComponent | None = None
    interferent_amount: float = 0.0

    def __post_init__(self) -> None:
        either_sign = {"shift", "stretch", "offset", "interferent", "interferent_amount"}
        for field in fields(self):
            value = getattr(self, field.name)
            if field.name != "interferent" and not np.isfinite(value):
                raise ParameterError(f"InstrumentState: {field.name} is {value}; expected a finite number.")
            if field.name not in either_sign and value < 0:
                raise ParameterError(f"InstrumentState: {field.name} is {value}; expected 0 or more.")
        if abs(self.stretch) >= 0.1:
            raise ParameterError(
                f"InstrumentState: stretch is {self.stretch}; expected a relative error well below 0.1."
            )


def measure(absorbance: ArrayLike, axis: ArrayLike, rng: np.random.Generator, state: InstrumentState) -> FloatArray:
    """Return the absorbances that an instrument reports of true ones.

    The order is that of the light: sample (interferent, path length), line shape, gases in the beam, wavenumber scale,
    stray light, detector noise; then what happens to the reported absorbance (offset, baseline).

    Parameters
    ----------
    absorbance : array of shape (n, n_points)
        True absorbances, one row a measurement (repeat a row to measure a sample twice).
    axis : array of shape (n_points,)
        Wavenumbers, evenly spaced, rising or falling. [cm⁻¹]
    rng : numpy.random.Generator
        Source of everything random. Two states given equal generators draw equal random numbers, so that only what
        differs between the states differs between the results.
    state : InstrumentState

    Returns
    -------
    array of shape (n, n_points)
        Reported absorbances.

    Raises
    ------
    ParameterError
        Axis and absorbances do not fit each other, or the axis is not evenly spaced.
    """
    points, rows = as_vector("axis", axis), as_matrix("absorbance", absorbance)
    spacing = _even_spacing(points, rows.shape[1])
    if state.interferent is not None:
        rows = rows + state.interferent_amount * state.interferent.spectrum(points)
    rows = effects.path_variation(rows * state.gain, rng, state.path_variation)
    light = transmittance_from_absorbance(rows)
    light = effects.gaussian_line_shape(light, spacing, state.resolution)
    gases = _gases(len(rows), points, rng, state)
    if state.water_vapour or state.carbon_dioxide:
        light = light * transmittance_from_absorbance(gases)
    if state.shift or state.stretch:
        light = effects.shift_axis(light, points, state.shift, state.stretch)
    if state.stray_light:
        light = effects.stray_light(light, state.stray_light)
    light = effects.detector_noise(light, rng, state.noise * effects.noise_shape(points))
    reported = absorbance_from_transmittance(light) + state.offset
    drift = (state.baseline_offset, state.baseline_slope, state.baseline_curvature)
    return effects.baseline_drift(reported, points, rng, *drift)


def _gases(n_rows: int, axis: FloatArray, rng: np.random.Generator, state: InstrumentState) -> FloatArray:
    """Absorbance of the gases in the beam, as wide as the resolution makes them, shape (n_rows, n_points)."""
    seen_at = state.resolution or effects.VAPOUR_RESOLUTION
    rows = np.zeros((n_rows, 1))
    rows = effects.atmosphere(rows, rng, state.water_vapour, effects.water_vapour_spectrum(axis, seen_at))
    return effects.atmosphere(rows, rng, state.carbon_dioxide, effects.carbon_dioxide_spectrum(axis))


def _even_spacing(axis: FloatArray, n_points: int) -> float:
    """Distance between points [cm⁻¹], or say why this axis will not do."""
    if axis.size != n_points or axis.size < 2:
        raise ParameterError(
            f"An axis of {axis.size} points for spectra of {n_points}; expected as many, and at least 2."
        )
    steps = np.abs(np.diff(axis))
    if not np.allclose(steps, steps[0], rtol=1e-3, atol=0.0):
        raise ParameterError(
            f"The axis is unevenly spaced ({steps.min():g} to {steps.max():g} cm⁻¹); expected even spacing, which the "
            "simulated line shape and scale errors need."
        )
    return float(steps.mean())
