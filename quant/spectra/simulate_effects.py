"""What instruments and sample presentation do to a true spectrum: one small pure function each.

Rows are spectra. Whatever is random comes from the generator handed in, drawn anew for each row.
"""

from functools import lru_cache

import numpy as np

from quant.arrays import FloatArray
from quant.errors import ParameterError
from quant.spectra.simulate import Band, band_profile

LEAST_TRANSMITTANCE = 1e-6
"""Where a simulated detector ends: noise cannot bring T below this, as no absorbance above 6 is ever reported."""

VAPOUR_RESOLUTION = 4.0  # cm⁻¹, at which the strength of vapour lines is stated
_LINE_WIDTH = 0.3  # cm⁻¹, of a vapour line in air, order of magnitude

# Stronger rotation lines of the bending (1594.8) and stretching (3657.1, 3755.9) vibrations of water vapour: position
# [cm⁻¹] and strength relative to the strongest. From memory, about ±1 cm⁻¹; regions 1350-1900 and 3550-3950 (Herzberg).
WATER_VAPOUR_LINES = (
    *((1375.1, 0.18), (1387.5, 0.20), (1396.5, 0.30), (1419.5, 0.42), (1436.8, 0.45), (1456.9, 0.70), (1472.1, 0.55)),
    *((1489.8, 0.50), (1496.2, 0.55), (1507.1, 0.85), (1521.3, 0.50), (1539.1, 0.75), (1558.5, 0.95), (1569.8, 0.55)),
    *((1576.2, 0.60), (1616.7, 0.60), (1635.7, 0.60), (1646.0, 0.50), (1653.3, 1.00), (1662.8, 0.45), (1670.2, 0.50)),
    *((1675.2, 0.45), (1684.8, 0.85), (1695.9, 0.75), (1700.0, 0.60), (1717.4, 0.70), (1733.4, 0.65), (1739.8, 0.35)),
    *((1749.4, 0.40), (1772.7, 0.45), (1792.7, 0.40), (1799.6, 0.25), (1830.2, 0.20), (1844.2, 0.22), (1869.3, 0.16)),
    *((1889.6, 0.12), (3566.0, 0.12), (3587.5, 0.18), (3629.4, 0.30), (3649.3, 0.35), (3670.0, 0.35), (3689.4, 0.40)),
    *((3701.9, 0.40), (3711.1, 0.45), (3735.0, 0.55), (3744.6, 0.55), (3749.3, 0.50), (3759.8, 0.45), (3801.4, 0.50)),
    *((3807.0, 0.50), (3820.7, 0.55), (3837.9, 0.55), (3853.9, 0.60), (3870.2, 0.40), (3880.2, 0.30), (3891.3, 0.30)),
    *((3902.8, 0.25), (3920.1, 0.15)),
)

# Branches of carbon dioxide about 2349.1 and its Q branch at 667.4 [cm⁻¹], unresolved at about 4 cm⁻¹. From memory.
_CARBON_DIOXIDE = (Band(2361, 22, 1.0, "gaussian"), Band(2338, 26, 0.8, "gaussian"), Band(667.4, 4.5, 0.6, "gaussian"))


@lru_cache(maxsize=64)
def _water_vapour(points: bytes, resolution: float) -> FloatArray:
    axis = np.frombuffer(points)
    width = float(np.hypot(_LINE_WIDTH, resolution))
    at_stated = float(np.hypot(_LINE_WIDTH, VAPOUR_RESOLUTION))
    spectrum = np.zeros_like(axis)
    for position, strength in WATER_VAPOUR_LINES:
        # A line seen through an instrument keeps its area: wider is lower.
        spectrum += band_profile(axis, Band(position, width, strength * at_stated / width, "gaussian"))
    spectrum.flags.writeable = False
    return spectrum


def water_vapour_spectrum(axis: FloatArray, resolution: float = VAPOUR_RESOLUTION) -> FloatArray:
    """Absorbance of water vapour in the beam, as seen at a resolution.

    Parameters
    ----------
    axis : array of shape (n_points,)
        Wavenumbers. [cm⁻¹]
    resolution : float, optional
        Width of the instrument's line shape. [cm⁻¹]

    Returns
    -------
    array of shape (n_points,)
        Absorbance; at 4 cm⁻¹ the strongest line alone has a height of 1.

    References
    ----------
    .. [1] Regions 1350-1900 and 3550-3950 cm⁻¹: Herzberg; line positions from memory, about ±1 cm⁻¹.
    """
    return _water_vapour(np.ascontiguousarray(axis, dtype=np.float64).tobytes(), float(resolution))


def carbon_dioxide_spectrum(axis: FloatArray) -> FloatArray:
    """Absorbance of carbon dioxide in the beam at about 4 cm⁻¹, maximum near 1, shape (n_points,); axis in cm⁻¹."""
    return np.asarray(sum(band_profile(axis, band) for band in _CARBON_DIOXIDE))


def atmosphere(rows: FloatArray, rng: np.random.Generator, amplitude: float, spectrum: FloatArray) -> FloatArray:
    """Add a gas that changed between background and sample: amplitude normal about 0, so of either sign.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Absorbances.
    rng : numpy.random.Generator
    amplitude : float
        Standard deviation of the factor on `spectrum`.
    spectrum : array of shape (n_points,)
        Absorbance of the gas, such as `water_vapour_spectrum(axis, resolution)`.
    """
    return np.asarray(rows + amplitude * rng.standard_normal((len(rows), 1)) * spectrum)


def atr_depth(rows: FloatArray, axis: FloatArray, reference: float = 1000.0) -> FloatArray:
    """Scale absorbances as attenuated total reflection does: the depth probed is proportional to the wavelength.

    Parameters
    ----------
    rows : array of shape (..., n_points)
        Absorbances as in transmission.
    axis : array of shape (n_points,)
        Wavenumbers above 0. [cm⁻¹]
    reference : float, optional
        Where nothing changes. [cm⁻¹]
    """
    return np.asarray(rows * (reference / axis))


def path_variation(rows: FloatArray, rng: np.random.Generator, relative: float) -> FloatArray:
    """Multiply each spectrum by its own path length or degree of contact.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Absorbances.
    rng : numpy.random.Generator
    relative : float
        Standard deviation of the logarithm of the factor, whose median is 1: 0.1 is about ±10 %.
    """
    return np.asarray(rows * np.exp(relative * rng.standard_normal((len(rows), 1))))


def baseline_drift(
    rows: FloatArray, axis: FloatArray, rng: np.random.Generator, offset: float, slope: float, curvature: float
) -> FloatArray:
    """Add a baseline of random offset, slope and slow curvature to each spectrum.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Absorbances.
    axis : array of shape (n_points,)
        Wavenumbers. [cm⁻¹]
    rng : numpy.random.Generator
    offset, slope, curvature : float
        Standard deviations of the coefficients of 1, u and (3u² − 1)/2, u running from −1 at the lowest wavenumber to 1
        at the highest. [absorbance]
    """
    u = 2.0 * (axis - axis.min()) / max(float(np.ptp(axis)), np.finfo(float).tiny) - 1.0
    shapes = np.stack([np.full_like(u, offset), slope * u, curvature * 0.5 * (3.0 * u * u - 1.0)])
    return np.asarray(rows + rng.standard_normal((len(rows), 3)) @ shapes)


def gaussian_line_shape(rows: FloatArray, spacing: float, width: float) -> FloatArray:
    """Convolve spectra with a Gaussian of area 1, as an instrument does to the light that reaches the detector.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        Transmittances on an even axis. (The detector sees light, so that line shape acts on T, not on A.)
    spacing : float
        Distance between points. [cm⁻¹]
    width : float
        Full width at half height; 0 changes nothing. [cm⁻¹]

    Returns
    -------
    array of shape (n, n_points)
        At the ends the first and the last value are taken to go on.

    Raises
    ------
    ParameterError
        A negative width, or a spacing that is not positive.
    """
    if width < 0 or spacing <= 0:
        raise ParameterError(
            f"Line shape of width {width} at a spacing of {spacing}; expected width >= 0, spacing > 0."
        )
    reach = int(np.ceil(1.5 * width / spacing))  # beyond 1.5 widths the Gaussian is below 0.2 %
    if reach == 0:
        return rows
    steps = np.arange(-reach, reach + 1)
    kernel = np.exp2(-((2.0 * steps * spacing / width) ** 2))
    kernel /= kernel.sum()
    n_points = rows.shape[1]
    padded = np.pad(rows, ((0, 0), (reach, reach)), mode="edge")
    result: FloatArray = kernel[reach] * rows
    for step in range(reach):  # the kernel is even: two neighbours share one weight
        result += kernel[step] * (padded[:, step : step + n_points] + padded[:, 2 * reach - step :][:, :n_points])
    return result


def shift_axis(rows: FloatArray, axis: FloatArray, shift: float, stretch: float = 0.0) -> FloatArray:
    """Record on a wrong wavenumber scale: a band at ν appears at ν·(1 + stretch) + shift.

    Parameters
    ----------
    rows : array of shape (n, n_points)
        True ordinates on an even axis.
    axis : array of shape (n_points,)
        Wavenumbers, rising or falling, evenly spaced. [cm⁻¹]
    shift : float
        [cm⁻¹]
    stretch : float, optional
        Relative, as a wrong laser wavelength or a divergent beam causes.

    Returns
    -------
    array of shape (n, n_points)
        By cubic interpolation through four neighbours (Lagrange); beyond the ends the end values go on.
    """
    step = float(axis[-1] - axis[0]) / max(len(axis) - 1, 1)
    wanted = ((axis - shift) / (1.0 + stretch) - axis[0]) / step  # in points
    left = np.floor(wanted).astype(np.intp)
    t = wanted - left
    weights = (
        -t * (t - 1) * (t - 2) / 6,
        (t + 1) * (t - 1) * (t - 2) / 2,
        -(t + 1) * t * (t - 2) / 2,
        (t + 1) * t * (t - 1) / 6,
    )
    last = len(axis) - 1
    return np.asarray(sum(w * rows[:, np.clip(left + k, 0, last)] for k, w in enumerate(weights, start=-1)))


def stray_light(transmittance: FloatArray, fraction: float) -> FloatArray:
    """Return (T + s) / (1 + s): light that never met the sample limits the absorbance that can be seen."""
    return np.asarray((transmittance + fraction) / (1.0 + fraction))


def noise_shape(axis: FloatArray) -> FloatArray:
    """Noise along the axis relative to its least: the source's energy falls off towards both ends, shape (n_points,).

    About 1 from 1000 to 2500 cm⁻¹, 2.5 at 4000 and at 650 (order of magnitude of a room-temperature detector).
    """
    return np.asarray(
        1.0 + 1.5 * ((axis - 1750.0) / 2250.0).clip(0) ** 2 + 1.5 * ((1000.0 - axis) / 350.0).clip(0) ** 2
    )


def detector_noise(transmittance: FloatArray, rng: np.random.Generator, sd: float | FloatArray) -> FloatArray:
    """Add normal noise of constant size to transmittances, so that the noise in A grows as 0.4343·sd/T.

    Parameters
    ----------
    transmittance : array of shape (n, n_points)
        Fractions.
    rng : numpy.random.Generator
    sd : float or array of shape (n_points,)
        Standard deviation; a 100 % line then has this noise. [transmittance]

    Returns
    -------
    array of shape (n, n_points)
        Kept at `LEAST_TRANSMITTANCE` or above.
    """
    noisy = rng.standard_normal(transmittance.shape)
    noisy *= sd
    noisy += transmittance
    return np.maximum(noisy, LEAST_TRANSMITTANCE, out=noisy)
