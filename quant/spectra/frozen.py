"""What keeps sets unchangeable, also when they come back from another process."""

from collections.abc import Iterator, Mapping
from typing import Any, TypeGuard, TypeVar

import numpy as np

from quant.arrays import FloatArray

Value = TypeVar("Value")


class FrozenMapping(Mapping[str, Value]):
    """A mapping that cannot be changed and, unlike `types.MappingProxyType`, can be sent to another process.

    >>> FrozenMapping({"batch": "B1"}) == {"batch": "B1"}
    True
    """

    __slots__ = ("_entries",)
    _entries: dict[str, Value]

    def __init__(self, entries: Mapping[str, Value]) -> None:
        object.__setattr__(self, "_entries", dict(entries))

    def __getitem__(self, key: str) -> Value:
        return self._entries[key]

    def __iter__(self) -> Iterator[str]:
        return iter(self._entries)

    def __len__(self) -> int:
        return len(self._entries)

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"{type(self).__name__} cannot be changed; make a new one.")

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (dict(self._entries),)

    def __repr__(self) -> str:
        return repr(self._entries)


def is_frozen(values: object) -> TypeGuard[FloatArray]:
    """Tell whether something is an array of doubles that nobody can change any more, so that it need not be copied."""
    if not isinstance(values, np.ndarray) or values.dtype != np.float64 or values.flags.writeable:
        return False
    return bool(values.flags.owndata) or is_frozen(values.base)


def restore(target: object, state: dict[str, Any]) -> None:
    """Give an object its attributes back, arrays read-only again (which pickling forgets)."""
    for value in state.values():
        if isinstance(value, np.ndarray):
            value.flags.writeable = False
    target.__dict__.update(state)
