"""How many points a table holds, against what its labels say."""

from dataclasses import dataclass

from quant.errors import FileFormatError
from quant.readers.jcamp_dx.labels import Block


@dataclass(frozen=True)
class Scale:
    """What the labels say of the abscissa; None where they say nothing. [XUNITS]"""

    first: float | None
    last: float | None
    step: float | None
    n_points: int | None
    factor: float

    @property
    def span(self) -> float | None:
        """Distance of LASTX from FIRSTX, without sign."""
        return None if self.first is None or self.last is None else abs(self.last - self.first)

    def step_speaks_for(self, n_points: int) -> bool:
        """Tell whether FIRSTX, LASTX and DELTAX together give this number of points."""
        if self.step is None or self.span is None or n_points < 2:
            return False
        return abs(self.span - abs(self.step) * (n_points - 1)) < 0.5 * abs(self.step)

    def step_speaks_against(self, n_points: int) -> bool:
        """Tell whether DELTAX fits NPOINTS better than this number of points."""
        if self.step is None or self.span is None or self.n_points is None or self.n_points < 2:
            return False
        spacing = abs(self.step)
        return abs(self.span / (self.n_points - 1) - spacing) < abs(self.span / (n_points - 1) - spacing)


def agree_on_count(block: Block, found: int, scale: Scale, last_line: int, *, closed: bool = False) -> None:
    """Compare the number of ordinates with NPOINTS.

    NPOINTS may be wrong in a file that has its END: by one if DELTAX does not side with it, by any number if DELTAX
    confirms what was found.

    Parameters
    ----------
    block : Block
        Its deviations are added to.
    found : int
        Number of ordinates.
    scale : Scale
    last_line : int
        The last line of the table.
    closed : bool
        A check line closes the table.

    Raises
    ------
    FileFormatError
        Fewer or more ordinates than the labels account for.
    """
    expected = scale.n_points
    if found < 2:
        raise FileFormatError(block.path, f"found {found} ordinate(s); expected at least 2.", line=last_line)
    if expected is None:
        if not block.ended:
            raise FileFormatError(
                block.path,
                "neither ##NPOINTS= nor ##END=; expected one of them, to tell a whole file from a cut one.",
                line=last_line,
            )
        block.deviates("##NPOINTS= is missing")
    elif found != expected:
        confirmed = scale.step_speaks_for(found)
        by_one = abs(found - expected) == 1 and not scale.step_speaks_against(found)
        if not block.ended or not (confirmed or by_one):
            raise FileFormatError(
                block.path,
                f"found {found} ordinates; expected {expected} (##NPOINTS=). The file is cut or damaged.",
                line=last_line,
            )
        counted = ", the check line is counted in it" if closed and expected == found + 1 else ""
        block.deviates(f"##NPOINTS= is {expected} where {found} ordinates are{counted}")
