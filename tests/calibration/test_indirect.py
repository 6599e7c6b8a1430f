"""The test whether predictions are indirect: hand-made cases, and errors of the laboratory taken out."""

import numpy as np
import pytest

from quant.calibration.indirect import DIRECT, INDIRECT, UNKNOWN, partial_test

NAMES = ("acetone", "water")
Y = np.array([0.0, 1.0, 2.0, 3.0, 4.0, 0.0, 1.0, 2.0, 3.0, 4.0])
OWN = np.array([1.0, 0.0, 1.0, 0.0, 1.0, 0.0, 1.0, 0.0, 1.0, 0.0])  # uncorrelated with Y: two rounds, turned over
ALONG = Y + OWN
SMALL = 0.01 * np.array([1.0, -1.0, 0.0, 1.0, -1.0, -1.0, 1.0, 0.0, -1.0, 1.0])


def test_predictions_that_follow_the_analyte():
    found = partial_test(0.5 + 0.9 * Y + SMALL, Y, ALONG[:, None], names=NAMES)
    own, water = found.effects
    assert found.verdict == DIRECT
    assert own.coefficient == pytest.approx(0.9, abs=0.02)
    assert own.low < 0.9 < own.high
    assert not water.significant
    assert found.slope == pytest.approx(0.9, abs=0.01)


def test_predictions_that_follow_the_interferent():
    found = partial_test(0.8 * ALONG + SMALL, Y, ALONG[:, None], names=NAMES)
    assert (found.verdict, found.through) == (INDIRECT, "water")
    assert found.effects[1].coefficient == pytest.approx(0.8, abs=0.02)
    # By hand: ALONG rises by 1 with Y (OWN has no slope on Y), so the whole slope of 0.8 goes through water.
    assert found.slope == pytest.approx(0.8, abs=0.01)
    assert [effect.share for effect in found.effects] == pytest.approx([0, 1], abs=0.03)


def test_plain_least_squares_without_an_error():
    rng = np.random.default_rng(1)
    y, z = rng.normal(size=20), rng.normal(size=(20, 2))
    p = y + z @ [0.3, -0.2] + 0.1 * rng.normal(size=20)
    found = partial_test(p, y, z, names=("a", "b", "c"))
    design = np.column_stack([np.ones(20), y, z])
    expected, rest, *_ = np.linalg.lstsq(design, p, rcond=None)
    error = np.sqrt(rest[0] / 16 * np.diag(np.linalg.inv(design.T @ design))[1:])
    assert [effect.coefficient for effect in found.effects] == pytest.approx(expected[1:])
    assert [(e.high - e.low) / 2 for e in found.effects] == pytest.approx(2.119905 * error)  # t(0.975, 16)
    assert sum(effect.share for effect in found.effects) == pytest.approx(1)


def test_errors_of_the_laboratory_are_taken_out():
    # Known truth: predictions equal the true content; the values in hand do not. r = 0.95 with the interferent.
    rng = np.random.default_rng(20261203)
    truth = rng.normal(size=4000)
    water = 0.95 * truth + np.sqrt(1 - 0.95**2) * rng.normal(size=4000)
    values, error = truth + 0.2 * rng.normal(size=4000), 0.2
    plain = partial_test(truth, values, water[:, None], names=NAMES)
    mended = partial_test(truth, values, water[:, None], names=NAMES, laboratory_errors=[error, None])
    # Reliability where water stands still: 0.0975/(0.0975 + 0.04) = 0.709.
    assert plain.effects[0].coefficient == pytest.approx(0.709, abs=0.03)
    assert mended.effects[0].coefficient == pytest.approx(1.0, abs=0.05)
    assert mended.effects[1].coefficient == pytest.approx(0.0, abs=0.05)
    assert mended.slope == pytest.approx(1.0, abs=0.02)
    assert sum(effect.share for effect in mended.effects) == pytest.approx(1)


def test_errors_of_the_interferent_are_taken_out():
    rng = np.random.default_rng(20261203)
    truth = rng.normal(size=4000)
    water = 0.95 * truth + np.sqrt(1 - 0.95**2) * rng.normal(size=4000)
    measured = water + 0.2 * rng.normal(size=4000)
    plain = partial_test(water, truth, measured[:, None], names=NAMES)
    mended = partial_test(water, truth, measured[:, None], names=NAMES, laboratory_errors=[None, 0.2])
    assert plain.effects[0].coefficient > 0.2  # the analyte seems to be seen
    assert mended.effects[0].coefficient == pytest.approx(0.0, abs=0.05)
    assert (mended.verdict, mended.through) == (INDIRECT, "water")


@pytest.mark.parametrize(
    ("predicted", "others", "errors", "words"),
    [
        (SMALL, ALONG, None, "do not follow acetone"),
        (Y, 2 * Y + 1, None, "in one fixed proportion"),
        (Y, np.ones(10), None, "water has the same value"),
        (Y + SMALL, ALONG, [0.5, None], "varies little more than the error of the laboratory"),
        (0.5 * Y + 0.5 * ALONG + 20 * SMALL, ALONG, None, "independently enough"),
    ],
)
def test_what_cannot_be_told(predicted, others, errors, words):
    found = partial_test(predicted, Y, np.asarray(others)[:, None], names=NAMES, laboratory_errors=errors)
    assert (found.verdict, found.through) == (UNKNOWN, "")
    assert words in found.reason


def test_too_few_samples():
    found = partial_test(Y[:7], Y[:7], ALONG[:7, None], names=NAMES)
    assert found.reason == "7 samples have all the values; at least 8 are needed"
    none = np.empty(0)
    assert partial_test(none, none, none.reshape(0, 1), names=NAMES).verdict == UNKNOWN
