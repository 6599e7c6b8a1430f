"""Beer-Lambert truth: pure components made of bands, and mixtures of them, before any instrument has touched them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_matrix, as_vector, name_some
from quant.errors import ParameterError

# Area of a band = height · FWHM · factor.
GAUSSIAN_AREA = float(np.sqrt(np.pi / np.log(16.0)))  # 1.064467
LORENTZIAN_AREA = float(np.pi / 2)  # 1.570796

LORENTZIAN_SHARE = {"gaussian": 0.0, "mixed": 0.5, "lorentzian": 1.0}
"""Share of the Lorentzian in a band's shape; the rest is a Gaussian of the same height and width (pseudo-Voigt)."""


class Band(NamedTuple):
    """One absorption band.

    Attributes
    ----------
    position : float
        Where its maximum lies. [cm⁻¹]
    width : float
        Full width at half the height. [cm⁻¹]
    height : float
        Absorbance at the maximum for one unit of concentration (and of path length).
    shape : {"gaussian", "lorentzian", "mixed"}
        "mixed" is half Gaussian, half Lorentzian of the same width.
    """

    position: float
    width: float
    height: float
    shape: str = "mixed"


@dataclass(frozen=True)
class PureComponent:
    """A substance as a sum of bands.

    Parameters
    ----------
    name : str
        As messages and tables name it.
    bands : sequence of Band, or of (position, width, height, shape)
        Position and full width at half height [cm⁻¹], height [absorbance per unit of concentration].

    Raises
    ------
    ParameterError
        A width that is not positive, a number that is not finite, or an unknown shape.
    """

    name: str
    bands: tuple[Band, ...]

    def __init__(self, name: str, bands: Sequence[Band | tuple[float, float, float, str]]) -> None:
        listed = tuple(Band(*band) for band in bands)
        wrong = [band for band in listed if not (np.isfinite(band[:3]).all() and band.width > 0)]
        if wrong:
            raise ParameterError(
                f"Bands of {name} at {name_some(band.position for band in wrong)} cm⁻¹: expected finite numbers and a "
                "width above 0."
            )
        strange = sorted({band.shape for band in listed} - set(LORENTZIAN_SHARE))
        if strange:
            raise ParameterError(
                f"{name} has bands of shape {name_some(map(repr, strange))}; expected one of "
                f"{', '.join(LORENTZIAN_SHARE)}."
            )
        object.__setattr__(self, "name", name)
        object.__setattr__(self, "bands", listed)

    def scaled(self, factor: float) -> "PureComponent":
        """Return the component with every height multiplied: 0.01 turns heights at 100 % into heights per percent."""
        return replace(self, bands=tuple(band._replace(height=band.height * factor) for band in self.bands))

    def broadened(self, factor: float, shift: float = 0.0) -> "PureComponent":
        """Return the component with wider, lower, shifted bands of the same area, as a disordered solid has them.

        Parameters
        ----------
        factor : float
            New width divided by old width.
        shift : float, optional
            Added to every position. [cm⁻¹]
        """
        return replace(
            self,
            bands=tuple(
                Band(band.position + shift, band.width * factor, band.height / factor, band.shape)
                for band in self.bands
            ),
        )

    def spectrum(self, axis: ArrayLike) -> FloatArray:
        """Return the absorbance of one unit of concentration on an axis [cm⁻¹], shape (n_points,)."""
        points = as_vector("axis", axis)
        total = np.zeros_like(points)
        for band in self.bands:
            total += band_profile(points, band)
        return total


def band_profile(axis: FloatArray, band: Band) -> FloatArray:
    """Absorbance of one band along an axis.

    Parameters
    ----------
    axis : array of shape (n_points,)
        Wavenumbers. [cm⁻¹]
    band : Band
        Position, full width at half height, height, shape.

    Returns
    -------
    array of shape (n_points,)
        Absorbance; its integral over all wavenumbers is height · width · 1.064467 (Gaussian) or 1.570796 (Lorentzian).
    """
    squared = ((axis - band.position) / (0.5 * band.width)) ** 2
    share = LORENTZIAN_SHARE[band.shape]
    profile = np.zeros_like(axis)
    if share < 1.0:
        profile += (1.0 - share) * np.exp2(-squared)
    if share > 0.0:
        profile += share / (1.0 + squared)
    return np.asarray(band.height * profile)


def pure_spectra(components: Sequence[PureComponent], axis: ArrayLike) -> FloatArray:
    """Absorbances of one unit of each component, shape (n_components, n_points).

    Parameters
    ----------
    components : sequence of PureComponent
        One a row of the result.
    axis : array of shape (n_points,)
        Wavenumbers, rising or falling. [cm⁻¹]

    Raises
    ------
    ParameterError
        No component, or an axis that is not a row of finite numbers.
    """
    if not components:
        raise ParameterError("No component to make spectra of; expected at least one.")
    return np.stack([component.spectrum(axis) for component in components])


def mixture_spectra(components: Sequence[PureComponent], concentrations: ArrayLike, axis: ArrayLike) -> FloatArray:
    """Absorbances of mixtures that obey Beer and Lambert, free of noise.

    Parameters
    ----------
    components : sequence of PureComponent
        One a column of `concentrations`.
    concentrations : array of shape (n_samples, n_components)
        Amounts in the unit that the components' heights are for.
    axis : array of shape (n_points,)
        Wavenumbers, rising or falling. [cm⁻¹]

    Returns
    -------
    array of shape (n_samples, n_points)
        A = C·K: sum over the components of concentration times absorbance per unit.

    Raises
    ------
    ParameterError
        The number of columns is not the number of components, or a number is not finite.
    """
    amounts = as_matrix("concentrations", concentrations)
    if amounts.shape[1] != len(components):
        raise ParameterError(
            f"Concentrations of {amounts.shape[1]} component(s) for {len(components)} component(s) "
            f"({name_some(component.name for component in components)}); expected one column each."
        )
    return np.asarray(amounts @ pure_spectra(components, axis))
