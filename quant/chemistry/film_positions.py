"""Band positions of a polystyrene film, by which the wavenumber scale is checked."""

from dataclasses import dataclass
from typing import Literal

from quant.checks import one_of

Rule = Literal["ph_eur", "jp"]

EDITIONS = {
    "ph_eur": "Ph. Eur. 2.2.24, up to about edition 10, from memory; newer editions re-wrote the chapter: to be "
    "confirmed against the edition in force",
    "jp": "JP 2.25, as used in practice under USP <854>, from memory: to be confirmed against the edition in force",
}
"""Where the tolerances come from. The positions themselves were found on several public pages."""


@dataclass(frozen=True)
class FilmBand:
    """One band of the film.

    Parameters
    ----------
    position : float
        Minimum of the transmission. [cm⁻¹]
    tolerance : float
        Largest permitted distance from it. [cm⁻¹]
    """

    position: float
    tolerance: float


@dataclass(frozen=True)
class FilmTable:
    """Where the bands of a film should be.

    Parameters
    ----------
    bands : tuple of FilmBand
        From high to low wavenumbers.
    source : str
        Whose positions and tolerances.
    """

    bands: tuple[FilmBand, ...]
    source: str


# position, tolerance of Ph. Eur., tolerance of JP [cm⁻¹]
_FILM = (
    (3060.0, 1.5, 1.5),
    (2849.5, 2.0, 1.5),
    (1942.9, 1.5, 1.5),
    (1601.2, 1.0, 1.0),
    (1583.0, 1.0, 1.0),
    (1154.5, 1.0, 1.0),
    (1028.3, 1.0, 1.0),
)


def film_positions(rule: Rule = "ph_eur") -> FilmTable:
    """Return the bands of any polystyrene film with their tolerances.

    Parameters
    ----------
    rule : {"ph_eur", "jp"}
        Whose tolerances; `EDITIONS` names edition and source of each.

    Raises
    ------
    ParameterError
        Another rule.
    """
    column = 1 + list(EDITIONS).index(one_of("rule", rule, tuple(EDITIONS)))
    return FilmTable(tuple(FilmBand(row[0], row[column]) for row in _FILM), EDITIONS[rule])
