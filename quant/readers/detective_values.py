"""What the numbers themselves say of axis unit and ordinate, and where they contradict the words of a file."""

from pathlib import Path

import numpy as np

from quant.arrays import FloatArray
from quant.errors import AxisMismatchError, QuantityError
from quant.readers import naming
from quant.readers.options import ReadingOptions

# Spectrometers run from the vacuum ultraviolet (100 nm) to the far infrared (1 mm).
_RANGES = {"nm": (100.0, 1e6), "um": (0.1, 1000.0), "cm-1": (5.0, 1e5)}
# A falling axis from 3500 or more to 1500 or less is in cm⁻¹: in nm it would start beyond the reach of the detectors of
# visible and near-infrared spectrometers (about 3300 nm), in µm beyond the far infrared. Other falling axes (visible
# spectrometers scan downwards) and every rising one stay undecided: numbers alone do not prove their unit.
_WAVENUMBERS_FROM, _WAVENUMBERS_TO = (3500.0, 16000.0), (10.0, 1500.0)

_LEAST_POINTS = 10  # fewer have no baseline
# Lowest point, median, baseline where bands point down (all but the noisiest twentieth is below), highest point.
_SHARES = (0.0, 0.5, 0.95, 1.0)
_PERCENT_BASELINE, _FRACTION_BASELINE = (85.0, 110.0), (0.85, 1.1)
_LOWEST_PERCENT = -5.0  # noise about a band that absorbs everything
_LEAST_BAND = 0.1  # of the baseline: a deeper dip is a band
_OPAQUE = 1.5  # percent; a spectrum nowhere above it may as well be a fraction
_LARGEST_MEDIAN_ABSORBANCE = 10.0


def axis_unit_of(path: Path, values: FloatArray, found: str | None, options: ReadingOptions) -> tuple[str, str]:
    """Return the unit of an axis and the evidence for it, in words.

    Words come first: the file's own, then the option `axis_unit`, which also settles a contradiction. Without words an
    axis that falls from 3500 … 16000 to 10 … 1500 is in cm⁻¹; any other keeps the unit "point", and the evidence says
    which key states it.

    Raises
    ------
    AxisMismatchError
        File and option name different units, or the file's word is contradicted by its numbers.
    """
    unit = naming.agreed_axis_unit(path, found, options)
    first, last = float(values[0]), float(values[-1])
    run = f"{first:g} to {last:g}"
    wavenumbers = _within(first, _WAVENUMBERS_FROM) and _within(last, _WAVENUMBERS_TO)
    if options.axis_unit is not None:
        return unit, ""
    if found is None:
        if wavenumbers:
            return "cm-1", f"axis in cm-1: it falls from {first:g} to {last:g}, as no wavelength axis does"
        return unit, f"axis unit unknown ({run}, no word for it): axis_unit states it"
    low, high = _RANGES.get(found, (-np.inf, np.inf))
    if values.max() < low or values.min() > high or (wavenumbers and found in ("nm", "um")):
        raise AxisMismatchError(
            f"{path}: the file gives its axis in {found!r}, but it runs from {run}, as "
            f"{'wavenumbers in cm-1 do' if wavenumbers else 'another unit does'}. "
            f'If the word is right, set axis_unit = "{found}"; if not, correct it in the file.'
        )
    return unit, f"axis unit {found!r} from the file's words"


def quantity_of(path: Path, values: FloatArray, found: str | None, options: ReadingOptions) -> tuple[str | None, str]:
    """Return what ordinates are (None: nothing says) and the evidence for it, in words.

    Words come first: the option `quantity`, which settles a contradiction, then the file's own. Without words,
    ordinates with a baseline near 100 and bands that point down are percent transmittance; with a baseline near 1 they
    may be absorbance as well.

    Raises
    ------
    QuantityError
        File and option name different ordinates, words contradict numbers, or numbers allow two ordinates.
    """
    quantity = naming.agreed_quantity(path, found, options)
    known = values[np.isfinite(values)]
    if options.quantity is not None or not known.size:
        return quantity, ""
    low, high, middle = float(known.min()), float(known.max()), float(np.median(known))
    span = f"{low:.4g} to {high:.4g}"
    if quantity is None:
        return _from_numbers(path, values, span)
    if quantity.startswith("percent_") and high <= _OPAQUE:
        raise _contradiction(path, quantity, span, quantity.removeprefix("percent_"))
    if quantity == "absorbance" and middle > _LARGEST_MEDIAN_ABSORBANCE:
        raise _contradiction(path, quantity, span, "percent_transmittance")
    if quantity in ("transmittance", "reflectance") and middle > naming.LARGEST_FRACTION:
        if low < _LOWEST_PERCENT or high > 2 * _PERCENT_BASELINE[1]:
            raise _contradiction(path, quantity, span, "arbitrary")
        return f"percent_{quantity}", f"{quantity} in percent: the file names it, and a fraction does not run {span}"
    return quantity, f"{quantity.replace('_', ' ')} from the file's words"


def says_itself(values: FloatArray, quantity: str) -> bool:
    """Tell whether ordinates are absorbance and would be read as absorbance without a word for it."""
    known = values[np.isfinite(values)]
    small = not known.size or float(np.abs(known).mean()) <= naming.LARGEST_MEAN_ABSORBANCE
    down = any(_bands_down(values, baseline) for baseline in (_PERCENT_BASELINE, _FRACTION_BASELINE))
    return quantity == "absorbance" and small and not down


def _from_numbers(path: Path, values: FloatArray, span: str) -> tuple[str | None, str]:
    if _bands_down(values, _PERCENT_BASELINE):
        return "percent_transmittance", (
            f"percent transmittance: ordinates {span}, baseline near 100, bands pointing down; if they are another "
            "quantity, state it as quantity"
        )
    if _bands_down(values, _FRACTION_BASELINE):
        raise QuantityError(
            f"{path}: the ordinates run {span} with a baseline near 1 and bands pointing down, and nothing says what "
            'they are: transmittance, or absorbance? Set quantity = "transmittance" or quantity = "absorbance" under '
            "[spectra]."
        )
    return None, f"absorbance assumed ({span}, no word for it): quantity states it"


def _bands_down(values: FloatArray, baseline: tuple[float, float]) -> bool:
    """Tell whether every spectrum has its upper end at the baseline and most of its points near it, bands below."""
    ordered = np.sort(values, axis=1)  # missing points come last
    last = np.count_nonzero(~np.isnan(values), axis=1) - 1
    if not last.size or last.min() + 1 < _LEAST_POINTS:
        return False
    low, middle, top, high = (ordered[np.arange(len(values)), (last * share).astype(int)] for share in _SHARES)
    allowed = _LOWEST_PERCENT / 100 * baseline[1]
    near = (top >= baseline[0]) & (top <= baseline[1]) & (high <= 1.2 * baseline[1]) & (low >= allowed)
    return bool((near & (top - low > _LEAST_BAND * top) & (top - middle < middle - low)).all())


def _contradiction(path: Path, named: str, span: str, other: str) -> QuantityError:
    alike = named.removeprefix("percent_") == other.removeprefix("percent_")
    remedy = f'set quantity = "{other}" if not.' if alike else "correct it in the file if not."
    return QuantityError(
        f"{path}: the file names its ordinate {named!r}, but it runs {span}, as {other!r} does. "
        f'Set quantity = "{named}" under [spectra] if the word is right; {remedy}'
    )


def _within(value: float, limits: tuple[float, float]) -> bool:
    return limits[0] <= value <= limits[1]
