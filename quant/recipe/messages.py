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
    lines: dict[tuple[Any, ...], list[str]] = {}
    for item in error.errors(include_url=False):
        path = tuple(part for part in item["loc"] if not _is_alternative(part))
        lines.setdefault(path, []).append(_one(item, path, model))
    return "\n".join(f"{_where(path, place)}: {' or '.join(dict.fromkeys(texts))}" for path, texts in lines.items())


def _one(item: Any, path: tuple[Any, ...], model: type[BaseModel]) -> str:
    key, found = path[-1] if path else "", item.get("input")
    if item["type"] == "extra_forbidden":
        known = _keys_at(model, path[:-1])
        guess = did_you_mean(str(key), known) or f" Keys there are: {', '.join(known)}."
        return f"unknown key {key!r}.{guess}"
    if item["type"] == "missing":
        return f"the key {key!r} is missing."
    message = item["msg"].removeprefix("Value error, ")
    shown = "" if isinstance(found, dict | BaseModel) else f" (found {found!r})"
    return f"{key}: {message}{shown}." if path else f"{message}{shown}."


def _where(path: tuple[Any, ...], place: str) -> str:
    table = [str(part) for part in path[:-1] if isinstance(part, str)]
    number = [part + 1 for part in path[:-1] if isinstance(part, int)]
    if not table:
        return place
    return f"{place}, [{'.'.join(table)}]" + (f" number {number[0]}" if number else "")


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
