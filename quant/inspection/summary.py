"""What was read, how it pairs, which range it spans."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from quant.inspection.files import unpaired_values
from quant.inspection.material import Reading
from quant.result import Result, documented
from quant.spectra.sample_set import SampleSet
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
    ordinate_lowest: float | None = documented("Lowest ordinate of all spectra")
    ordinate_highest: float | None = documented("Highest ordinate of all spectra")
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
            ("ordinate", self._ordinate(), ""),
            ("origins", ", ".join(f"{count} {origin}" for origin, count in self.origins.items()), ""),
            ("spectra without a value", ", ".join(self.spectra_without_values) or "none", ""),
            ("values without a spectrum", ", ".join(self.values_without_spectra) or "none", ""),
        ]

    def _ordinate(self) -> str:
        if self.ordinate_lowest is None or self.ordinate_highest is None:
            return f"{self.quantity}, not a single point"
        return f"{self.quantity}, {self.ordinate_lowest:.4g} to {self.ordinate_highest:.4g}"

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


def summarise(reading: Reading, readings: Sequence[Reading]) -> SetInspection:
    """Return what one set of files holds; `readings` are all sets, which may share a reference table."""
    spectra, samples = reading.spectra, reading.samples
    count = samples.replicates
    known = spectra.values[~np.isnan(spectra.values)]
    few, many = int(count.min()), int(count.max())
    notes = [f"{row.get('file', '')}: {row['reader']}" for row in spectra.notes if row.get("reader")]
    return SetInspection(
        name=reading.name,
        n_files=len([file for file, _ in reading.parts if file]) + len(reading.unread),
        n_spectra=sum(len(part) for _, part in reading.parts),
        n_samples=len(samples),
        replicates=str(few) if few == many else f"{few} to {many}",
        axis=f"{spectra.axis} ({spectra.axis.direction})",
        quantity=QUANTITIES[spectra.quantity],
        ordinate_lowest=float(known.min()) if known.size else None,
        ordinate_highest=float(known.max()) if known.size else None,
        origins={origin: samples.origins.count(origin) for origin in dict.fromkeys(samples.origins)},
        spectra_without_values=samples.spectra_without_values,
        values_without_spectra=unpaired_values(reading, readings),
        reader_notes=tuple(dict.fromkeys(notes)),
        analytes=tuple(_range(samples, analyte.name) for analyte in samples.analytes),
    )


def _range(samples: SampleSet, name: str) -> AnalyteRange:
    analyte, values = samples.analyte(name)
    known = values[~np.isnan(values)]
    return AnalyteRange(
        analyte=analyte.name,
        unit=analyte.printed_unit,
        n_values=known.size,
        lowest=float(known.min()) if known.size else None,
        highest=float(known.max()) if known.size else None,
        mean=float(known.mean()) if known.size else None,
        without_value=tuple(samples.sample_ids[i] for i in np.flatnonzero(np.isnan(values))),
    )
