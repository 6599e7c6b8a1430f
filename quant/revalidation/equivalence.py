"""Still right? Equivalence decides; a family of tests for a difference advises.

A test for a difference that finds none proves nothing: with few standards it never finds any. Whether a calibration
holds is therefore decided the other way round: the standards have to show that the bias, and the scatter, are smaller
than what is allowed.
"""

import math

import numpy as np
from numpy.typing import ArrayLike
from scipy import stats

from quant.arrays import FloatArray
from quant.checks import as_vector, paired_vectors
from quant.errors import NotEnoughDataError, ParameterError
from quant.revalidation.judgements import AdvisoryTest, BiasEquivalence, ScatterEquivalence
from quant.revalidation.multiple_tests import holm_adjusted
from quant.statistics.joint_ellipse import joint_test
from quant.statistics.quantiles import t_quantile

RISK = 0.05  # of saying "holds" where the bias, or the scatter, is as large as allowed
FAMILY_RISK = 0.02  # of calling an unchanged instrument changed, over the whole family
SCATTER = "SEP"
FAMILY = ("bias", SCATTER, "slope", "joint ellipse")
"""The tests that advise, declared before any value is seen."""
LEAST_STANDARDS = 4  # below, the slope has one degree of freedom and nothing can be left out in turn


def bias_equivalence(differences: ArrayLike, allowed: float) -> BiasEquivalence:
    """Show by two one-sided tests that a mean difference is smaller than allowed.

    Shown if |mean| + t(0.95, n - 1)·s/√n < allowed: the 90 % interval lies inside ± allowed.

    Parameters
    ----------
    differences : array of shape (n_samples,)
        After minus before of the same standards; without spectra from before, predicted minus reference.
        [unit of the analyte]
    allowed : float
        Largest bias, its sign gone, above zero. [unit of the analyte]

    Raises
    ------
    NotEnoughDataError
        Fewer than two differences.
    ParameterError
        A bound that is not above zero.

    References
    ----------
    .. [1] D.J. Schuirmann, J. Pharmacokinetics and Biopharmaceutics 15 (1987) 657-680; from memory.
    """
    values = _checked(differences, allowed)
    n, mean, sd = values.size, float(values.mean()), float(values.std(ddof=1))
    error = sd / math.sqrt(n)
    half = t_quantile(1 - RISK, n - 1) * error
    return BiasEquivalence(
        n_samples=n,
        bias=mean,
        sd=sd,
        low=mean - half,
        high=mean + half,
        allowed=allowed,
        p=float(stats.t.sf((allowed - abs(mean)) / error, n - 1)) if error > 0 else float(abs(mean) >= allowed),
        shown=abs(mean) + half < allowed,
    )


def scatter_equivalence(errors: ArrayLike, allowed: float) -> ScatterEquivalence:
    """Show that the SEP is smaller than allowed: its upper 95 % limit s·√((n - 1)/χ²(0.05, n - 1)) lies below.

    Parameters
    ----------
    errors : array of shape (n_samples,)
        Predicted minus reference. [unit of the analyte]
    allowed : float
        Largest SEP, above zero. [unit of the analyte]

    Raises
    ------
    NotEnoughDataError
        Fewer than two errors.
    ParameterError
        A bound that is not above zero.
    """
    values = _checked(errors, allowed)
    sd = float(values.std(ddof=1))
    high = sd * upper_factor(values.size)
    return ScatterEquivalence(n_samples=values.size, sep=sd, high=high, allowed=allowed, shown=high < allowed)


def upper_factor(n_samples: int) -> float:
    """Upper 95 % limit of a standard deviation, as a multiple of the one found."""
    return math.sqrt((n_samples - 1) / float(stats.chi2.ppf(RISK, n_samples - 1)))


def advisory_tests(
    differences: ArrayLike, errors: ArrayLike, reference: ArrayLike, *, sep: float, n_validation: int
) -> tuple[AdvisoryTest, ...]:
    """Test for differences: bias, SEP, slope, and slope with intercept, held together by Holm.

    Parameters
    ----------
    differences : array of shape (n_samples,)
        After minus before; without spectra from before, the errors. [unit of the analyte]
    errors : array of shape (n_samples,)
        Predicted minus reference. [unit of the analyte]
    reference : array of shape (n_samples,)
        Reference values, which slopes are drawn over: their errors touch neither before nor after. [as errors]
    sep : float
        Validated SEP. [unit of the analyte]
    n_validation : int
        Samples behind it.

    Returns
    -------
    tuple of AdvisoryTest
        In the order of `FAMILY`.

    Raises
    ------
    NotEnoughDataError
        Fewer than four standards.

    References
    ----------
    .. [1] Slope by the extra sum of squares, F(1, n - 2); joint statistic as `quant.statistics.joint_ellipse`.
    """
    d, x = paired_vectors("differences", differences, "reference values", reference, least=2)
    e = as_vector("errors", errors)
    n = d.size
    if n < LEAST_STANDARDS:
        raise NotEnoughDataError(f"{n} standards; expected {LEAST_STANDARDS} or more. Measure more of them.")
    mean, sd = float(d.mean()), float(d.std(ddof=1))
    t = abs(mean) * math.sqrt(n) / sd if sd > 0 else math.inf * (mean != 0)
    ratio = float(e.var(ddof=1)) / sep**2
    slope_f, slope = _slope(d, x)
    found = (
        ("bias", mean, t, 2 * float(stats.t.sf(t, n - 1))),
        (SCATTER, float(e.std(ddof=1)), ratio, float(stats.f.sf(ratio, n - 1, n_validation - 1))),
        ("slope", 1 + slope, slope_f, float(stats.f.sf(slope_f, 1, n - 2))),
        ("joint ellipse", None, *_joint(d, x)),
    )
    adjusted = holm_adjusted([p for *_, p in found]).tolist()
    return tuple(
        AdvisoryTest(name=name, value=value, statistic=statistic, p=p, significant=p <= FAMILY_RISK)
        for (name, value, statistic, _), p in zip(found, adjusted, strict=True)
    )


def extra_sum_of_squares(errors: ArrayLike, abscissa: ArrayLike) -> float:
    """F(1, n - 2) of a slope beside a bias: [SS(bias only) - SS(slope and bias)] / [SS(slope and bias)/(n - 2)].

    Parameters
    ----------
    errors, abscissa : array of shape (n_samples,)
        [unit of the analyte]

    References
    ----------
    .. [1] The nested models of slope and bias correction, Bouveresse et al., Anal. Chem. 68 (1996) 982; the ratio of
       the two residual variances that is often quoted is no F test.
    """
    d, x = paired_vectors("errors", errors, "abscissa", abscissa, least=3)
    return _slope(d, x)[0]


def _slope(d: FloatArray, x: FloatArray) -> tuple[float, float]:
    centred, rest = x - x.mean(), d - d.mean()
    sxx = float(centred @ centred)
    if sxx == 0.0:
        return 0.0, 0.0
    slope = float(centred @ rest) / sxx
    explained = slope**2 * sxx
    left = float(np.sum((rest - slope * centred) ** 2))
    return (explained * (d.size - 2) / left if left > 0 else math.inf * (explained > 0)), slope


def _joint(d: FloatArray, x: FloatArray) -> tuple[float, float]:
    try:
        test = joint_test(x, x + d)
    except NotEnoughDataError:  # no scatter about the line, or one level only
        return 0.0, 1.0
    return test.statistic, float(stats.f.sf(test.statistic, 2, d.size - 2))


def _checked(values: ArrayLike, allowed: float) -> FloatArray:
    vector = as_vector("values", values)
    if vector.size < 2:
        raise NotEnoughDataError(f"{vector.size} standard(s); expected two or more. Measure more of them.")
    if not allowed > 0:
        raise ParameterError(f"allowed = {allowed}; expected a bound above zero in the unit of the analyte.")
    return vector
