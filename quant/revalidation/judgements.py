"""The single judgements that a verdict rests on, each as a record."""

from dataclasses import dataclass

from quant.result import Result, documented

ANALYTE = "unit of the analyte"


@dataclass(frozen=True, kw_only=True)
class BiasEquivalence(Result):
    """Was the bias shown to be smaller than allowed?"""

    n_samples: int = documented("Standards")
    bias: float = documented("Mean difference", ANALYTE)
    sd: float = documented("Standard deviation of the differences", ANALYTE)
    low: float = documented("Lower end of the 90 % interval of the bias", ANALYTE)
    high: float = documented("Upper end of it", ANALYTE)
    allowed: float = documented("Largest bias allowed, its sign gone", ANALYTE)
    p: float = documented("p-value of the larger of the two one-sided tests")
    shown: bool = documented("Whether the 90 % interval lies inside what is allowed")


@dataclass(frozen=True, kw_only=True)
class ScatterEquivalence(Result):
    """Was the SEP shown to be smaller than allowed?"""

    n_samples: int = documented("Standards")
    sep: float = documented("SEP", ANALYTE)
    high: float = documented("Upper 95 % limit of it", ANALYTE)
    allowed: float = documented("Largest SEP allowed", ANALYTE)
    shown: bool = documented("Whether the upper limit lies below")


@dataclass(frozen=True, kw_only=True)
class AdvisoryTest(Result):
    """One test for a difference, held with the others of its family by Holm."""

    name: str = documented("bias, SEP, slope, or joint ellipse")
    value: float | None = documented("What was found: bias and SEP in the unit of the analyte, the slope as a ratio")
    statistic: float = documented("Student's t for the bias, else F")
    p: float = documented("p-value, adjusted by Holm for the four tests")
    significant: bool = documented("Whether chance does not explain it, at 2 % for all four together")


@dataclass(frozen=True, kw_only=True)
class Power(Result):
    """What so many standards can show, by earlier scatter."""

    n_samples: int = documented("Standards")
    sd: float = documented("Standard deviation of one difference before the visit", ANALYTE)
    sd_source: str = documented("Where that comes from")
    chance: float = documented("Chance that the next statement is made for")
    smallest_bias: float = documented("Smallest bias that the tests find with that chance", ANALYTE)
    chance_of_holds: float = documented('Chance that "holds" is said of an instrument that did not change')
    needed: int | None = documented('Standards needed for "holds" to be said of it with that chance; none up to 200')


@dataclass(frozen=True, kw_only=True)
class RemedyRow(Result):
    """One remedy, judged on standards that it had not seen."""

    name: str = documented("Name, as --apply takes it")
    words: str = documented("What it does")
    kind: str = documented("none, correction, transfer or recalibration")
    available: bool = documented("Whether it could be fitted to what was given")
    note: str = documented("Why not, or what it found")
    rmse: float | None = documented(
        "Left-out root mean square difference from what is known: predictions from before and references, weighted",
        ANALYTE,
    )
    rmse_reference: float | None = documented("Left-out root mean square error against the reference values", ANALYTE)
    expected_sep: float | None = documented("SEP to expect of other samples, by these standards", ANALYTE)
    bias: float | None = documented("Left-out mean difference from what is known", ANALYTE)
    standard_error: float | None = documented("Standard error of the mean squared difference", f"({ANALYTE})²")
    not_applicable: int | None = documented("Left-out standards to which the corrected model does not apply")
    qualifies: bool = documented("Whether it may be proposed: available, and the model applies to the standards again")
    within_one_se: bool = documented("Whether it is within one standard error of the best")
    proposed: bool = documented("Whether it is the one proposed")
