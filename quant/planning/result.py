"""The plan as a record that prints itself and turns into tables."""

import csv
import io
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from quant.arrays import FloatArray
from quant.planning.expected_error import ExpectedError
from quant.planning.judgement import DesignJudgement
from quant.planning.precision import ValidationSize
from quant.planning.weighing import WeighingPlan
from quant.result import Result, documented
from quant.text_table import Row, format_columns, format_rows

ORIGIN = "blended"
"""What the column ``origin`` of the design says, so that later checks know these are no process samples."""


@dataclass(frozen=True, kw_only=True, eq=False)
class PlanResult(Result):
    """Standards and validation samples to prepare, and what to expect of them."""

    title: str = documented("Title of the plan")
    unit: str = documented("Unit of every component")
    seed: int = documented("Seed of the search")
    components: tuple[str, ...] = documented("Names of the components, the balance component last")
    sample_ids: tuple[str, ...] = documented("Sample IDs of the standards, in the order of preparation")
    standards: FloatArray = documented("Concentrations: one row a standard, one column a component", "unit")
    validation_ids: tuple[str, ...] = documented("Sample IDs of the validation samples, in the order of preparation")
    validation: FloatArray = documented("The same for the validation samples", "unit")
    judgement: DesignJudgement = documented("What the standards are worth")
    weighings: WeighingPlan | None = documented("What to weigh, if the plan says how")
    validation_size: ValidationSize = documented("How well the validation samples will tell RMSEP")
    expected: tuple[ExpectedError, ...] = documented("Prediction errors to expect, if pure spectra are supplied")
    expected_basis: str = documented("What the expected errors stand on, or what they need")
    findings: tuple[str, ...] = documented("What should be known beside the judgement's findings")
    cautions: tuple[str, ...] = documented("To be heeded by whoever prepares and uses the standards")

    def rows(self) -> list[Row]:
        """What is planned, in short."""
        total = self.judgement.total
        fixed = "free" if total is None else f"{total:g} {self.unit}, made up by {self.judgement.balance}"
        return [
            ("standards", len(self.sample_ids), ""),
            ("validation samples", len(self.validation_ids), ""),
            ("total", fixed, ""),
            ("seed", self.seed, ""),
        ]

    def __str__(self) -> str:
        """Every table, each under a heading."""
        unit = f"[{self.unit}], in the order of preparation"
        parts = [
            f"{self.title}\n{format_rows(self.rows())}",
            f"Standards {unit}\n{self._table(self.sample_ids, self.standards)}",
        ]
        if self.validation_ids:
            parts.append(f"Validation samples {unit}\n{self._table(self.validation_ids, self.validation)}")
        parts.append(f"Judgement of the standards\n{self.judgement}")
        if self.weighings is not None:
            parts.append(f"Weighings [g]: {self.weighings}\n\n{self._masses(self.weighings)}")
        parts.append(f"How well n validation samples tell RMSEP\n{self.validation_size}")
        parts.append(f"Expected error of prediction\n{self._expected()}")
        if self.findings:
            parts.append("\n".join(f"! {finding}" for finding in self.findings))
        parts.append("Cautions\n" + "\n".join(f"- {caution}" for caution in self.cautions))
        return "\n\n".join(parts)

    def to_csv(self, which: Literal["standards", "validation"] = "standards") -> str:
        """Return one set as CSV text that `read_reference` reads: sample, origin, components, then the weighings.

        Masses stand under ``component [g]``, their standard uncertainties as concentrations under ``u(component)``.
        """
        ids, amounts = self.sample_ids, self.standards
        weighed = None if self.weighings is None else (self.weighings.masses, self.weighings.uncertainties)
        if which == "validation":
            ids, amounts = self.validation_ids, self.validation
            if self.weighings is not None:
                weighed = (self.weighings.validation_masses, self.weighings.validation_uncertainties)
        header = ["sample", "origin", *self.components]
        if weighed is not None:
            header += [f"{name} [g]" for name in self.components] + [f"u({name})" for name in self.components]
        stream = io.StringIO()
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(header)
        for i, sample in enumerate(ids):
            cells = [repr(float(value)) for value in amounts[i]]
            if weighed is not None:
                cells += [f"{mass:.6g}" for mass in weighed[0][i]] + [f"{error:.3g}" for error in weighed[1][i]]
            writer.writerow([sample, ORIGIN, *cells])
        return stream.getvalue()

    def _table(self, ids: Sequence[str], values: FloatArray) -> str:
        rows = [(name, *row) for name, row in zip(ids, values.tolist(), strict=True)]
        return format_columns(("sample", *self.components), rows)

    def _masses(self, weighings: WeighingPlan) -> str:
        tables = [self._table(self.sample_ids, weighings.masses)]
        if self.validation_ids:
            tables.append(self._table(self.validation_ids, weighings.validation_masses))
        return "\n\n".join(tables)

    def _expected(self) -> str:
        if not self.expected:
            return self.expected_basis
        table = format_columns(
            ("component", "SEN", "SEL", "noise/SEN", "noise part", "shrinkage", "lab", "to truth", "RMSEP", "unit"),
            [
                (
                    *(e.component, e.sensitivity, e.selectivity, e.noise_part, e.from_noise, e.shrinkage),
                    *(e.laboratory_error, e.against_truth, e.against_reference, self.unit),
                )
                for e in self.expected
            ],
        )
        sources = dict.fromkeys(f"Laboratory error: {e.laboratory_source}." for e in self.expected)
        return "\n".join([table, self.expected_basis, *sources])
