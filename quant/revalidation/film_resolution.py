"""Resolution checks on a polystyrene film."""

from dataclasses import dataclass

import numpy as np

from quant.result import Result, documented
from quant.revalidation.fourier import FourierSeries

CLEAR = ((3990.0, 2.0), (2050.0, 5.0))  # cm⁻¹, where the film transmits all: place, half width averaged over
THIN = (
    "alone it is weak evidence: on an interferometer it follows the film's thickness (0.032 or 0.038 mm are usual) "
    "rather than the resolution"
)


@dataclass(frozen=True)
class _Rule:
    high: float  # where the film transmits more [cm⁻¹]
    low: float  # where it absorbs [cm⁻¹]
    limit: float
    absorbance: bool
    source: str


# Limits: JP 14 suppl. 1 / Ph. Eur. 4.0, found on a public page quoting them; Ph. Eur. 2.2.24 (FT form), from memory.
RULES = (
    _Rule(2870.0, 2850.0, 18.0, False, "JP 14 suppl. 1 / Ph. Eur. 4.0, film of about 0.04 mm"),
    _Rule(1589.0, 1583.0, 12.0, False, "JP 14 suppl. 1 / Ph. Eur. 4.0, film of about 0.04 mm"),
    _Rule(
        2870.0, 2849.5, 0.33, True, "Ph. Eur. 2.2.24 for interferometers, film of about 0.035 mm, from memory: confirm"
    ),
    _Rule(
        1589.0, 1583.0, 0.08, True, "Ph. Eur. 2.2.24 for interferometers, film of about 0.035 mm, from memory: confirm"
    ),
)


@dataclass(frozen=True, kw_only=True, eq=False)
class ResolutionCheck(Result):
    """How much deeper the film's spectrum is at one place than at its neighbour."""

    name: str = documented("Which difference, T for transmittance, A for absorbance")
    value: float = documented("The difference found, after the baseline was brought to 100 %T")
    limit: float = documented("What it has to reach")
    unit: str = documented("Unit of both")
    passed: bool = documented("Whether it does")
    source: str = documented("Where the limit comes from")
    words: str = documented("The finding in words")


def resolution_checks(film: FourierSeries) -> tuple[ResolutionCheck, ...]:
    """Judge the resolution by four differences, those that the axis covers.

    Parameters
    ----------
    film : FourierSeries
        Transmittance of the film. Where the axis reaches, it is divided by the straight line through its values about
        4000 and 2050 cm⁻¹, since scattering lowers all transmittances.
    """
    low, high = film.start, film.start + film.step * (film.cosines.size - 1)
    return tuple(_check(film, rule) for rule in RULES if low <= rule.low and rule.high <= high)


def difference(rule_high: float, rule_low: float, film: FourierSeries, *, absorbance: bool) -> float:
    """Return T(high) − T(low) [%T] or A(low) − A(high) of a film, after its baseline was brought to 100 %T."""
    above, below = (max(float(film.at(place)[0]) / _clear(film, place), 1e-6) for place in (rule_high, rule_low))
    return float(np.log10(above / below)) if absorbance else 100.0 * (above - below)


def _check(film: FourierSeries, rule: _Rule) -> ResolutionCheck:
    value = difference(rule.high, rule.low, film, absorbance=rule.absorbance)
    unit = "A" if rule.absorbance else "%T"
    passed = value > rule.limit if rule.absorbance else value >= rule.limit
    name = f"A({rule.low:g}) − A({rule.high:g})" if rule.absorbance else f"T({rule.high:g}) − T({rule.low:g})"
    words = f"Resolution: {name} = {value:.3g} {unit}, {'reaches' if passed else 'misses'} {rule.limit:g} {unit}"
    if not passed and rule.low > 2000:
        words += f"; {THIN}"
    return ResolutionCheck(
        name=name, value=value, limit=rule.limit, unit=unit, passed=passed, source=rule.source, words=words
    )


def _clear(film: FourierSeries, place: float) -> float:
    """Transmittance that nothing absorbed would have at a place; 1 where the axis does not show it."""
    low, high = film.start, film.start + film.step * (film.cosines.size - 1)
    if low > CLEAR[1][0] - 10.0 or high < CLEAR[0][0] + 5.0:
        return 1.0
    (top, t), (bottom, b) = (
        (centre, float(film.at(centre + np.linspace(-half, half, 11)).mean())) for centre, half in CLEAR
    )
    level = b + (t - b) * (place - bottom) / (top - bottom)
    return level if level > 0 else 1.0
