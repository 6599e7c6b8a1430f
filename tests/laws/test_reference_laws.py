"""What holds for reference values whatever they are."""

import math
from collections import defaultdict
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from quant.readers.dates import iso_dates
from quant.readers.repeats import average_repeats
from quant.spectra.concentration import KNOWN, convert_basis, convert_concentration
from quant.spectra.reference_table import Analyte
from quant.statistics.groups import connected_groups

units = st.sampled_from(KNOWN)
numbers = st.floats(1e-6, 1e6)
constants = st.fixed_dictionaries({"density": st.floats(0.5, 3.0), "molar_mass": st.floats(2.0, 2000.0)})


@given(numbers, units, units, units, constants)
def test_ways_of_conversion_agree(value, first, second, third, known):
    there = convert_concentration(value, first, second, **known)
    assert convert_concentration(there, second, first, **known) == pytest.approx(value, rel=1e-14)
    direct = convert_concentration(value, first, third, **known)
    assert convert_concentration(there, second, third, **known) == pytest.approx(direct, rel=1e-14)


@given(numbers, st.floats(0.0, 0.999))
def test_wet_to_dry_and_back(value, moisture):
    dry = convert_basis(value, "wet", "dry", moisture)
    assert dry >= value
    assert convert_basis(dry, "dry", "wet", moisture) == pytest.approx(value, rel=1e-13)


determinations = st.lists(
    st.tuples(st.sampled_from("ABCDE"), st.one_of(st.floats(-100, 100), st.just(math.nan)), st.booleans()),
    min_size=1,
    max_size=25,
)


@given(determinations)
def test_averages_are_those_by_hand(rows):
    ids = [name for name, _, _ in rows]
    values = np.array([[math.nan if below else value] for _, value, below in rows])
    limits = np.array([[value if below else math.nan] for _, value, below in rows])
    found = average_repeats(ids, [Analyte("a")], values, limits, [{}] * len(rows))
    by_sample = defaultdict(list)
    for name, value, below in rows:
        by_sample[name].append((value, below))
    squares, freedom = 0.0, 0
    for i, name in enumerate(found.sample_ids):
        known = [(value, below) for value, below in by_sample[name] if not math.isnan(value)]
        single = [value for value, _ in known]
        assert found.determinations[i, 0] == len(single)
        mean = math.fsum(single) / len(single) if single else math.nan
        censored = any(below for _, below in known)
        expected = (math.nan, mean) if censored else (mean, math.nan)
        assert (found.values[i, 0], found.limits[i, 0]) == pytest.approx(expected, abs=1e-12, nan_ok=True)
        if single and not censored:
            squares += math.fsum((value - mean) ** 2 for value in single)
            freedom += len(single) - 1
    assert set(found.repeatability) == ({"a"} if freedom else set())
    if freedom:
        assert found.repeatability["a"].degrees_of_freedom == freedom
        assert found.repeatability["a"].standard_deviation == pytest.approx(math.sqrt(squares / freedom), abs=1e-12)


@given(st.dates(), st.sampled_from(["%Y-%m-%d", "%d.%m.%Y", "%d/%m/%Y"]))
def test_dates_come_back(day, form):
    text = f"{day.year:04d}".join(day.strftime(form.replace("%Y", "|")).split("|"))  # strftime may not pad years
    assert iso_dates(Path("r.csv"), [(2, text)], "date", "dmy") == [day.isoformat()]


@given(st.lists(st.lists(st.integers(0, 8), max_size=3), max_size=12))
def test_groups_are_the_connected_components(marks):
    groups = connected_groups(marks)
    reach = [{i} | {j for j, other in enumerate(marks) if set(own) & set(other)} for i, own in enumerate(marks)]
    for _ in marks:  # spreads through as many ties as there are samples
        reach = [set().union(*(reach[j] for j in own)) for own in reach]
    for i, own in enumerate(reach):
        assert {j for j in range(len(marks)) if groups[j] == groups[i]} == own
    assert list(dict.fromkeys(groups.tolist())) == list(range(len(set(groups.tolist()))))
