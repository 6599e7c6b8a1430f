"""Decisions against a limit: accept, reject, or undecided, with a guard band for a stated risk.

Everyday prediction passes here, hence the standard library only; the factor of the guard band (a quantile of Student's
t at 1 - risk) comes from the caller, who has it stored.
"""

import math
from dataclasses import dataclass

from quant.checks import one_of
from quant.errors import ParameterError
from quant.result import Result, documented
from quant.text_table import Row, format_rows

ACCEPT = "accept"
REJECT = "reject"
UNDECIDED = "undecided"
CANNOT_DECIDE = "this method cannot decide this limit"
NOT_APPLICABLE = "not applicable to this spectrum"
OUTCOMES = (NOT_APPLICABLE, CANNOT_DECIDE, ACCEPT, UNDECIDED, REJECT)  # the first two come before any comparison
SIDES = ("upper", "lower")  # the value has to stay below an upper limit, above a lower one
LARGEST_SERIES = 10_000  # degrees of freedom; beyond, Student's t is normal to 1e-5


@dataclass(frozen=True, kw_only=True)
class Decision(Result):
    """One value against one limit."""

    outcome: str = documented("accept, reject, undecided, or why nothing was decided")
    value: float = documented("The value decided upon", "unit of the analyte")
    standard_uncertainty: float = documented("Its standard uncertainty", "unit of the analyte")
    limit: float = documented("The limit", "unit of the analyte")
    side: str = documented("upper: the true value must not exceed the limit; lower: must not fall below it")
    guard_band: float = documented("Factor times standard uncertainty", "unit of the analyte")
    acceptance_limit: float = documented("Accepted on the safe side of this, or at it", "unit of the analyte")
    rejection_limit: float = documented("Rejected beyond this", "unit of the analyte")
    conformity: float | None = documented("Probability that the true value conforms; None where nothing was decided")

    def rows(self) -> list[Row]:
        """Rows of the printed table."""
        return [
            ("decision", self.outcome, ""),
            (f"{self.side} limit", self.limit, ""),
            ("guard band", self.guard_band, ""),
            ("accepted up to" if self.side == "upper" else "accepted from", self.acceptance_limit, ""),
            ("rejected above" if self.side == "upper" else "rejected below", self.rejection_limit, ""),
            ("probability of conformity", self.conformity, ""),
        ]

    def __str__(self) -> str:
        return f"Decision\n{format_rows(self.rows())}"


def guard_band(standard_uncertainty: float, factor: float) -> float:
    """Guard band g = factor·u. [unit of the analyte]

    Parameters
    ----------
    standard_uncertainty : float
        u. [unit of the analyte]
    factor : float
        Quantile of Student's t at 1 - risk (1.645 for 5 % with u known); 0 for simple acceptance.

    Raises
    ------
    ParameterError
        Either is negative or not finite.

    References
    ----------
    .. [1] JCGM 106:2012, clause 8 (from memory): w = r·U, which is factor·u here.
    """
    if not (
        math.isfinite(standard_uncertainty) and standard_uncertainty >= 0 and math.isfinite(factor) and factor >= 0
    ):
        raise ParameterError(
            f"standard_uncertainty = {standard_uncertainty}, factor = {factor}; expected finite numbers, 0 or more."
        )
    return factor * standard_uncertainty


def probability_of_conformity(
    value: float,
    standard_uncertainty: float,
    limit: float,
    *,
    side: str = "upper",
    degrees_of_freedom: float = math.inf,
) -> float:
    """Probability that the true value is on the right side of a limit: Φ((L - x)/u), or Student's t instead of Φ.

    Nothing but the measurement is known of the true value. 1 - p is the specific consumer's risk of accepting.

    Parameters
    ----------
    value, standard_uncertainty, limit : float
        x, u and L. [unit of the analyte]
    side : {"upper", "lower"}
        Which side the limit bounds.
    degrees_of_freedom : float
        Of u, 1 at least; infinite where it is known. Fractions are cut off (GUM, G.4).

    Raises
    ------
    ParameterError
        A negative or non-finite uncertainty, another side, or fewer than one degree of freedom.

    References
    ----------
    .. [1] JCGM 106:2012, clause 7 (from memory).
    """
    distance = (limit - value) * _sign(side)
    if guard_band(standard_uncertainty, 1.0) == 0:
        return 1.0 if distance >= 0 else 0.0
    if not degrees_of_freedom >= 1:
        raise ParameterError(f"degrees_of_freedom = {degrees_of_freedom}; expected 1 or more.")
    return _student_below(distance / standard_uncertainty, degrees_of_freedom)


def decide(
    value: float,
    standard_uncertainty: float,
    limit: float,
    factor: float,
    *,
    side: str = "upper",
    degrees_of_freedom: float = math.inf,
    smallest_decidable: float | None = None,
    applicable: bool = True,
) -> Decision:
    """Decide one value against one limit.

    Accept where x + g ≤ L, reject where x - g > L, otherwise undecided (mirrored for a lower limit). Before that: a
    spectrum to which the calibration does not apply is not decided upon, nor is a limit the method cannot see.

    Parameters
    ----------
    value, standard_uncertainty, limit : float
        x, u and L. [unit of the analyte]
    factor : float
        Of the guard band, see `guard_band`.
    side : {"upper", "lower"}
        Which side the limit bounds.
    degrees_of_freedom : float
        Of u, for the probability of conformity.
    smallest_decidable : float, optional
        The larger of limit of quantification and LOD_max: a limit below it is never decided. [unit of the analyte]
    applicable : bool
        Whether the calibration applies to the spectrum behind the value.

    Raises
    ------
    ParameterError
        Negative or non-finite uncertainty or factor, a value or limit that is not finite, or another side.

    References
    ----------
    .. [1] JCGM 106:2012; ISO 10576-1: three outcomes (from memory).
    """
    band, sign = guard_band(standard_uncertainty, factor), _sign(side)
    if not (math.isfinite(value) and math.isfinite(limit)):
        raise ParameterError(f"value = {value}, limit = {limit}; expected finite numbers.")
    acceptance, rejection = limit - sign * band, limit + sign * band
    if not applicable:
        outcome = NOT_APPLICABLE
    elif smallest_decidable is not None and limit < smallest_decidable:
        outcome = CANNOT_DECIDE
    elif sign * (acceptance - value) >= 0:
        outcome = ACCEPT
    else:
        outcome = REJECT if sign * (value - rejection) > 0 else UNDECIDED
    conformity = None
    if outcome in (ACCEPT, REJECT, UNDECIDED):
        conformity = probability_of_conformity(
            value, standard_uncertainty, limit, side=side, degrees_of_freedom=degrees_of_freedom
        )
    return Decision(
        outcome=outcome,
        value=value,
        standard_uncertainty=standard_uncertainty,
        limit=limit,
        side=side,
        guard_band=band,
        acceptance_limit=acceptance,
        rejection_limit=rejection,
        conformity=conformity,
    )


def replicates_to_decide(value: float, limit: float, factor: float, fixed: float, repeatability: float) -> int | None:
    """Fewest replicates whose mean, at this same value, would settle a decision; None where no number would.

    The standard uncertainty of a mean of m is sqrt(fixed² + repeatability²/m): replicates shrink repeatability only.
    With d = |L - x|/factor the number is repeatability²/(d² - fixed²), rounded up.

    Parameters
    ----------
    value, limit : float
        x and L. [unit of the analyte]
    factor : float
        Of the guard band, see `guard_band`.
    fixed : float
        Standard uncertainty that every replicate shares: calibration, laboratory values. [unit of the analyte]
    repeatability : float
        Standard deviation of one measurement among replicates. [unit of the analyte]

    Returns
    -------
    int or None

    Raises
    ------
    ParameterError
        Negative or non-finite factor, uncertainty or repeatability.
    """
    shared, own = guard_band(fixed, factor), guard_band(repeatability, factor)
    room = (limit - value) ** 2 - shared**2
    if own == 0:
        return 1 if room >= 0 else None
    if room <= 0:
        return None
    needed = own**2 / room
    # A number that is whole but for rounding is not raised; beyond any practice it is none.
    return max(1, math.ceil(needed * (1 - 1e-12))) if math.isfinite(needed) else None


def _sign(side: str) -> float:
    return 1.0 if one_of("side", side, SIDES) == "upper" else -1.0


def _student_below(t: float, degrees_of_freedom: float) -> float:
    """Probability that Student's t lies below t; Abramowitz & Stegun 26.7.3 and 26.7.4 (from memory)."""
    if degrees_of_freedom > LARGEST_SERIES:
        return 0.5 * math.erfc(-t / math.sqrt(2))
    dof = math.floor(degrees_of_freedom)
    root = math.hypot(math.sqrt(dof), t)
    sine, cosine_squared = t / root, dof / root**2
    odd = dof % 2
    term = sine * (math.sqrt(cosine_squared) if odd else 1.0)
    within = 0.0
    for k in range(odd, dof - 1, 2):
        within += term
        term *= cosine_squared * (k + 1) / (k + 2)
    if odd:
        within = 2 / math.pi * (math.atan2(t, math.sqrt(dof)) + within)
    return 0.5 * (1 + within)
