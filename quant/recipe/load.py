"""Recipes from TOML files, and the data they name."""

import tomllib
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from quant.errors import FileFormatError, RecipeError
from quant.files import decode_text, read_bytes
from quant.readers.read import read_spectra
from quant.readers.reference_column import ColumnOf
from quant.readers.reference_csv import read_reference
from quant.recipe.messages import problems
from quant.recipe.schema import Recipe
from quant.spectra.reference_table import ReferenceTable
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet

LARGEST_RECIPE = 2**20  # bytes


def load_recipe(path: str | Path) -> Recipe:
    """Read a recipe.

    Parameters
    ----------
    path : str or Path
        TOML file; the paths inside it count from its folder.

    Raises
    ------
    RecipeError
        No text, no valid TOML, an unknown key (with a guess of what was meant), a missing key, or a value of the wrong
        kind.
    FileFormatError
        The file cannot be read.
    """
    file = Path(path)
    return recipe_from_text(recipe_text(file), name=file.name, folder=file.parent)


def recipe_text(path: str | Path) -> str:
    """Return the text of a recipe or plan.

    Raises
    ------
    RecipeError
        The file is no text, or far too large for a recipe.
    FileFormatError
        The file cannot be read.
    """
    file = Path(path)
    expected = "expected a recipe, which is a short text file in TOML. Check which file was named."
    if file.is_file() and file.stat().st_size > LARGEST_RECIPE:
        raise RecipeError(f"{file} holds {file.stat().st_size / 2**20:.0f} MiB; {expected}")
    content = read_bytes(file)
    try:
        return decode_text(file, content)
    except FileFormatError:
        raise RecipeError(f"{file} holds binary content; {expected}") from None


def recipe_from_text(text: str, *, name: str = "recipe", folder: str | Path = ".") -> Recipe:
    """Return the recipe that TOML text describes.

    Raises
    ------
    RecipeError
        As `load_recipe`.
    """
    try:
        content: dict[str, Any] = tomllib.loads(text)
    except tomllib.TOMLDecodeError as problem:
        raise RecipeError(f"{name} is no valid TOML: {problem}. Check quotes and brackets at that place.") from None
    try:
        recipe = Recipe.model_validate(content)
    except ValidationError as error:
        raise RecipeError(problems(error, name, Recipe)) from None
    recipe._folder, recipe._text, recipe._name = str(folder), text, name
    return recipe


def analytes_of(recipe: Recipe) -> list[ColumnOf]:
    """Return the recipe's analytes with the columns that hold their values."""
    return [table.column_of() for table in recipe.analyte]


def read_recipe_spectra(recipe: Recipe, files: list[str] | None = None) -> SpectraSet:
    """Read the recipe's spectra, or other files in the way the recipe says."""
    folder = Path(recipe.folder)
    return read_spectra([str(folder / file) for file in files or recipe.spectra.files], recipe.spectra.options())


def read_recipe_reference(recipe: Recipe, file: str | None = None) -> ReferenceTable:
    """Read the recipe's table of reference values, or another file in the way the recipe says."""
    path = Path(recipe.folder) / (file or recipe.reference.file)
    return reference_read_as(recipe, path, analytes_of(recipe), sheet=recipe.reference.sheet)


def reference_read_as(
    recipe: Recipe, path: Path, columns: Sequence[ColumnOf], *, sheet: str | None = None
) -> ReferenceTable:
    """Read reference values of some analytes from any table in the way the recipe says."""
    table = recipe.reference
    return read_reference(
        path,
        columns,
        sample_column=table.sample_column,
        separator=table.separator,
        decimal=table.decimal,
        replicates=table.replicates,
        date_column=table.date_column,
        date_order=table.date_order,
        sheet=sheet,
    )


def load_samples(recipe: Recipe) -> SampleSet:
    """Read spectra and reference values as the recipe says, and join them by sample ID."""
    return pair_samples(
        read_recipe_spectra(recipe),
        read_recipe_reference(recipe),
        unmatched=recipe.reference.unmatched,
        missing=recipe.reference.missing,
    )


def load_validation_samples(recipe: Recipe) -> SampleSet | None:
    """Read and join the separate validation files, if the recipe names any."""
    table = recipe.validation
    if table is None or table.files is None:
        return None
    return pair_samples(
        read_recipe_spectra(recipe, table.files),
        read_recipe_reference(recipe, table.reference_file),
        unmatched=recipe.reference.unmatched,
        missing=recipe.reference.missing,
    )
