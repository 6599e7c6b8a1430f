"""Limits of residual solvents per ICH Q3C: class, permitted daily exposure, concentration for a dose."""

import difflib
import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache

from quant.chemistry.table_file import plain_name, table_rows
from quant.errors import ParameterError
from quant.result import Result, documented

EDITION = "ICH Q3C(R8), from memory, to be confirmed against the edition in force"
OPTION_1_DOSE = 10.0  # g/day, the dose that the table's concentrations are for

# Sources contradict each other here: class 3 with 62.5 mg/day, or class 2 with 640 ppm. Neither is printed.
UNRESOLVED = ("triethylamine",)


@dataclass(frozen=True, kw_only=True)
class SolventLimit(Result):
    """The limit of one residual solvent."""

    solvent: str = documented("Name in the table")
    solvent_class: int = documented("1: to be avoided; 2: to be limited; 3: of low toxic potential")
    pde: float | None = documented("Permitted daily exposure; none for class 1, at least so much for class 3", "mg/day")
    ppm: float = documented("Limit of the concentration", "mg/kg")
    dose_g: float | None = documented("Daily dose that the limit is for; none for class 1, whatever the dose", "g/day")
    source: str = documented("Where the numbers come from")
    edition: str = documented("Edition of the guideline")

    def __str__(self) -> str:
        """The limit in one line: "acetonitrile: 410 mg/kg (class 2, 4.1 mg/day, dose 10 g/day; ICH Q3C(R8) ...)"."""
        parts = [f"class {self.solvent_class}"]
        if self.pde is not None:
            parts.append(f"{'at least ' if self.solvent_class == 3 else ''}{self.pde:g} mg/day")
        if self.dose_g is not None:
            parts.append(f"dose {self.dose_g:g} g/day")
        return f"{self.solvent}: {self.ppm:g} mg/kg ({', '.join(parts)}; {self.edition})"


@dataclass(frozen=True, kw_only=True)
class DailyIntake(Result):
    """What all parts of a product bring of one solvent in a day (option 2)."""

    solvent: str = documented("Name in the table")
    dose_g: float = documented("Mass of all parts together", "g/day")
    intake: float = documented("Solvent in all parts together", "mg/day")
    pde: float = documented("Permitted daily exposure", "mg/day")
    ppm: float = documented("Solvent in the product", "mg/kg")
    passes: bool = documented("Whether the intake is at most the permitted daily exposure")
    edition: str = documented("Edition of the guideline")


def solvent_limit(name: str, dose_g: float | None = None) -> SolventLimit:
    """Return the limit of a residual solvent.

    Parameters
    ----------
    name : str
        In any case and spelling of hyphens and commas; common second names are known ("DMF", "isopropanol").
    dose_g : float, optional
        Daily dose; default 10 g, as in option 1, with the concentration as the table prints it. The limits of class 1
        are concentrations and do not depend on it. [g/day]

    Returns
    -------
    SolventLimit

    Raises
    ------
    ParameterError
        A solvent that the table does not have, or a dose that is not above 0.

    References
    ----------
    ICH Q3C(R8), from memory: concentration [ppm] = 1000 * PDE [mg/day] / dose [g/day].
    """
    if dose_g is not None and not (math.isfinite(dose_g) and dose_g > 0):
        raise ParameterError(f"dose = {dose_g} g/day; expected a number above 0.")
    row = _row(name)
    pde, ppm = float(row["pde"]) if row["pde"] else None, float(row["ppm"])
    if pde is not None and dose_g is not None and dose_g != OPTION_1_DOSE:
        ppm = 1000 * pde / dose_g
    return SolventLimit(
        solvent=row["solvent"],
        solvent_class=int(row["class"]),
        pde=pde,
        ppm=ppm,
        dose_g=None if pde is None else dose_g or OPTION_1_DOSE,
        source=row["source"],
        edition=EDITION,
    )


def daily_intake(name: str, parts: Sequence[tuple[float, float]]) -> DailyIntake:
    """Return what a product brings of a solvent in a day, and whether that is permitted (option 2).

    Parameters
    ----------
    name : str
        As in `solvent_limit`.
    parts : sequence of (mass, concentration)
        Drug substance and excipients: taken in a day [g/day], and solvent in them. [mg/kg]

    Returns
    -------
    DailyIntake

    Raises
    ------
    ParameterError
        A solvent without a permitted daily exposure, no parts, or numbers below 0.
    """
    limit = solvent_limit(name)
    if limit.pde is None:
        raise ParameterError(
            f"{limit.solvent} is of class 1 and has no permitted daily exposure; expected a solvent of class 2 or 3. "
            f"Hold every part against {limit.ppm:g} mg/kg."
        )
    if not parts or not all(math.isfinite(v) and v >= 0 for part in parts for v in part):
        raise ParameterError("parts of a product: expected at least one (mass, concentration), no number below 0.")
    dose, intake = math.fsum(mass for mass, _ in parts), math.fsum(mass * ppm for mass, ppm in parts) / 1000
    if dose == 0:
        raise ParameterError("the parts of the product weigh nothing; expected a mass above 0.")
    return DailyIntake(
        solvent=limit.solvent,
        dose_g=dose,
        intake=intake,
        pde=limit.pde,
        ppm=1000 * intake / dose,
        passes=intake <= limit.pde,
        edition=EDITION,
    )


def solvent_names() -> tuple[str, ...]:
    """Return the solvents that have a limit, by class and name."""
    return tuple(row["solvent"] for row in table_rows("solvent_limits.csv"))


@cache
def _by_plain_name() -> dict[str, dict[str, str]]:
    rows = table_rows("solvent_limits.csv")
    return {plain_name(each): row for row in rows for each in (row["solvent"], *row["also_called"].split(";")) if each}


def _row(name: str) -> dict[str, str]:
    word, known = plain_name(name), _by_plain_name()
    if word in known:
        return known[word]
    if word in UNRESOLVED:
        raise ParameterError(
            f"{name!r} is left out of the table of ICH Q3C because our sources contradict each other on it; expected a "
            "limit of your own. Look it up in the edition in force and state it as a number."
        )
    alike = [known[each]["solvent"] for each in difflib.get_close_matches(word, known, n=3)]
    hint = f" Did you mean {' or '.join(dict.fromkeys(alike))}?" if alike else ""
    raise ParameterError(
        f"{name!r} is not in the table of ICH Q3C; expected one of its {len(solvent_names())} solvents.{hint} A limit "
        "from elsewhere can be stated as a number."
    )
