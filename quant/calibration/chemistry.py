"""The chemistry behind one calibration: where its predictions come from, and whether they are its analyte's."""

from collections.abc import Sequence
from dataclasses import dataclass

from quant.calibration.band_shares import (
    ANALYTE,
    GASES,
    MATRIX,
    NOWHERE,
    RegionShare,
    band_shares,
    blurring_remarks,
    why_no_shares,
)
from quant.calibration.evidence import Evidence
from quant.calibration.indirect import DIRECT, INDIRECT, UNKNOWN, IndirectTest, indirect_test
from quant.recipe.chemistry_schema import ChemistryTable, chemistry_of
from quant.result import Result, documented

MOST = 0.5  # share from which a region carries the prediction
HARDLY = 0.1  # share up to which the analyte's bands do not


@dataclass(frozen=True, kw_only=True, eq=False)
class ChemistryResult(Result):
    """Where the predictions of one calibration come from."""

    verdict: str = documented("predicts the analyte; predicts indirectly; cannot be told")
    through: str = documented("What it predicts instead, where it predicts indirectly, or empty")
    reason: str = documented("What the verdict rests on")
    shares: tuple[RegionShare, ...] = documented("Regions of the axis; empty where there is no regression vector")
    declared: bool = documented("Whether the recipe names bands of analyte or matrix")
    test: IndirectTest | None = documented("Test against interferents, or none where the recipe names none")
    remarks: tuple[str, ...] = documented("What the shares do not say, and why there are none")

    @property
    def statement(self) -> str:
        """The verdict in a few words: "predicts indirectly through water"."""
        return f"{self.verdict} through {self.through}" if self.through else self.verdict

    def share_of(self, region: str) -> float:
        """Return the share of a region, 0 where it has no point."""
        return next((each.share for each in self.shares if each.region == region), 0.0)

    def __str__(self) -> str:
        """The verdict and what it rests on."""
        return f"Chemistry: {self.statement} ({self.reason})"


def chemistry_behind(evidence: Evidence) -> ChemistryResult | None:
    """State where the predictions of a calibration come from.

    The test against interferents gives the verdict where the recipe names some; else the shares of declared bands do;
    without either it cannot be told.

    Parameters
    ----------
    evidence : Evidence

    Returns
    -------
    ChemistryResult or None
        None where the method has no regression vector and the recipe says nothing of chemistry.

    Raises
    ------
    RecipeError
        An interferent that is not in the reference table.
    """
    table = chemistry_of(evidence.recipe.chemistry, evidence.model.analyte.name)
    missing = why_no_shares(evidence)
    if table is None and missing:
        return None
    shares = band_shares(evidence, table)
    test = indirect_test(evidence, table.interferents if table else ())
    if test is not None:
        verdict, through, reason = test.verdict, test.through, test.reason
    else:
        verdict, through, reason = _by_bands(table, shares, missing)
    return ChemistryResult(
        verdict=verdict,
        through=through,
        reason=reason,
        shares=shares,
        declared=table is not None and bool(table.analyte or table.matrix),
        test=test,
        remarks=_remarks(evidence, table, shares, missing),
    )


def _by_bands(table: ChemistryTable | None, shares: Sequence[RegionShare], missing: str) -> tuple[str, str, str]:
    """Judge by shares alone: a weaker ground, since substances that absorb at one place are not told apart."""
    if table is None or not table.analyte:
        return UNKNOWN, "", "the recipe names neither bands of the analyte nor interferents with reference values"
    if missing:
        return UNKNOWN, "", f"there are no shares of the bands: {missing}"
    by_name = {each.region: each.share for each in shares}
    own = by_name.get(ANALYTE, 0.0)
    part = f"{own:.0%} of the prediction comes from bands of the analyte"
    if own >= MOST:
        return DIRECT, "", f"{part}, as far as bands can tell: no interferent was tested"
    others = {name: share for name, share in by_name.items() if name not in (ANALYTE, NOWHERE)}
    if own <= HARDLY and table.matrix and others and max(others.values()) >= MOST:  # else the matrix may be anywhere
        through = max(others, key=lambda name: others[name])
        words = f"what absorbs {through}" if through in GASES else f"the {through}"
        return INDIRECT, words, f"{part}, {others[through]:.0%} from {words}; no interferent was tested"
    return UNKNOWN, "", f"{part}, too little to rely on and too much to deny; no interferent was tested"


def _remarks(
    evidence: Evidence, table: ChemistryTable | None, shares: Sequence[RegionShare], missing: str
) -> tuple[str, ...]:
    if missing:
        return (f"No shares of bands are stated: {missing}.",)
    remarks = blurring_remarks(evidence.model.steps)
    found = {each.region: each for each in shares}
    for name, declared in ((ANALYTE, table and table.analyte), (MATRIX, table and table.matrix)):
        if declared and name not in found:
            remarks.append(f"None of the {name} lies where the calibration looks.")
    own = found.get(ANALYTE)
    if own is not None and own.n_contested:
        remarks.append(
            f"{own.n_contested} of the {own.n_points} points in {ANALYTE} also lie in bands of the matrix; they count "
            "as the analyte's."
        )
    return tuple(remarks)
