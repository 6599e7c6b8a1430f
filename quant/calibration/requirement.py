"""One line of a table of requirements: what was asked for, what was found, whether it is met, and who asks."""

from dataclasses import dataclass

from quant.result import Result, documented
from quant.text_table import format_number

MET, NOT_MET, NOT_TOLD = "met", "not met", "cannot be told"
FROM_MEMORY = "from memory: confirm against the edition in force"


@dataclass(frozen=True, kw_only=True)
class Requirement(Result):
    """A criterion, what was found, and the verdict."""

    criterion: str = documented("What is asked for")
    found: float | str | None = documented("What was found; none where it cannot be told")
    required: str = documented("What is required of it, in words")
    verdict: str = documented("met, not met, or cannot be told; empty where the line only states what was found")
    unit: str = documented("Unit of what was found", default="")
    remark: str = documented("How it was found, or why it cannot be told", default="")
    source: str = documented("Who asks for it", default="")

    def __str__(self) -> str:
        found = f"{format_number(self.found)} {self.unit}".rstrip()
        return f"{self.criterion}: {found}, required {self.required}: {self.verdict}"


def judged(found: float | None, *, least: float | None = None, most: float | None = None) -> str:
    """Return the verdict on a number that has to be at least or at most another.

    Parameters
    ----------
    found : float or None
    least, most : float, optional
        Bounds, themselves allowed.
    """
    if found is None:
        return NOT_TOLD
    return MET if (least is None or found >= least) and (most is None or found <= most) else NOT_MET


def fulfilled(*, met: bool | None) -> str:
    """Return the verdict on a truth value; None cannot be told."""
    return NOT_TOLD if met is None else MET if met else NOT_MET
