"""What a model has to keep so that it can be judged after a service visit."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Self


@dataclass(frozen=True, kw_only=True)
class MonitoringLimit:
    """How large one change of the instrument may be before the calibration no longer does what is asked of it.

    Attributes
    ----------
    kind : str
        shift, stretch, gain, offset, slope, resolution, noise or vapour.
    size : float or None
        The smallest size, of either sign, that costs the allowed bias or the allowed SEP; None beyond `tried`.
    tried : float
        The largest size that was tried.
    unit : str
        Unit of both.
    costs : str
        "bias" or "SEP": what is used up first; empty where nothing is.
    """

    kind: str
    size: float | None
    tried: float
    unit: str
    costs: str

    def told(self) -> str:
        """The limit in words."""
        unit = f" {self.unit}" if self.unit else ""
        if self.size is None:
            return f"{self.kind}: no size up to {self.tried:g}{unit} costs what is allowed"
        return f"{self.kind}: {self.size:.3g}{unit} costs the allowed {self.costs}"


@dataclass(frozen=True, kw_only=True)
class RevalidationBasis:
    """What the calibration may lose, what it was shown to do, and what would break it.

    Attributes
    ----------
    allowed_bias, allowed_sep : float
        The largest bias, its sign gone, and the largest SEP. [unit of the analyte]
    source : str
        Where these two come from.
    sep : float
        SEP on samples that took no part, before any service. [unit of the analyte]
    n_samples : int
        How many there were.
    sep_source : str
        Independent validation, internal test, or cross-validation.
    monitoring : tuple of MonitoringLimit
    """

    allowed_bias: float
    allowed_sep: float
    source: str
    sep: float
    n_samples: int
    sep_source: str
    monitoring: tuple[MonitoringLimit, ...] = ()

    @classmethod
    def from_plain(cls, plain: Mapping[str, Any] | None) -> Self | None:
        """Return what `dataclasses.asdict` turned into plain values."""
        if plain is None:
            return None
        return cls(**{**plain, "monitoring": tuple(MonitoringLimit(**entry) for entry in plain["monitoring"])})
