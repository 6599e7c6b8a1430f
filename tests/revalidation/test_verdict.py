"""The table of verdicts: the first rule that applies decides."""

from dataclasses import replace

import numpy as np
import pytest

from quant.revalidation import verdict as v
from quant.revalidation.equivalence import bias_equivalence, scatter_equivalence
from quant.revalidation.judgements import AdvisoryTest, RemedyRow

SMALL = np.array([0.01, -0.02, 0.015, -0.01, 0.02, -0.015])


def row(kind, error=0.03):
    return RemedyRow(
        name="remedy",
        words="does something",
        kind=kind,
        available=True,
        note="",
        rmse=error,
        rmse_reference=error,
        expected_sep=error,
        bias=0.0,
        standard_error=0.0001,
        not_applicable=0,
        qualifies=True,
        within_one_se=True,
        proposed=True,
    )


def finding(*, significant):
    return AdvisoryTest(name="bias", value=0.3, statistic=9.0, p=0.001, significant=significant)


GOOD = v.Facts(
    n_standards=6,
    standards_in_doubt=False,
    applies=True,
    bias=bias_equivalence(SMALL, 0.1),
    scatter=scatter_equivalence(SMALL, 0.1),
    tests=(finding(significant=False),),
    proposed=row("correction"),
    allowed_sep=0.1,
)
MOVED = replace(GOOD, bias=bias_equivalence(SMALL + 0.3, 0.1), tests=(finding(significant=True),))


@pytest.mark.parametrize(
    ("facts", "expected"),
    [
        (GOOD, v.HOLDS),
        (replace(GOOD, tests=(finding(significant=True),)), v.HOLDS),  # real, but smaller than allowed
        (replace(GOOD, n_standards=3), v.CANNOT_DECIDE),
        (replace(GOOD, standards_in_doubt=True), v.CANNOT_DECIDE),
        (replace(MOVED, standards_in_doubt=True), v.CANNOT_DECIDE),  # before the instrument is blamed
        (replace(MOVED, tests=(finding(significant=False),)), v.CANNOT_DECIDE),
        (replace(GOOD, scatter=scatter_equivalence(SMALL, 0.02)), v.CANNOT_DECIDE),
        (replace(MOVED, tests=(finding(significant=False),), costly=True), v.CORRECT),
        (MOVED, v.CORRECT),
        (replace(MOVED, proposed=row("transfer")), v.TRANSFER),
        (replace(MOVED, proposed=row("recalibration")), v.TRANSFER),
        (replace(MOVED, proposed=row("transfer", error=0.11)), v.REBUILD),
        (replace(MOVED, proposed=None), v.REBUILD),
        (replace(GOOD, applies=False, proposed=None), v.REBUILD),  # right values on strange spectra prove nothing
    ],
)
def test_verdicts(facts, expected):
    assert v.decide(facts).verdict == expected


def test_the_documented_table_is_the_table_of_the_program():
    lines = [line.split("|")[1:4] for line in (v.__doc__ or "").splitlines() if line.startswith("| ")][1:]
    told = [(name.strip(), verdict.strip()) for name, _, verdict in lines]
    short = {v.CANNOT_DECIDE: "cannot decide"}
    assert told == [(rule.name, short.get(rule.verdict, rule.verdict)) for rule in v.RULES]
    assert {rule.verdict for rule in v.RULES} == set(v.VERDICTS)
