"""How many validation samples it takes to know RMSEP."""

from dataclasses import dataclass

from quant.errors import ParameterError
from quant.result import Result, documented
from quant.statistics.quantiles import rmse_confidence_interval
from quant.text_table import format_columns

LISTED = (10, 15, 20, 25, 30, 40, 60, 100, 200)
_MOST = 100_000


@dataclass(frozen=True, kw_only=True)
class RmsepPrecision(Result):
    """How well n validation samples tell RMSEP."""

    n_samples: int = documented("Number of validation samples")
    low: float = documented("Lower 95 % limit, below RMSEP", "%")
    high: float = documented("Upper 95 % limit, above RMSEP", "%")


@dataclass(frozen=True, kw_only=True)
class ValidationSize(Result):
    """How many validation samples are needed."""

    planned: int = documented("Validation samples planned")
    wanted: float = documented("Precision wanted of RMSEP: both 95 % limits within", "± %")
    needed: int = documented("Fewest validation samples that reach it")
    table: tuple[RmsepPrecision, ...] = documented("Limits for other numbers, and for those two")

    def __str__(self) -> str:
        """The answer and the table."""
        marks = {self.planned: "planned", self.needed: f"needed for ±{self.wanted:g} %"}
        if self.planned == self.needed:
            marks[self.needed] = f"planned, needed for ±{self.wanted:g} %"
        return format_columns(
            ("samples", "95 % from", "to", ""),
            [(p.n_samples, f"{p.low:+.0f} %", f"{p.high:+.0f} %", marks.get(p.n_samples, "")) for p in self.table],
        )


def rmsep_precision(n_samples: int) -> RmsepPrecision:
    """95 % limits of RMSEP for a number of validation samples, in percent of it.

    Raises
    ------
    NotEnoughDataError
        No sample.

    References
    ----------
    .. [1] n·RMSEP²/σ² is chi-square with n degrees of freedom for independent normal errors of mean zero (textbooks).
    """
    low, high = rmse_confidence_interval(1.0, n_samples)
    return RmsepPrecision(n_samples=n_samples, low=100 * (low - 1), high=100 * (high - 1))


def validation_size(planned: int, within: float) -> ValidationSize:
    """Fewest samples whose 95 % limits of RMSEP lie within ± `within` % of it, and a table.

    Parameters
    ----------
    planned : int
        Validation samples planned; 0 leaves them out of the table.
    within : float
        [%]

    Raises
    ------
    ParameterError
        A precision that more than 100 000 samples would be needed for.
    """
    if not _reaches(_MOST, within):
        raise ParameterError(f"RMSEP within {within:g} % takes more than {_MOST} samples; expected a wider limit.")
    below, needed = 0, _MOST
    while needed - below > 1:  # the limits narrow with every sample
        middle = (below + needed) // 2
        below, needed = (below, middle) if _reaches(middle, within) else (middle, needed)
    counts = sorted({*LISTED, needed, *([planned] if planned else [])})
    return ValidationSize(
        planned=planned, wanted=within, needed=needed, table=tuple(rmsep_precision(n) for n in counts)
    )


def _reaches(n: int, within: float) -> bool:
    found = rmsep_precision(n)
    return max(-found.low, found.high) <= within
