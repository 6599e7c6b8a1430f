"""Gaps, crowding, counts, origins, analytes that vary together."""

import numpy as np
import pytest

from quant.inspection.finding import DOUBT, NOTE, STOP
from quant.inspection.gather import gather
from quant.inspection.spread import (
    check_below_limit,
    check_counts,
    check_origin,
    check_possible,
    check_range,
    check_together,
    check_vary,
    widest_gap,
)
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

RECIPE = """title = "t"
[spectra]
files = ["none"]
[reference]
file = "none"
[[analyte]]
name = "a"
unit = "%"
"""


def material(values, *, more="", origins=(), validation=(), censored=None):
    """Lay out spectra of no interest with these values."""

    def samples(letter, numbers, origins=()):
        table = np.asarray(numbers, dtype=float)
        table = table[:, None] if table.ndim == 1 else table
        ids = [f"{letter}{i}" for i in range(len(table))]
        spectra = SpectraSet(np.random.default_rng(1).random((len(ids), 6)), SpectralAxis(np.arange(6.0)), ids)
        notes = [{"origin": origin} for origin in origins] or None
        limits = {} if censored is None else {"censored": np.asarray(censored, dtype=float)[:, None]}
        analytes = [Analyte(name, "%") for name in "abc"[: table.shape[1]]]
        return pair_samples(spectra, ReferenceTable(ids, analytes, table, notes, **limits), missing="drop")

    apart = samples("V", validation, ["process"] * len(validation)) if len(validation) else None
    recipe = recipe_from_text(RECIPE + more)
    return gather(recipe, samples("S", values, origins), apart)


def test_a_gap_by_hand():
    # 20 values: the chance of any gap above 0.5 of the range is at most 19 · 0.5^18 = 7e-5.
    values = np.concatenate([np.linspace(0, 4, 15), np.linspace(9, 10, 5)])
    place, share = widest_gap(values)
    assert (place, share) == (14, 0.5)
    [finding] = check_range(material(values))
    assert finding.title == "A gap in the range of a: 4 to 9 %"
    assert finding.samples == ("S14", "S15")
    assert finding.evidence.startswith("50\N{NO-BREAK SPACE}% of the range")


def test_even_and_random_values_have_no_gap():
    assert widest_gap(np.linspace(0, 1, 10)) is None
    rng = np.random.default_rng(20260105)
    gaps = sum(widest_gap(np.sort(rng.random(30))) is not None for _ in range(1000))
    assert gaps <= 22  # at most 1 % nominal: the 99.9 % bound of 1000 sets


def test_one_sample_alone_at_the_end():
    [finding, _] = check_range(material([*np.linspace(0, 3, 15), 10]))
    assert "one sample alone" in finding.evidence


def test_crowding():
    [*_, finding] = check_range(material([*np.linspace(0, 1, 15), 2, 4, 6, 8, 10]))
    assert (finding.code, finding.gravity) == ("crowded_range", NOTE)
    assert finding.evidence.startswith("16 of 20 samples between 0 and 2 %")


@pytest.mark.parametrize(("noise", "gravity"), [(0.1, DOUBT), (0.25, NOTE), (3.0, None)])
def test_analytes_together(noise, gravity):
    rng = np.random.default_rng(1)
    a = rng.random(40)
    found = check_together(material(np.column_stack([a, -a + noise * rng.standard_normal(40)])))
    assert [finding.gravity for finding in found] == ([gravity] if gravity else [])
    assert all("a and b: r = -" in finding.evidence for finding in found)


def test_prepared_standards_only():
    values, prepared = np.arange(8.0), ["spiked"] * 4 + ["blended"] * 4
    [finding] = check_origin(material(values, origins=prepared))
    assert (finding.gravity, finding.title) == (DOUBT, "All calibration samples are blended or spiked")
    [finding] = check_origin(material(values, origins=prepared, validation=[1.0, 2.0]))
    assert finding.gravity == NOTE
    assert check_origin(material(values, origins=["process", *prepared[1:]])) == []
    assert check_origin(material(values)) == []


# ASTM E1655 (from memory; published-values 2.1): 6(k + 1) with mean-centring, never fewer than 24; validation 4k, 20.
@pytest.mark.parametrize(
    ("n", "factors", "few"), [(23, 2, True), (24, 3, False), (29, 4, True), (30, 4, False), (65, 10, True)]
)
def test_the_counts_of_the_standard(n, factors, few):
    found = check_counts(material(np.arange(float(n)), more=f"[regression]\nfactors = {factors}\n"))
    assert any(finding.code == "few_calibration_samples" for finding in found) == few


def test_a_few_validation_samples():
    [_, finding] = check_counts(material(np.arange(30.0), validation=np.arange(12.0)))
    assert (finding.code, finding.gravity) == ("few_validation_samples", NOTE)
    # χ² quantiles for 12 degrees of freedom, from a table: 23.337 and 4.404; √(12/23.337) − 1, √(12/4.404) − 1.
    assert "-28\N{NO-BREAK SPACE}% to +65\N{NO-BREAK SPACE}%" in finding.evidence
    [_, finding] = check_counts(material(np.arange(30.0), validation=np.arange(4.0)))
    assert finding.gravity == DOUBT


def test_a_straight_line_wants_five_levels():
    line = '[regression]\nmethod = "band_area"\nbands = [{ signal = "area", range = [1, 4] }]\n'
    [finding, _] = check_counts(material([1, 1, 2, 2, 3, 3, 4, 4], more=line))
    assert finding.title == "Only 4 different values of a"
    [nothing] = check_counts(material([1, 2, 3, 4, 5], more=line))
    assert nothing.code == "no_validation"


def test_values_below_a_limit():
    [finding] = check_below_limit(material([np.nan, 1, 2, 3, 4], censored=[0.05, *[np.nan] * 4]))
    assert finding.samples == ("S0",)
    assert "below 0.05 %" in finding.evidence
    assert check_below_limit(material([1, 2, 3, 4, 5])) == []


@pytest.mark.parametrize(
    ("values", "evidence"),
    [
        ([1.0, 2.0, 3.0], "3 samples with a value of a; at least 4 are needed"),
        ([2.0] * 6, "All 6 reference values of a are 2"),
    ],
)
def test_what_calibrating_would_refuse_is_a_stop(values, evidence):
    (found,) = check_possible(material(values))
    assert (found.gravity, found.code) == (STOP, "nothing_to_learn")
    assert found.evidence.startswith(evidence)


def test_values_that_differ_are_no_stop():
    assert check_possible(material([1.0, 2.0, 3.0, 4.0])) == []


def test_spectra_that_are_all_equal_are_a_stop():
    def laid_out(spectra, steps=""):
        ids = [f"S{i}" for i in range(len(spectra))]
        table = ReferenceTable(ids, [Analyte("a", "%")], np.arange(float(len(ids)))[:, None])
        samples = pair_samples(SpectraSet(spectra, SpectralAxis(np.arange(6.0)), ids), table)
        return gather(recipe_from_text(RECIPE + steps), samples, None)

    one = np.random.default_rng(1).random(6)
    [finding] = check_vary(laid_out(np.tile(one, (8, 1))))
    assert (finding.code, finding.gravity) == ("equal_spectra", STOP)
    apart = np.tile(one, (8, 1)) + 1e-9 * np.arange(8.0)[:, None]
    assert check_vary(laid_out(apart)) == []
    straight = '[[preprocessing]]\nstep = "snv"\n[[preprocessing]]\nstep = "keep_ranges"\nranges = [[0, 0]]\n'
    assert len(check_vary(laid_out(np.outer(np.arange(1.0, 9.0), one), straight))) == 1  # size alone varied
