"""Tables whose entries are imported when they are first used, so that everyday prediction loads only what it needs.

An entry is written as ``"module:name"``: one line to grep, no import at start-up.
"""

from collections.abc import Callable, Iterator, Mapping
from importlib import import_module
from typing import Any, Generic, TypeVar

Entry = TypeVar("Entry")


def fetch(place: str) -> Any:
    """Import what ``"module:name"`` names."""
    module, _, name = place.partition(":")
    return getattr(import_module(module), name)


def later(place: str) -> Callable[..., Any]:
    """Return a function that imports the one at ``"module:name"`` when it is called, and calls it."""

    def call(*arguments: Any) -> Any:
        return fetch(place)(*arguments)

    return call


class LaterTable(Mapping[str, Entry], Generic[Entry]):
    """A read-only table from names to entries; asking for one imports that one only.

    Parameters
    ----------
    places : mapping of str to str
        Name of each entry and where it is, ``"module:name"``.
    """

    def __init__(self, places: Mapping[str, str]) -> None:
        self._places = dict(places)

    def __getitem__(self, name: str) -> Entry:
        entry: Entry = fetch(self._places[name])
        return entry

    def name_of(self, entry: type) -> str:
        """Return the name of a class that the table holds, without importing any other.

        Raises
        ------
        KeyError
            The table does not hold it.
        """
        place = f"{entry.__module__}:{entry.__qualname__}"
        for name, known in self._places.items():
            if known == place:
                return name
        raise KeyError(place)

    def __or__(self, other: "LaterTable[Entry]") -> "LaterTable[Entry]":
        """Return both tables as one."""
        return LaterTable({**self._places, **other._places})

    def __contains__(self, name: object) -> bool:
        return name in self._places

    def __iter__(self) -> Iterator[str]:
        return iter(self._places)

    def __len__(self) -> int:
        return len(self._places)
