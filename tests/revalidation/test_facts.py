"""Who changed: the instrument or the standards; and what a change costs."""

from dataclasses import replace

import numpy as np
import pytest

from quant.revalidation.changes import Change
from quant.revalidation.equivalence import FAMILY
from quant.revalidation.facts import gather_facts, in_doubt, of_instrument
from quant.revalidation.judgements import AdvisoryTest
from quant.revalidation.revalidate import basis_of
from quant.revalidation.standards_state import StandardsEvidence

NO_LOSS = StandardsEvidence(
    standards=(),
    mean_error=0.0,
    all_low=False,
    low_p=None,
    age_slope=None,
    age_p=None,
    loss_suspected=False,
    trustworthy=True,
    words=(),
)
LOSS = replace(NO_LOSS, loss_suspected=True, trustworthy=False)
EXPIRED = replace(NO_LOSS, trustworthy=False)


def change(kind, *, significant=True, effect=0.2, scatter=None):
    return Change(
        kind=kind,
        size=1.0,
        unit="",
        standard_error=0.1,
        p_value=0.001 if significant else 0.5,
        significant=significant,
        effect=effect,
        scatter=scatter,
        words="",
        usual_cause="",
        same_class_as=(),
    )


def family(*significant):
    return tuple(
        AdvisoryTest(name=name, value=0.0, statistic=0.0, p=0.01, significant=name in significant) for name in FAMILY
    )


SHIFT, STILL = change("shift"), change("shift", significant=False)


@pytest.mark.parametrize(
    ("labels", "changes", "found", "mean", "doubt"),
    [
        (NO_LOSS, (SHIFT,), family("bias"), -0.2, False),
        (NO_LOSS, (STILL,), family(), -0.02, False),
        (NO_LOSS, (STILL,), family("bias"), -0.2, True),  # results differ, and the spectra show nothing
        (NO_LOSS, (STILL, change("content")), family("slope"), 0.2, True),  # neither way is the instrument's
        (NO_LOSS, (STILL,), family("SEP"), 0.0, True),
        (NO_LOSS, (STILL, change("noise", effect=None)), family("SEP"), 0.0, False),  # noise scatters results ...
        (NO_LOSS, (STILL, change("noise", effect=None)), family("SEP", "bias"), 0.2, True),  # ... but moves none
        (NO_LOSS, (), family("bias"), -0.2, True),  # low, of unknown age, and all spectra fit: lost or moved?
        (NO_LOSS, (), family("bias"), 0.2, False),  # nothing lost makes results high
        (replace(NO_LOSS, age_p=0.5), (), family("bias"), -0.2, False),  # no lower with age
        (LOSS, (SHIFT,), family("bias"), -0.2, False),
        (LOSS, (change("shift", effect=0.05),), family("bias"), -0.2, True),  # explains a quarter of it
        (EXPIRED, (SHIFT,), family("bias"), -0.2, True),
    ],
)
def test_the_standards_are_doubted_where_the_instrument_explains_nothing(labels, changes, found, mean, doubt):
    assert in_doubt(labels, changes, found, mean) == doubt


def test_spectra_that_do_not_fit_speak_for_the_instrument():
    assert not in_doubt(NO_LOSS, (), family("bias"), -0.2, unlike=True)


def test_noise_and_content_are_no_changes_of_the_instrument_that_move_results():
    assert of_instrument((SHIFT, STILL, change("noise"), change("content"))) == [SHIFT]


def test_a_change_that_moves_results_by_more_than_allowed_is_costly(world):
    standards, basis = world.standards(np.random.default_rng(1)), basis_of(world.model)
    for share, costly in ((0.9, False), (1.1, True)):
        moved = (change("shift", effect=-share * basis.allowed_bias),)
        facts = gather_facts(standards, basis, NO_LOSS, moved, outside=0, proposed=None)
        assert facts.costly == costly
        assert facts.applies
    for factor, costly in ((0.9, False), (1.1, True)):
        size = factor * np.sqrt(basis.allowed_sep**2 - basis.sep**2)
        varied = (change("vapour_spread", effect=None, scatter=size),)
        assert gather_facts(standards, basis, NO_LOSS, varied, outside=0, proposed=None).costly == costly
    assert not gather_facts(
        standards, basis, NO_LOSS, (), outside=5, proposed=None
    ).applies  # more than a third of twelve


def test_reference_values_that_never_fitted_are_told(world):
    standards, basis = world.standards(np.random.default_rng(2)), basis_of(world.model)
    for factor, told in ((1.0, False), (1000.0, True)):
        wrong = replace(standards, reference=factor * standards.reference)
        facts = gather_facts(wrong, basis, NO_LOSS, (), outside=0, proposed=None)
        assert (facts.off_before is not None) == told
