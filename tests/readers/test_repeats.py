"""Averages of repeated determinations, by hand."""

import math

import numpy as np
import pytest

from quant.readers.repeats import average_repeats
from quant.spectra.reference_table import Analyte, Repeatability

A, B = Analyte("a"), Analyte("b")
NAN = float("nan")


def averaged(rows, limits=None, notes=None):
    ids = [name for name, *_ in rows]
    values = np.array([row[1:] for row in rows], dtype=float)
    below = np.full(values.shape, NAN) if limits is None else np.array(limits, dtype=float).reshape(values.shape)
    return average_repeats(ids, [A, B][: values.shape[1]], values, below, notes or [{}] * len(rows))


def test_by_hand():
    found = averaged([("S2", 1.0, 5.0), ("S1", 4.0, NAN), ("S2", 3.0, NAN), ("S1", 5.0, NAN), ("S1", 9.0, NAN)])
    assert found.sample_ids == ["S2", "S1"]
    assert np.array_equal(found.values, [[2, 5], [6, NAN]], equal_nan=True)
    assert found.determinations.tolist() == [[2, 1], [3, 0]]
    assert np.isnan(found.limits).all()
    assert found.repeatability == {"a": Repeatability(pytest.approx(math.sqrt(16 / 3)), 3, 2)}


def test_a_mean_with_a_limit_in_it_is_a_limit():
    # < 0.05 and 0.07: the mean lies below 0.06. Such a pair tells nothing of the scatter.
    rows = [("S", NAN), ("S", 0.07), ("T", NAN), ("T", NAN), ("U", 1.0), ("U", 1.2)]
    found = averaged(rows, [0.05, NAN, 0.05, 0.03, NAN, NAN])
    assert np.array_equal(found.values[:, 0], [NAN, NAN, 1.1], equal_nan=True)
    assert found.limits[:2, 0] == pytest.approx([0.06, 0.04])
    assert found.repeatability["a"].degrees_of_freedom == 1
    assert found.repeatability["a"].standard_deviation == pytest.approx(math.sqrt(0.02))


def test_notes_that_all_rows_share():
    notes = [{"batch": "1", "day": "Mo"}, {"batch": "1", "day": "Tu"}, {"day": "We"}]
    assert averaged([("S", 1.0), ("S", 2.0), ("T", 3.0)], notes=notes).notes == [{"batch": "1"}, {"day": "We"}]
