"""The spectral axis: values, unit, direction."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from quant.arrays import FloatArray
from quant.checks import as_vector, one_of
from quant.errors import ParameterError
from quant.spectra.frozen import is_frozen, restore
from quant.spectra.segments import median_step
from quant.units import AXIS_UNITS, convert_axis

SAME_POSITION = 1e-3
"""Two axis values are the same position if they differ by less than this share of a point's spacing."""


@dataclass(frozen=True, eq=False)
class SpectralAxis:
    """Positions of the points of a spectrum.

    Parameters
    ----------
    values : array of shape (n_points,)
        Finite, strictly rising or strictly falling; kept read-only. [unit]
    unit : {"cm-1", "nm", "um", "point"}
        "point" (point number) where the source gives none.

    Raises
    ------
    ParameterError
        An unknown unit, no values, or values that are not strictly monotonic.
    """

    values: FloatArray
    unit: str = "point"

    def __init__(self, values: ArrayLike, unit: str = "point") -> None:
        numbers = as_vector("axis", values)
        numbers = numbers if is_frozen(numbers) else numbers.copy()
        one_of("axis unit", unit, tuple(AXIS_UNITS))
        if numbers.size == 0:
            raise ParameterError("The axis holds no values; expected one for every point.")
        before, after = numbers[:-1], numbers[1:]
        onward = after > before if after.size and after[0] > before[0] else after < before
        wrong = np.flatnonzero(~onward)
        if wrong.size:
            place = int(wrong[0]) + 1
            raise ParameterError(
                f"The axis turns or repeats at point {place + 1} ({numbers[place - 1]:g}, then {numbers[place]:g} "
                f"{unit}); expected values that rise or fall throughout."
            )
        numbers.flags.writeable = False
        object.__setattr__(self, "values", numbers)
        object.__setattr__(self, "unit", unit)

    def __setstate__(self, state: dict[str, Any]) -> None:
        restore(self, state)

    def __len__(self) -> int:
        return int(self.values.size)

    def __eq__(self, other: object) -> bool:
        """Same unit and exactly the same values in the same order."""
        return isinstance(other, SpectralAxis) and self.unit == other.unit and np.array_equal(self.values, other.values)

    def __hash__(self) -> int:
        return hash((self.unit, self.values.tobytes()))

    def __repr__(self) -> str:
        return f"SpectralAxis({self})"

    def __str__(self) -> str:
        """Range, unit, number of points, spacing: ``4000 → 650 cm⁻¹, 1676 points, every 2 cm⁻¹``."""
        unit = AXIS_UNITS[self.unit]
        first, last = self.values[0], self.values[-1]
        text = f"{first:g} → {last:g} {unit}, {len(self)} point{'s' if len(self) > 1 else ''}"
        return f"{text}, every {self.spacing:.4g} {unit}" if len(self) > 1 else text

    @property
    def direction(self) -> str:
        """Either "rising" or "falling"."""
        return "falling" if len(self) > 1 and self.values[1] < self.values[0] else "rising"

    @property
    def spacing(self) -> float:
        """Median distance between neighbouring points. [unit]"""
        return median_step(self.values)

    def same_positions(self, other: "SpectralAxis") -> bool:
        """Tell whether `other` has the same positions in the same order, up to rounding of written values."""
        if self.unit != other.unit or len(self) != len(other):
            return False
        return bool(np.abs(self.values - other.values).max() <= SAME_POSITION * max(self.spacing, other.spacing))

    def reversed(self) -> "SpectralAxis":
        """Return the axis read from its other end."""
        return SpectralAxis(self.values[::-1], self.unit)

    def to_unit(self, unit: str) -> "SpectralAxis":
        """Return the axis in another unit (see `quant.units.convert_axis` for what is refused)."""
        return SpectralAxis(convert_axis(self.values, self.unit, unit), unit)
