"""Where groups and solvents are known to absorb, and where the air does."""

import difflib
from dataclasses import dataclass
from functools import cache

from quant.chemistry.table_file import plain_name, table_rows
from quant.errors import ParameterError

POSITION_ERROR = 3.0  # cm⁻¹, of the positions of liquid solvents
SOLVENT_SOURCE = "positions of the liquids, from memory, ±3 cm⁻¹"
ATMOSPHERE_SOURCE = "Herzberg; HITRAN (from memory)"


@dataclass(frozen=True)
class Band:
    """A stretch of the wavenumber axis where something absorbs.

    Parameters
    ----------
    name : str
        What absorbs.
    low, high : float
        Ends; equal for a position. [cm⁻¹]
    strength, note : str
        In words; empty where nothing is said.
    source : str
        Where it comes from.
    """

    name: str
    low: float
    high: float
    strength: str = ""
    note: str = ""
    source: str = ""


# CO2: ν3 2349.1 with its branches, ν2 667.4 (a sharp Q branch).
CARBON_DIOXIDE = (
    Band("carbon dioxide", 2280.0, 2390.0, "strong", "ν3 about 2349.1", ATMOSPHERE_SOURCE),
    Band("carbon dioxide", 660.0, 675.0, "strong", "ν2 about 667.4, sharp", ATMOSPHERE_SOURCE),
)
# H2O: lines about the origins ν2 1594.8, ν1 3657.1, ν3 3755.9.
WATER_VAPOUR = (
    Band("water vapour", 1350.0, 1900.0, "strong", "lines about ν2 1594.8", ATMOSPHERE_SOURCE),
    Band("water vapour", 3550.0, 3950.0, "strong", "lines about ν1 3657.1 and ν3 3755.9", ATMOSPHERE_SOURCE),
)


def group_bands() -> tuple[Band, ...]:
    """Return the table of characteristic bands, from O-H to B-F. [cm⁻¹]

    References
    ----------
    Ranges from memory of G. Socrates, Infrared and Raman Characteristic Group Frequencies; E. Pretsch et al., Structure
    Determination of Organic Compounds; R. M. Silverstein et al., Spectrometric Identification of Organic Compounds.
    """
    return _groups()


def named_bands(name: str) -> tuple[Band, ...]:
    """Return the bands of a group, or the strongest of a common solvent, by name.

    Parameters
    ----------
    name : str
        "ester C=O", "aromatic ring", "ethyl acetate" ... in any case.

    Returns
    -------
    tuple of Band
        From high to low wavenumbers as far as the table has them so. [cm⁻¹]

    Raises
    ------
    ParameterError
        A name that neither table has.
    """
    word, known = plain_name(name), _by_plain_name()
    if word in known:
        return known[word]
    alike = [known[each][0].name for each in difflib.get_close_matches(word, known, n=3)]
    inside = [bands[0].name for each, bands in known.items() if word and word in each]
    hints = list(dict.fromkeys([*alike, *inside]))[:5]
    such = f", such as {', '.join(map(repr, hints))}" if hints else ""
    raise ParameterError(
        f"{name!r} is no group and no solvent of the tables of bands; expected one of them{such}; or a position such "
        "as 1741, or a range such as [1750, 1735]."
    )


@cache
def _groups() -> tuple[Band, ...]:
    return tuple(
        Band(row["group"], float(row["low"]), float(row["high"]), row["strength"], row["note"], row["source"])
        for row in table_rows("bands.csv")
    )


@cache
def _by_plain_name() -> dict[str, tuple[Band, ...]]:
    known: dict[str, tuple[Band, ...]] = {}
    for row in table_rows("solvent_bands.csv"):
        at = float(row["position"])
        band = Band(row["solvent"], at, at, "strong", row["note"], SOLVENT_SOURCE)
        for name in (row["solvent"], *filter(None, row["also_called"].split(";"))):
            known[plain_name(name)] = (*known.get(plain_name(name), ()), band)
    for band in _groups():
        known[plain_name(band.name)] = (*known.get(plain_name(band.name), ()), band)
    return known
