"""Pydantic's complaints in the words of a recipe."""

import difflib
from collections.abc import Iterable
from typing import Any, get_args

from pydantic import BaseModel, ValidationError


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """Return `` Did you mean '...'?`` or nothing."""
    close = difflib.get_close_matches(word, list(known), n=1)
    return f" Did you mean {close[0]!r}?" if close else ""


def problems(error: ValidationError, place: str, model: type[BaseModel]) -> str:
    """Return one line a problem: where it stands, what was found, what was expected.

    Alternatives of one key (a number or one of some words) are told as one problem.
    """
    found: dict[tuple[Any, ...], list[Any]] = {}
    for item in error.errors(include_url=False):
        path = tuple(part for part in item["loc"] if not _is_alternative(part))
        found.setdefault(path, []).append(item)
    return "\n".join(_told(items, path, place, model) for path, items in found.items())


def _told(items: list[Any], path: tuple[Any, ...], place: str, model: type[BaseModel]) -> str:
    first, expected = items[0], [_expected(item) for item in items]
    if first["type"] == "value_error":  # a table that contradicts itself
        return f"{_where(path, place)}: {first['msg'].removeprefix('Value error, ')}."
    table, key = _table_of(path)
    where = _where(table, place)
    if first["type"] == "extra_forbidden":
        known = _keys_at(model, table)
        there = f" Keys there are: {', '.join(known)}." if known else " There are no keys here."
        return f"{where}: unknown key {key!r}.{did_you_mean(key, known) or there}"
    if first["type"] == "missing":
        return f"{where}: the key {key!r} is missing. Add it."
    return f"{where}: {key} = {first.get('input')!r}; expected {' or '.join(dict.fromkeys(expected))}."


def _expected(item: Any) -> str:
    context = item.get("ctx", {})
    if item["type"] == "too_short":
        return f"{context['min_length']} or more of them, not {context['actual_length']}"
    if item["type"] == "too_long":
        return f"{context['max_length']} of them at most, not {context['actual_length']}"
    if item["type"] == "string_too_short":
        return "a text that is not empty"
    return str(item["msg"]).removeprefix("Input should be ")


def _table_of(path: tuple[Any, ...]) -> tuple[tuple[Any, ...], str]:
    """Split a path into that of the table and the key in it, with its place in a list: ``ranges, entry 2``."""
    keys = [place for place, part in enumerate(path) if isinstance(part, str)]
    last = keys[-1] if keys else 0
    entries = "".join(f", entry {part + 1}" for part in path[last + 1 :])
    return path[:last], f"{path[last]}{entries}" if path else ""


def _where(table: tuple[Any, ...], place: str) -> str:
    names = [part for part in table if isinstance(part, str)]
    number = [part + 1 for part in table if isinstance(part, int)]
    if not names:
        return place
    return f"{place}, [{'.'.join(names)}]" + (f" number {number[0]}" if number else "")


def _is_alternative(part: Any) -> bool:
    """Pydantic names the branch of a union in the path: ``literal['auto']``, ``constrained-int``, ``int``."""
    return isinstance(part, str) and (
        part in {"int", "str", "float", "constrained-int"} or part.startswith(("literal[", "list[", "constrained"))
    )


def _keys_at(model: type[BaseModel], path: tuple[Any, ...]) -> list[str]:
    current: Any = model
    for part in path:
        if isinstance(part, str) and current is not None:
            current = _table_in(current.model_fields[part].annotation) if part in current.model_fields else None
    return list(current.model_fields) if current is not None else []


def _table_in(annotation: Any) -> type[BaseModel] | None:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    return next((found for part in get_args(annotation) if (found := _table_in(part)) is not None), None)
