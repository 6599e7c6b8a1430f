"""A calibration that sees only an interferent is told from one that sees its analyte.

Simulated sets with known values of the interferent: the analyte has no band, and the interferent goes along with it
(r = 0.95); the analyte absorbs, and the interferent varies by itself; the analyte absorbs, and the interferent goes
along with it; the analyte has no band, and nothing goes along with it.
"""

from collections import Counter

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.calibration.indirect import DIRECT, INDIRECT, UNKNOWN
from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.recipe.load import recipe_from_text
from quant.reports.contents import SECTIONS
from quant.reports.page import render_section
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.simulate import PureComponent, mixture_spectra
from quant.spectra.spectra_set import SpectraSet

SEED = 20261203  # fixed before the first run
AXIS = np.arange(1800.0, 999.0, -4.0)  # cm⁻¹
ANALYTE = PureComponent("analyte", [(1741.0, 18.0, 0.05, "gaussian"), (1241.0, 20.0, 0.05, "gaussian")])
WATER = PureComponent("water", [(1640.0, 60.0, 0.05, "gaussian")])
MATRIX = PureComponent("matrix", [(1690.0, 25.0, 0.3, "mixed"), (1510.0, 15.0, 0.4, "mixed")])
NOISE = 0.001  # absorbance, white
LABORATORY = 0.03  # standard error of a reference value; contents lie about 2 with a standard deviation of 0.5
SAMPLES = 40
KINDS = {  # visibility, r
    "invisible": (0.0, 0.95),
    "clean": (1.0, 0.0),
    "clean, correlated": (1.0, 0.95),
    "invisible, alone": (0.0, 0.0),  # control: there is nothing to predict
}
RECIPE = """title = "known truth"
[spectra]
files = ["none.csv"]
[reference]
file = "none.csv"
[[analyte]]
name = "acetate"
unit = "% m/m"
LABORATORY
[regression]
max_factors = 6
[cross_validation]
scheme = "random_folds"
folds = 10
repeats = 1
[uncertainty]
distribution_free = false
"""
TESTED = '[chemistry]\ninterferents = ["water"]\n'
BANDS = "[chemistry]\nanalyte = [1741, 1241]\nmatrix = [[1670, 1610], 1690, 1510]\nhalf_width = 20\n"


def calibrated(
    kind: str, number: int, chemistry: str = TESTED, *, error: float = LABORATORY, stated: bool = True
) -> AnalyteResult:
    """Calibrate on one set whose laboratory values have a standard error, stated in the recipe or not."""
    visible, r = KINDS[kind]
    rng = np.random.default_rng([SEED, list(KINDS).index(kind), number])
    truth = rng.normal(size=SAMPLES)
    water = r * truth + np.sqrt(1 - r**2) * rng.normal(size=SAMPLES)
    contents = np.column_stack([visible * (2 + 0.5 * truth), 2 + 0.5 * water, 1 + 0.1 * rng.normal(size=SAMPLES)])
    spectra = mixture_spectra([ANALYTE, WATER, MATRIX], contents, AXIS) + NOISE * rng.normal(size=(SAMPLES, AXIS.size))
    values = 2 + 0.5 * truth + error * rng.normal(size=SAMPLES)
    ids = [f"S{i:02d}" for i in range(SAMPLES)]
    notes = [{"water": f"{2 + 0.5 * each:.4f}"} for each in water]
    table = ReferenceTable(ids, [Analyte("acetate", "% m/m", error if stated else None)], values[:, None], notes)
    samples = pair_samples(SpectraSet(spectra, SpectralAxis(AXIS, "cm-1"), ids), table)
    line = f"laboratory_error = {error}" if stated else ""
    return calibrate(recipe_from_text(RECIPE.replace("LABORATORY", line) + chemistry), samples=samples).analytes[0]


def count(kind: str, n_sets: int) -> Counter[str]:
    return Counter(calibrated(kind, number).chemistry.verdict for number in range(n_sets))


def q2(result: AnalyteResult) -> float:
    return float(result.cross_validation.q2[result.cross_validation.factor_counts.index(result.factors)])


def check(counts: dict[str, Counter[str]]) -> None:
    """Few false alarms, few misses; a set that predicts nothing gets no verdict."""
    n_sets = counts["clean"].total()
    for kind in ("clean", "clean, correlated"):
        assert counts[kind][INDIRECT] <= 0.01 * n_sets, kind  # the false alarm
        assert counts[kind][DIRECT] >= 0.95 * n_sets, kind
    assert counts["invisible"][DIRECT] <= 0.01 * n_sets
    assert counts["invisible"][INDIRECT] >= 0.95 * n_sets
    assert counts["invisible, alone"][UNKNOWN] >= 0.9 * n_sets


def test_good_looks_and_the_verdict():
    result = calibrated("invisible", 0)
    assert q2(result) > 0.8  # looks good: RMSECV is less than half of the standard deviation
    behind = result.chemistry
    assert (behind.verdict, behind.through) == (INDIRECT, "water")
    assert "predicts indirectly through water" in str(result)
    own, water = behind.test.effects
    assert own.low < 0.2
    assert water.low > 0.5


def test_the_clean_set_is_not_accused():
    for kind in ("clean", "clean, correlated"):
        result = calibrated(kind, 0)
        assert q2(result) > 0.95
        assert result.chemistry.statement == "predicts the analyte"
        own, water = result.chemistry.test.effects
        assert own.low < 1 < own.high + 0.1
        assert abs(water.coefficient) < 0.1


@pytest.mark.parametrize(
    ("kind", "statement"),
    [
        ("invisible", "predicts indirectly through the bands of the matrix"),
        ("clean", "predicts the analyte"),
        ("clean, correlated", "predicts the analyte"),
    ],
)
def test_bands_alone_lead_to_the_same(kind, statement):
    assert calibrated(kind, 0, BANDS).chemistry.statement == statement


def test_without_columns_and_bands_it_cannot_be_told():
    assert calibrated("invisible", 0, "").chemistry.statement == UNKNOWN


def test_a_laboratory_error_that_is_not_stated_is_a_condition():
    assert (
        "unless the standard error of one laboratory value" in calibrated("invisible", 0, stated=False).chemistry.reason
    )
    assert "unless" not in calibrated("invisible", 0).chemistry.reason


def test_a_poor_laboratory_makes_no_accuser_once_its_error_is_stated():
    kind, error = "clean, correlated", 0.3  # twice what the analyte varies by where the interferent stands still
    told = [calibrated(kind, number, error=error).chemistry for number in range(30)]
    assert {each.verdict for each in told} == {UNKNOWN}
    # Control: not stated, it accuses, and the reason names the error from which that would be wrong.
    untold = [calibrated(kind, number, error=error, stated=False).chemistry for number in range(30)]
    accused = [each for each in untold if each.verdict == INDIRECT]
    assert len(accused) > 10
    assert all("unless the standard error" in each.reason for each in accused)


def test_the_report_says_it():
    sections = {section.name: section for section in SECTIONS}
    for kind, words in (("invisible", "Predicts indirectly through water"), ("clean", "Predicts the analyte")):
        result = CalibrationResult(
            title="", recipe="", analytes=(calibrated(kind, 0),), spectra_without_values=(), values_without_spectra=()
        )
        assert words in render_section(sections["chemistry"], result)
        assert ("predicts indirectly" in render_section(sections["answer"], result)) == (kind == "invisible")


def test_few_false_alarms_and_few_misses():
    check({kind: count(kind, 60) for kind in KINDS})


@pytest.mark.long
def test_few_false_alarms_and_few_misses_in_1000_sets(keep_result):
    counts = {kind: count(kind, 1000) for kind in KINDS}
    keep_result("indirect", {kind: dict(sorted(found.items())) for kind, found in counts.items()} | {"seed": SEED})
    check(counts)
