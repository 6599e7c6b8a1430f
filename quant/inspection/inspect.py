"""A first look: what was read, how it pairs, which range it spans."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.recipe.load import read_recipe_reference, read_recipe_spectra
from quant.recipe.pipeline import axis_behind, build_steps
from quant.recipe.schema import Recipe
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet, pair_samples
from quant.spectra.spectra_set import SpectraSet
from quant.text_table import Row, format_columns, format_rows
from quant.units import QUANTITIES


@dataclass(frozen=True, kw_only=True)
class AnalyteRange(Result):
    """Reference values of one analyte among the paired samples."""

    analyte: str = documented("Name of the analyte")
    unit: str = documented("Unit of the analyte")
    n_values: int = documented("Paired samples with a value")
    lowest: float | None = documented("Lowest value", "unit of the analyte")
    highest: float | None = documented("Highest value", "unit of the analyte")
    mean: float | None = documented("Mean value", "unit of the analyte")
    without_value: tuple[str, ...] = documented("Paired samples that have no value")


@dataclass(frozen=True, kw_only=True)
class SetInspection(Result):
    """One set of spectra with its reference values."""

    name: str = documented("calibration or validation")
    n_files: int = documented("Files read")
    n_spectra: int = documented("Spectra read")
    n_samples: int = documented("Samples with spectra and reference values")
    replicates: str = documented("Spectra a sample, fewest to most")
    axis: str = documented("Axis of the spectra")
    quantity: str = documented("Ordinate of the spectra")
    ordinate_lowest: float = documented("Lowest ordinate of all spectra")
    ordinate_highest: float = documented("Highest ordinate of all spectra")
    origins: dict[str, int] = documented("Samples of each origin: process, spiked, blended, not stated")
    spectra_without_values: tuple[str, ...] = documented("Samples with spectra but no row in the reference table")
    values_without_spectra: tuple[str, ...] = documented("Samples in the reference table that have no spectrum")
    reader_notes: tuple[str, ...] = documented("Deviations that the readers tolerated, by file")
    analytes: tuple[AnalyteRange, ...] = documented("Reference values of each analyte")

    def rows(self) -> list[Row]:
        """What was read and paired."""
        return [
            ("files", self.n_files, ""),
            ("spectra", self.n_spectra, ""),
            ("paired samples", self.n_samples, f"({self.replicates} spectra each)"),
            ("axis", self.axis, ""),
            ("ordinate", f"{self.quantity}, {self.ordinate_lowest:.4g} to {self.ordinate_highest:.4g}", ""),
            ("origins", ", ".join(f"{count} {origin}" for origin, count in self.origins.items()), ""),
            ("spectra without a value", ", ".join(self.spectra_without_values) or "none", ""),
            ("values without a spectrum", ", ".join(self.values_without_spectra) or "none", ""),
        ]

    def __str__(self) -> str:
        """Heading, rows, one line an analyte."""
        table = format_columns(
            ("analyte", "unit", "values", "from", "to", "mean", "without a value"),
            [
                (a.analyte, a.unit, a.n_values, a.lowest, a.highest, a.mean, ", ".join(a.without_value) or "none")
                for a in self.analytes
            ],
        )
        return "\n".join([f"{self.name.capitalize()} samples", format_rows(self.rows()), table, *self.reader_notes])


@dataclass(frozen=True, kw_only=True)
class InspectionResult(Result):
    """What a recipe's files hold."""

    title: str = documented("Title of the recipe")
    sets: tuple[SetInspection, ...] = documented("The calibration samples, then separate validation samples if named")
    pipeline: tuple[str, ...] = documented("Preprocessing steps in order")
    points: str = documented("Points before and after preprocessing")

    def __str__(self) -> str:
        """Title, then the sets, then the pipeline."""
        steps = " → ".join(self.pipeline) or "none"
        return "\n\n".join([self.title, *map(str, self.sets), f"Preprocessing: {steps}\nPoints: {self.points}"])


def inspect(recipe: Recipe) -> InspectionResult:
    """Read what a recipe names and report what was found, without refusing samples that do not pair.

    Raises
    ------
    QuantError
        A file cannot be read, axes differ, nothing pairs, or a step does not fit the axis.
    """
    samples, spectra = _read(recipe, None, None)
    table = recipe.validation
    if table is None or table.files is None:
        sets = [_inspect_set("calibration", samples, spectra, ())]
    else:
        separate, others = _read(recipe, table.files, table.reference_file)
        # One reference table may serve both sets: what the other set has a spectrum of is not without one.
        sets = [
            _inspect_set("calibration", samples, spectra, others.sample_ids),
            _inspect_set("validation", separate, others, spectra.sample_ids),
        ]
    steps = build_steps(recipe, samples.spectra.axis, samples.spectra.quantity)
    after = axis_behind(steps, samples.spectra.axis).size
    return InspectionResult(
        title=recipe.title,
        sets=tuple(sets),
        pipeline=tuple(str(table["step"]) for table in recipe.preprocessing),
        points=f"{len(samples.spectra.axis)} read, {after} behind the preprocessing",
    )


def _read(recipe: Recipe, files: list[str] | None, reference: str | None) -> tuple[SampleSet, SpectraSet]:
    spectra = read_recipe_spectra(recipe, files)
    samples = pair_samples(spectra, read_recipe_reference(recipe, reference), unmatched="drop", missing="drop")
    return samples, spectra


def _inspect_set(name: str, samples: SampleSet, spectra: SpectraSet, elsewhere: Sequence[str]) -> SetInspection:
    """Inspect what was read and what paired of it; `elsewhere` are sample IDs that the other set has spectra of."""
    count = samples.replicates
    few, many = int(count.min()), int(count.max())
    notes = [f"{row.get('file', '')}: {row['reader']}" for row in spectra.notes if row.get("reader")]
    return SetInspection(
        name=name,
        n_files=len(spectra.sources),
        n_spectra=len(spectra),
        n_samples=len(samples),
        replicates=str(few) if few == many else f"{few} to {many}",
        axis=f"{spectra.axis} ({spectra.axis.direction})",
        quantity=QUANTITIES[spectra.quantity],
        ordinate_lowest=float(np.nanmin(spectra.values)),
        ordinate_highest=float(np.nanmax(spectra.values)),
        origins={origin: samples.origins.count(origin) for origin in dict.fromkeys(samples.origins)},
        spectra_without_values=samples.spectra_without_values,
        values_without_spectra=tuple(
            sample for sample in samples.values_without_spectra if sample not in set(elsewhere)
        ),
        reader_notes=tuple(dict.fromkeys(notes)),
        analytes=tuple(_range(samples, analyte.name) for analyte in samples.analytes),
    )


def _range(samples: SampleSet, name: str) -> AnalyteRange:
    analyte, values = samples.analyte(name)
    known = values[~np.isnan(values)]
    return AnalyteRange(
        analyte=analyte.name,
        unit=analyte.unit,
        n_values=known.size,
        lowest=float(known.min()) if known.size else None,
        highest=float(known.max()) if known.size else None,
        mean=float(known.mean()) if known.size else None,
        without_value=tuple(samples.sample_ids[i] for i in np.flatnonzero(np.isnan(values))),
    )
