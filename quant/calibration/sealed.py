"""Sealed validation: recipe and criteria are fingerprinted before validation values are opened, and looks are counted.

A validation set is independent once. Whoever looks, changes the recipe and looks again has fitted the recipe to it. The
ledger is one small file in the folder of the report, `validation-looks.json`: it counts per validation set (by its IDs
and values) every calibration that was held against it. The same recipe on the same data is the same look: repeating it
teaches nothing. Calibrations written into another folder, or from Python, are not in it.
"""

import hashlib
import json
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from quant.errors import FileFormatError
from quant.files import read_bytes, write_text
from quant.recipe.schema import Recipe
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet

FILE = "validation-looks.json"
NO_PART = {"title", "acceptance", "decision", "chemistry", "screen", "revalidation"}  # they change no prediction
WHAT = "Looks at validation sets; see the report. Do not edit: the count is the proof of independence."
NOT_COUNTED = "not counted: calibrated from Python without a ledger"


@dataclass(frozen=True, kw_only=True)
class SealResult(Result):
    """Whether criteria were fixed beforehand, and how often this validation set was looked at."""

    recipe: str = documented("Fingerprint of what the recipe does to the data, SHA-256")
    criteria: str = documented("Fingerprint of the criteria of acceptance; empty without any")
    validation: str = documented("Fingerprint of the IDs and reference values of the validation samples")
    look: int | None = documented("Which look at this validation set this is; none where looks are not counted")
    looks: int | None = documented("Different looks at it so far")
    fixed_beforehand: bool | None = documented(
        "Whether these criteria were fixed before the first look; none where there are none or looks are not counted"
    )
    statement: str = documented("What follows from it")

    @property
    def independent(self) -> bool:
        """False from the second look on."""
        return self.look is None or self.look == 1


@dataclass
class Ledger:
    """The looks kept in a folder.

    Attributes
    ----------
    path : Path
    looks : dict
        By validation set: its looks in order, each with the fingerprints of calibration, recipe and criteria.
    sealed : tuple of str
        Fingerprints of the recipe and of its criteria, taken before any value is read.
    """

    path: Path
    looks: dict[str, list[dict[str, str]]] = field(default_factory=dict)
    sealed: tuple[str, str] = ("", "")

    def seal(self, recipe: Recipe) -> None:
        """Take the fingerprints of recipe and criteria, before any value is read."""
        self.sealed = (recipe_fingerprint(recipe), criteria_fingerprint(recipe))

    def look(self, validation: str, calibration: str) -> int:
        """Write a look down before it is taken, and return its number from 1; a look of before keeps its number."""
        recipe, criteria = self.sealed
        entry = {"calibration": calibration, "recipe": recipe, "criteria": criteria}
        known = self.looks.setdefault(validation, [])
        if entry not in known:
            known.append(entry)
            write_text(self.path, json.dumps({"what": WHAT, "looks": self.looks}, indent=2) + "\n")
        return known.index(entry) + 1


def open_ledger(folder: str | Path) -> Ledger:
    """Return the ledger of a folder; an empty one where there is none yet.

    Raises
    ------
    FileFormatError
        The file is damaged: the count is not started anew in silence.
    """
    path = Path(folder) / FILE
    if not path.exists():
        return Ledger(path)
    try:
        content: dict[str, Any] = json.loads(read_bytes(path))
        looks = {mark: [dict(entry) for entry in entries] for mark, entries in content["looks"].items()}
    except (ValueError, LookupError, TypeError, AttributeError) as problem:
        raise FileFormatError(
            path,
            f"no intact ledger of looks at validation sets ({type(problem).__name__}); expected what this program "
            "wrote. Restore it, or write into another folder; moving it away makes every set look unseen.",
        ) from None
    return Ledger(path, looks)


def fingerprint(*parts: str | bytes) -> str:
    """SHA-256 of texts and bytes, each with its length, so that no two lists of parts run together."""
    digest = hashlib.sha256()
    for part in parts:
        content = part.encode() if isinstance(part, str) else part
        digest.update(len(content).to_bytes(8, "big") + content)
    return digest.hexdigest()


def recipe_fingerprint(recipe: Recipe) -> str:
    """Fingerprint of what a recipe does to the data: comments, criteria and limits play no part.

    Keys that are not written are left out, so that a table of a later program version changes nothing.
    """
    return fingerprint(recipe.model_dump_json(exclude_unset=True, exclude=NO_PART))


def criteria_fingerprint(recipe: Recipe) -> str:
    """Fingerprint of the criteria of acceptance, however they are written; empty without any."""
    if not recipe.acceptance:
        return ""
    tables = [table.model_dump(exclude_unset=True) for table in recipe.acceptance]
    return fingerprint(json.dumps(tables, sort_keys=True))


def samples_fingerprint(samples: SampleSet, values: np.ndarray[Any, Any]) -> str:
    """Fingerprint of IDs and reference values, whatever the order of the samples."""
    pairs = sorted(zip(samples.sample_ids, (float(value).hex() for value in values), strict=True))
    return fingerprint(*(text for pair in pairs for text in pair))


def seal_of(
    recipe: Recipe, training: SampleSet, validation: SampleSet, analyte: str, ledger: Ledger | None
) -> SealResult:
    """Count the look of one calibration at its validation set, and say what follows from it.

    Parameters
    ----------
    recipe : Recipe
    training, validation : SampleSet
    analyte : str
    ledger : Ledger or None
        None: looks are not counted.
    """
    mark = samples_fingerprint(validation, validation.analyte(analyte)[1])
    criteria = criteria_fingerprint(recipe)
    if ledger is None:
        return _sealed(recipe, criteria, mark, NOT_COUNTED)
    calibration = fingerprint(
        analyte,
        samples_fingerprint(training, training.analyte(analyte)[1]),
        *(source.sha256 for source in training.spectra.sources),
    )
    number = ledger.look(mark, calibration)
    known = ledger.looks[mark]
    fixed = known[0]["criteria"] == criteria if criteria else None
    return _sealed(recipe, criteria, mark, _statement(number, fixed=fixed), number, len(known), fixed=fixed)


def _sealed(
    recipe: Recipe,
    criteria: str,
    validation: str,
    statement: str,
    look: int | None = None,
    looks: int | None = None,
    *,
    fixed: bool | None = None,
) -> SealResult:
    return SealResult(
        recipe=recipe_fingerprint(recipe),
        criteria=criteria,
        validation=validation,
        look=look,
        looks=looks,
        fixed_beforehand=fixed,
        statement=statement,
    )


def _statement(number: int, *, fixed: bool | None) -> str:
    criteria = {
        None: "no criteria of acceptance were fixed beforehand",
        True: "the criteria of acceptance were fixed before the first look",
        False: "the criteria of acceptance are not those of the first look",
    }[fixed]
    if number == 1:
        return f"first look at this validation set; {criteria}"
    return (
        f"look {number} at this validation set: it is no longer independent, since the recipe may have been chosen by "
        f"earlier looks; {criteria}"
    )
