"""What the rules of the verdict look at, gathered from standards, tests, changes and remedies."""

from quant.model.revalidation_basis import RevalidationBasis
from quant.revalidation.change_words import CONTENT, NOISE
from quant.revalidation.changes import Change
from quant.revalidation.equivalence import (
    LEAST_STANDARDS,
    SCATTER,
    advisory_tests,
    bias_equivalence,
    scatter_equivalence,
)
from quant.revalidation.judgements import AdvisoryTest, RemedyRow
from quant.revalidation.noise_cost import added_by_noise
from quant.revalidation.standards import Standards
from quant.revalidation.standards_state import StandardsEvidence
from quant.revalidation.verdict import Facts
from quant.statistics.quantiles import t_quantile

SHARE_OUTSIDE = 1 / 3  # of the standards outside the model's domain: an unchanged instrument never puts more there


def gather_facts(
    standards: Standards,
    basis: RevalidationBasis,
    labels: StandardsEvidence,
    changes: tuple[Change, ...],
    outside: int,
    proposed: RemedyRow | None,
) -> Facts:
    """Gather what the rules look at.

    Parameters
    ----------
    standards : Standards
    basis : RevalidationBasis
        What is allowed.
    labels : StandardsEvidence
        Dates of the standards, and signs of loss.
    changes : tuple of Change
        Empty without spectra from before.
    outside : int
        Standards to which the model does not apply now.
    proposed : RemedyRow or None
    """
    n, reference = len(standards), standards.reference
    errors = standards.after.value - reference
    differences = standards.after.value - standards.before if standards.paired else errors
    tests = (
        advisory_tests(differences, errors, reference, sep=basis.sep, n_validation=basis.n_samples)
        if n >= LEAST_STANDARDS
        else ()
    )
    return Facts(
        n_standards=n,
        standards_in_doubt=in_doubt(labels, changes, tests, float(differences.mean()), unlike=outside > 0),
        applies=outside <= SHARE_OUTSIDE * n,
        bias=bias_equivalence(differences, basis.allowed_bias),
        scatter=scatter_equivalence(errors, basis.allowed_sep),
        tests=tests,
        proposed=proposed,
        allowed_sep=basis.allowed_sep,
        off_before=_off_before(standards, basis.allowed_bias) if standards.paired else None,
        costly=_costly(standards, basis, changes),
    )


def _costly(standards: Standards, basis: RevalidationBasis, changes: tuple[Change, ...]) -> bool:
    """Whether what was found in the spectra costs, by itself, more bias or more scatter than is allowed."""
    moved = any(abs(change.effect or 0.0) > basis.allowed_bias for change in of_instrument(changes))
    added = sum(change.scatter**2 for change in changes if change.significant and change.scatter is not None)
    if any(change.kind == NOISE and change.significant for change in changes):
        added += max(added_by_noise(standards, standards.model), 0.0)
    return moved or basis.sep**2 + added > basis.allowed_sep**2


def _off_before(standards: Standards, allowed: float) -> float | None:
    """Mean error of the standards before the visit, where it exceeds what is allowed beyond chance."""
    errors = standards.before - standards.reference
    mean, half = float(errors.mean()), t_quantile(0.975, errors.size - 1) * float(errors.std(ddof=1)) / errors.size**0.5
    return mean if abs(mean) - half > allowed else None


def of_instrument(changes: tuple[Change, ...]) -> list[Change]:
    """Significant changes that move results and are not the standards' own."""
    return [change for change in changes if change.significant and change.kind not in (CONTENT, NOISE)]


def in_doubt(
    labels: StandardsEvidence,
    changes: tuple[Change, ...],
    tests: tuple[AdvisoryTest, ...],
    mean: float,
    *,
    unlike: bool = False,
) -> bool:
    """Say whether the standards, rather than the instrument, may have changed.

    They are in doubt if one is past its date; if they are low, and lower with age, and no change of the instrument
    explains half of it; if results differ beyond chance while the spectra show no change of the instrument at all
    (scatter alone may also come from noise); and, without spectra from before, if they are low, nothing is known of
    their age, and the model applies to all of their spectra.

    Parameters
    ----------
    labels : StandardsEvidence
    changes : tuple of Change
        Empty without spectra from before.
    tests : tuple of AdvisoryTest
    mean : float
        Mean of after minus before, or of predicted minus reference. [unit of the analyte]
    unlike : bool
        Whether any spectrum lies outside the model's domain now.
    """
    instrument = of_instrument(changes)
    explained = any(abs(change.effect or 0.0) >= abs(mean) / 2 for change in instrument)
    expired = not labels.trustworthy and not labels.loss_suspected
    differing = {test.name for test in tests if test.significant}
    noisy = any(change.significant and change.kind == NOISE for change in changes)
    unexplained = bool(changes) and not instrument and bool(differing - {SCATTER} if noisy else differing)
    lost = not changes and not unlike and mean < 0 and bool(differing) and labels.age_p is None
    return expired or lost or (labels.loss_suspected and not explained) or unexplained
