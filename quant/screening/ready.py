"""The winner as a recipe for `calibrate`."""

import os
from pathlib import Path
from typing import Any

import tomli_w

from quant.recipe.schema import Recipe

FILES = (("spectra", "files"), ("reference", "file"), ("validation", "files"), ("validation", "reference_file"))


def recipe_text(recipe: Recipe, folder: str | Path, heading: str) -> str:
    """Return a recipe as TOML text that says only what differs from the defaults.

    Parameters
    ----------
    recipe : Recipe
    folder : str or Path
        Where the text will stand: the paths in it will count from there.
    heading : str
        Put before it as comments.
    """
    content: dict[str, Any] = recipe.model_dump(mode="json", exclude_unset=True, exclude_none=True)
    content["preprocessing"] = recipe.preprocessing
    for table, key in FILES:
        if key in content.get(table, {}):
            found = content[table][key]
            moved = [_moved(one, recipe.folder, folder) for one in ([found] if isinstance(found, str) else found)]
            content[table][key] = moved[0] if isinstance(found, str) else moved
    comments = "\n".join(f"# {line}".rstrip() for line in heading.splitlines())
    return f"{comments}\n\n{tomli_w.dumps(content)}"


def _moved(path: str, old: str | Path, new: str | Path) -> str:
    if Path(path).is_absolute():
        return path
    joined = Path(old).resolve() / path
    try:
        return Path(os.path.relpath(joined, Path(new).resolve())).as_posix()
    except ValueError:  # another drive
        return joined.as_posix()
