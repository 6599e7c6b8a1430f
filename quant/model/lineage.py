"""Where a model comes from: its number, its parents, the data and the verdict that made it."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Self

from quant.spectra.provenance import Source


@dataclass(frozen=True, kw_only=True)
class Ancestor:
    """A model that another one was made from.

    Attributes
    ----------
    number : int
        1 is the first calibration.
    fingerprint : str
        SHA-256 over everything that it held, see `quant.model.identity.fingerprint_of`.
    state : str
        Its state when the next model was made from it.
    made_by : str
        "calibration", the remedy, or "confirmation".
    verdict : str
        The verdict that called for it; empty for a first calibration.
    made_from : tuple of Source
        Files of the spectra and values that it was made from.
    samples : tuple of str
        Samples that took part in making it; empty in the first models of this format.
    """

    number: int
    fingerprint: str
    state: str
    made_by: str
    verdict: str = ""
    made_from: tuple[Source, ...] = ()
    samples: tuple[str, ...] = ()

    def told(self) -> str:
        """Everything in one line."""
        n = len(self.made_from)
        files = f" from {n} file{'s' * (n > 1)}" if n else ""
        why = f", because {self.verdict}" if self.verdict else ""
        return f"model {self.number} [{self.fingerprint[:16]}]: {self.made_by}{files}{why}; state {self.state}"


@dataclass(frozen=True, kw_only=True)
class Lineage:
    """A model's own number and making, and its ancestors, the first calibration first."""

    number: int = 1
    made_by: str = "calibration"
    verdict: str = ""
    made_from: tuple[Source, ...] = ()
    samples: tuple[str, ...] = ()
    ancestors: tuple[Ancestor, ...] = ()

    @property
    def parent(self) -> Ancestor | None:
        """The model that this one was made from."""
        return self.ancestors[-1] if self.ancestors else None

    @classmethod
    def from_plain(cls, plain: Mapping[str, Any] | None) -> Self:
        """Return what `dataclasses.asdict` turned into plain values; None is a first calibration."""
        if plain is None:
            return cls()
        ancestors = tuple(Ancestor(**_with_records(entry)) for entry in plain["ancestors"])
        return cls(**{**_with_records(plain), "ancestors": ancestors})


def took_part(lineage: Lineage) -> frozenset[str]:
    """Return the samples that took part in making a model or one of its ancestors."""
    return frozenset(lineage.samples).union(*(entry.samples for entry in lineage.ancestors))


def _with_records(plain: Mapping[str, Any]) -> dict[str, Any]:
    sources = tuple(Source(**source) for source in plain["made_from"])
    return {**plain, "made_from": sources, "samples": tuple(plain["samples"])}
