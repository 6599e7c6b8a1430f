"""[chemistry]: where analyte and matrix absorb, and what else could be predicted in the analyte's place."""

from collections.abc import Sequence
from typing import Annotated

from pydantic import BeforeValidator, Field, FiniteFloat, model_validator

from quant.chemistry.bands import Band, named_bands
from quant.errors import ParameterError
from quant.recipe.table import DEFAULTS, Table, Text, as_list

Wavenumber = Annotated[FiniteFloat, Field(gt=0)]
Range = Annotated[list[Wavenumber], Field(min_length=2, max_length=2)]
Bands = list[Text | Wavenumber | Range]

_BANDS = (
    'names of groups or solvents ("ester C=O", "ethyl acetate"), positions (1741) and ranges ([1260, 1220]), always in '
    "wavenumbers. [cm⁻¹]"
)


class ChemistryTable(Table):
    """[chemistry]: what is known of the bands; [[chemistry]] with name where there are several analytes."""

    name: Text | None = Field(None, description="Name of the [[analyte]]; not needed if there is one.")
    analyte: Bands = Field(default_factory=list, description=f"Where the analyte absorbs: {_BANDS}")
    matrix: Bands = Field(default_factory=list, description=f"Where the rest of the samples absorbs: {_BANDS}")
    half_width: Wavenumber = Field(
        DEFAULTS["chemistry"]["half_width"], description="A band given by its position reaches so far each way. [cm⁻¹]"
    )
    interferents: list[Text] = Field(
        default_factory=list,
        description="What might be predicted in the analyte's place: columns of the reference table, or other "
        "[[analyte]] names.",
    )

    @model_validator(mode="after")
    def _says_something(self) -> "ChemistryTable":
        if not (self.analyte or self.matrix or self.interferents):
            raise ValueError("nothing said; expected analyte, matrix or interferents")
        if twice := sorted({each for each in self.interferents if self.interferents.count(each) > 1}):
            raise ValueError(f"interferents names {', '.join(twice)} more than once; expected once each")
        try:
            self.analyte_bands(), self.matrix_bands()
        except ParameterError as problem:
            raise ValueError(str(problem).removesuffix(".")) from None
        return self

    def analyte_bands(self) -> tuple[Band, ...]:
        """Return the analyte's bands, positions widened. [cm⁻¹]"""
        return self._resolved(self.analyte)

    def matrix_bands(self) -> tuple[Band, ...]:
        """Return the bands of the rest of the samples, positions widened. [cm⁻¹]"""
        return self._resolved(self.matrix)

    def _resolved(self, entries: Bands) -> tuple[Band, ...]:
        return tuple(
            band if band.low < band.high else _widened(band, self.half_width)
            for entry in entries
            for band in _bands_of(entry)
        )


def _bands_of(entry: str | float | list[float]) -> tuple[Band, ...]:
    if isinstance(entry, str):
        return named_bands(entry)
    ends = entry if isinstance(entry, list) else [entry]
    return (Band("stated", min(ends), max(ends), source="stated in the recipe"),)


def _widened(band: Band, half_width: float) -> Band:
    return Band(band.name, band.low - half_width, band.high + half_width, band.strength, band.note, band.source)


Chemistries = Annotated[
    list[ChemistryTable], BeforeValidator(as_list, json_schema_input_type=ChemistryTable | list[ChemistryTable])
]


def check_chemistry(tables: Sequence[ChemistryTable], analytes: Sequence[str]) -> None:
    """Refuse tables whose analyte is not there, is not told, or is told twice, and interferents that are the analyte.

    Raises
    ------
    ValueError
        As pydantic expects it.
    """
    for table in tables:
        if table.name is None and len(analytes) > 1:
            raise ValueError(f"[[chemistry]] without name; expected the name of one of {', '.join(analytes)}")
        if table.name is not None and table.name not in analytes:
            raise ValueError(f"[[chemistry]] names the analyte {table.name!r}; expected one of {', '.join(analytes)}")
        if (table.name or analytes[0]) in table.interferents:
            raise ValueError(f"[[chemistry]] names {table.name or analytes[0]!r} as its own interferent; remove it")
    named = [table.name or analytes[0] for table in tables]
    if twice := sorted({each for each in named if named.count(each) > 1}):
        raise ValueError(f"more than one [[chemistry]] of {', '.join(twice)}; expected one each")


def chemistry_of(tables: Sequence[ChemistryTable], analyte: str) -> ChemistryTable | None:
    """Return the table of an analyte, or None."""
    return next((table for table in tables if table.name in (None, analyte)), None)
