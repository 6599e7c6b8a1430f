"""What a revalidation leaves: evidence, judgements, remedies, verdict."""

from dataclasses import dataclass

from quant.arrays import FloatArray
from quant.model.revalidation_basis import RevalidationBasis
from quant.result import Result, documented
from quant.revalidation.changes import Change, format_changes
from quant.revalidation.equivalence import FAMILY_RISK
from quant.revalidation.gathered import Gathered
from quant.revalidation.judgements import (
    ANALYTE,
    AdvisoryTest,
    BiasEquivalence,
    Power,
    RemedyRow,
    ScatterEquivalence,
)
from quant.revalidation.remedies.judge import Judged
from quant.revalidation.standards import Standards
from quant.revalidation.verdict import HOLDS
from quant.spectra.provenance import Source
from quant.text_table import Row, format_columns, format_rows

HIDDEN = {"json": False}
BY_HAND = "given with the standards"


@dataclass(frozen=True, kw_only=True, eq=False)
class RevalidationResult(Result):
    """Does the calibration still hold, and if not, what restores it with the least work?"""

    analyte: str = documented("Name of the analyte")
    unit: str = documented("Unit of the analyte")
    model: str = documented("The model in one line")
    fingerprint: str = documented("SHA-256 over everything that the model holds")
    lineage: tuple[str, ...] = documented("The model and its ancestors, back to the first calibration")
    state: str = documented("State of the model: draft, approved, provisional or retired")
    verdict: str = documented(
        "holds, holds after correction, transfer needed, rebuild, or cannot decide with these standards"
    )
    rule: str = documented("The rule of the table of verdicts that applied")
    reasons: tuple[str, ...] = documented("Why, in order")
    sample_ids: tuple[str, ...] = documented("The standards")
    reference: FloatArray = documented("Reference values", ANALYTE)
    before: FloatArray | None = documented("Predictions of the spectra from before, if there are any", ANALYTE)
    after: FloatArray = documented("Predictions of the spectra after", ANALYTE)
    not_applicable: int = documented("Standards to which the model does not apply now")
    basis: RevalidationBasis = documented("What is allowed, and what the model did on its validation")
    bias: BiasEquivalence | None = documented("Was the bias shown to be smaller than allowed?")
    scatter: ScatterEquivalence | None = documented("Was the SEP shown to be smaller than allowed?")
    tests: tuple[AdvisoryTest, ...] = documented("Tests for a difference, which advise")
    power: Power | None = documented("What these standards can show")
    changes: tuple[Change, ...] = documented("What changed in the spectra; empty without spectra from before")
    evidence: Gathered = documented("Film, instrument, state of the standards, domain: what was given")
    remedies: tuple[RemedyRow, ...] = documented("Remedies side by side, the simplest first")
    proposed: str = documented("The remedy proposed; empty where none is needed or none helps")
    files: tuple[Source, ...] = documented("Files of spectra and values behind the verdict")
    standards: Standards = documented("The standards", metadata=HIDDEN)
    judged: tuple[Judged, ...] = documented("Remedies with their left-out values", metadata=HIDDEN)

    @property
    def accepted(self) -> bool:
        """True if the calibration was shown to hold, on an instrument whose film, if given, is within tolerance."""
        return self.verdict == HOLDS and (self.evidence.film is None or self.evidence.film.passed)

    @property
    def told_verdict(self) -> str:
        """The verdict, with bounds that were given by hand."""
        basis = self.basis
        if basis.source != BY_HAND:
            return self.verdict
        return (
            f"{self.verdict} (bias up to {basis.allowed_bias:g}, SEP up to {basis.allowed_sep:g} {self.unit} allowed)"
        )

    def rows(self) -> list[Row]:
        """Rows of the printed table: what was found, what is allowed, what could be shown."""
        unit = self.unit
        rows: list[Row] = []
        if self.bias is not None and self.scatter is not None:
            kind = "after - before" if self.before is not None else "predicted - reference"
            rows = [
                (f"bias ({kind})", self.bias.bias, unit),
                ("90 % interval from", self.bias.low, unit),
                ("to", self.bias.high, unit),
                ("allowed bias", self.bias.allowed, unit),
                ("SEP", self.scatter.sep, unit),
                ("upper 95 % limit of it", self.scatter.high, unit),
                ("allowed SEP", self.scatter.allowed, unit),
            ]
        if self.power is not None:
            rows += [
                (f"smallest bias that {self.power.n_samples} standards show (90 %)", self.power.smallest_bias, unit),
                ('chance of "holds" without any change', 100 * self.power.chance_of_holds, "%"),
                ("standards needed for 90 %", self.power.needed, ""),
            ]
        return rows

    def __str__(self) -> str:
        """Verdict and reasons, figures, what changed, remedies, lineage."""
        parts = [f"{self.model}\nVerdict: {self.verdict}", *(f"  {reason}" for reason in self.reasons)]
        parts += ["", format_rows(self.rows())] if self.rows() else []
        if self.tests:
            header = ("advisory test", "value", "statistic", "p (Holm)", f"below {FAMILY_RISK:g}")
            table = [(t.name, t.value, t.statistic, t.p, t.significant) for t in self.tests]
            parts += ["", format_columns(header, table)]
        if self.changes:
            parts += ["", format_changes(self.changes)]
        for name, found in self.evidence.parts():
            parts += ["", name, str(found)]
        if self.remedies:
            names = ("remedy", "left-out RMSE", "against reference", "expected SEP", "bias", "not applicable", "")
            parts += ["", format_columns(names, [_cells(row) for row in self.remedies])]
            parts += [f"{row.name}: {row.note}" for row in self.remedies if row.note]
        parts += ["", *self.lineage]
        return "\n".join(parts)


def _cells(row: RemedyRow) -> tuple[object, ...]:
    mark = "proposed" if row.proposed else "within one SE of the best" if row.within_one_se else ""
    return row.name, row.rmse, row.rmse_reference, row.expected_sep, row.bias, row.not_applicable, mark
