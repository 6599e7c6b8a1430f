r"""The habit shared by all results: a frozen record, documented field by field, that turns into JSON.

A result class is a frozen, keyword-only dataclass derived from `Result`, its fields declared by `documented`::

    @dataclass(frozen=True, kw_only=True, eq=False)       # eq=False wherever a field is an array
    class Drift(Result):
        '''How far the check sample moved.'''

        shift: float = documented("Mean of predicted - reference", "% m/m")

        def rows(self) -> list[Row]:                      # what tables and reports show: (name, value, unit)
            return [("shift", self.shift, "% m/m")]

        def __str__(self) -> str:                         # a heading and the rows; no arithmetic here
            return "Drift\n" + format_rows(self.rows())

`rows` and `__str__` are left to each class, because only it knows what belongs at the top of its table.
"""

import json
import math
from collections.abc import Mapping, Set
from dataclasses import dataclass, field, fields, is_dataclass
from datetime import date
from enum import Enum
from pathlib import Path
from typing import Any

import numpy as np


def documented(doc: str, unit: str = "", **kwargs: Any) -> Any:
    """Declare a dataclass field together with its documentation.

    Parameters
    ----------
    doc : str
        What the field means.
    unit : str
        Its unit; empty where it has none.
    **kwargs
        Passed on to `dataclasses.field`. ``metadata={"json": False}`` keeps the field out of the JSON form.
    """
    metadata = {"doc": doc, "unit": unit, **kwargs.pop("metadata", {})}
    return field(metadata=metadata, **kwargs)


def field_docs(cls: type[Any]) -> dict[str, str]:
    """Return what each key of `cls` in JSON means, its unit in [ ], in the order of the fields.

    Raises
    ------
    TypeError
        A field of the class was not declared by `documented`.
    """
    shown = [item for item in fields(cls) if _in_json(item.metadata)]
    bare = [item.name for item in shown if not item.metadata.get("doc")]
    if bare:
        raise TypeError(f"{cls.__name__} has undocumented fields: {', '.join(bare)}. Declare them by `documented`.")
    return {item.name: _with_unit(item.metadata["doc"], item.metadata.get("unit", "")) for item in shown}


def jsonable(value: object) -> Any:
    """Return `value` in the types JSON knows: NaN and infinities become null, a path its file name.

    Raises
    ------
    TypeError
        A type that has no agreed form in JSON.
    """
    match value:
        case Enum():  # before str and int, which some enumerations also are
            return jsonable(value.value)
        case None | str() | bool() | int():
            return value
        case np.bool_() | np.integer():
            return value.item()
        case float() | np.floating():
            return float(value) if math.isfinite(value) else None
        case Path():
            return value.name  # a folder of this machine means nothing elsewhere
        case date():
            return value.isoformat()
        case Mapping():
            return {str(jsonable(key)): jsonable(entry) for key, entry in value.items()}
        case np.ndarray():
            return jsonable(value.tolist())
        case list() | tuple():
            return [jsonable(entry) for entry in value]
        case Set():
            return [jsonable(entry) for entry in sorted(value)]
    if is_dataclass(value) and not isinstance(value, type):
        return {item.name: jsonable(getattr(value, item.name)) for item in fields(value) if _in_json(item.metadata)}
    raise TypeError(
        f"a {type(value).__name__} has no agreed form in JSON; give it one in quant/result.py, "
        'or mark its field with metadata={"json": False}.'
    )


@dataclass(frozen=True, kw_only=True, eq=False)  # eq=False: else children that decline == would inherit "always equal"
class Result:
    """Base of every result: a frozen record that prints its own table and turns into JSON with documented keys."""

    def to_dict(self) -> dict[str, Any]:
        """Return the fields by name, nested records included, in types that JSON knows."""
        record: dict[str, Any] = jsonable(self)
        return record

    def to_json(self) -> str:
        """Return `to_dict` as JSON text, indented by two, with no NaN in it."""
        return json.dumps(self.to_dict(), indent=2, ensure_ascii=False, allow_nan=False)


def _in_json(metadata: Mapping[Any, Any]) -> bool:
    return bool(metadata.get("json", True))


def _with_unit(doc: str, unit: str) -> str:
    return f"{doc} [{unit}]" if unit else doc
