"""The verdict: a table of rules, the first that applies decides.

| rule | applies where | verdict |
|---|---|---|
| too few standards | fewer than four | cannot decide |
| standards in doubt | past their date, or changed without a change of the instrument that explains it | cannot decide |
| equivalent | bias and SEP shown to be within what is allowed, and the model applies to the standards | holds |
| nothing found | not shown, but no test is significant, no costly change found, and the model applies | cannot decide |
| no remedy | what was found is real, and no remedy is expected to bring samples within the allowed SEP | rebuild |
| correction | the proposed remedy is a correction of limits, values, axis or mean spectrum | holds after correction |
| transfer | the proposed remedy is a map of the spectra, or a new fit | transfer needed |
"""

from collections.abc import Callable
from dataclasses import dataclass

from quant.revalidation.equivalence import LEAST_STANDARDS
from quant.revalidation.judgements import AdvisoryTest, BiasEquivalence, RemedyRow, ScatterEquivalence

HOLDS = "holds"
CORRECT = "holds after correction"
TRANSFER = "transfer needed"
REBUILD = "rebuild"
CANNOT_DECIDE = "cannot decide with these standards"
VERDICTS = (HOLDS, CORRECT, TRANSFER, REBUILD, CANNOT_DECIDE)


@dataclass(frozen=True, kw_only=True)
class Facts:
    """What the rules look at."""

    n_standards: int
    standards_in_doubt: bool
    applies: bool  # the model applies to the standards as they are measured now
    bias: BiasEquivalence | None
    scatter: ScatterEquivalence | None
    tests: tuple[AdvisoryTest, ...]
    proposed: RemedyRow | None
    allowed_sep: float
    off_before: float | None = None  # mean error before the visit, where it was too large already [unit of the analyte]
    costly: bool = False  # what was found in the spectra costs, by itself, more bias or scatter than is allowed

    @property
    def equivalent(self) -> bool:
        """Bias and SEP were both shown to be within what is allowed, on spectra that the model applies to."""
        return self.applies and bool(self.bias and self.bias.shown and self.scatter and self.scatter.shown)

    @property
    def changed(self) -> bool:
        """Something was found that chance does not explain."""
        return not self.applies or self.costly or any(test.significant for test in self.tests)

    @property
    def restorable(self) -> bool:
        """The proposed remedy is expected to bring other samples within the allowed SEP."""
        error = self.proposed.expected_sep if self.proposed else None
        return error is not None and error <= self.allowed_sep


@dataclass(frozen=True)
class Rule:
    """One line of the table."""

    name: str
    verdict: str
    words: str
    applies: Callable[[Facts], bool]


RULES = (
    Rule(
        "too few standards",
        CANNOT_DECIDE,
        f"fewer than {LEAST_STANDARDS} standards",
        lambda f: f.n_standards < LEAST_STANDARDS,
    ),
    Rule(
        "standards in doubt",
        CANNOT_DECIDE,
        "the standards are no longer what their labels say, so that nothing can be said of the instrument",
        lambda f: f.standards_in_doubt,
    ),
    Rule("equivalent", HOLDS, "bias and SEP were shown to be within what is allowed", lambda f: f.equivalent),
    Rule(
        "nothing found",
        CANNOT_DECIDE,
        "no change was found, but these standards could not show that bias and SEP are within what is allowed",
        lambda f: not f.changed,
    ),
    Rule(
        "no remedy",
        REBUILD,
        "the change is real, and no remedy brings the expected SEP within what is allowed",
        lambda f: not f.restorable,
    ),
    Rule(
        "correction",
        CORRECT,
        "the change is real, and a correction restores the left-out standards",
        lambda f: f.proposed is not None and f.proposed.kind == "correction",
    ),
    Rule(
        "transfer",
        TRANSFER,
        "the change is real; on standards left out a map or a new fit does better than simple corrections",
        lambda f: f.proposed is not None,
    ),
)


def decide(facts: Facts) -> Rule:
    """Return the first rule that applies."""
    return next(rule for rule in RULES if rule.applies(facts))
