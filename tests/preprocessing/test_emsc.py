"""Extended multiplicative signal correction."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError, QuantityError
from quant.preprocessing.emsc import EMSC, emsc

R = np.array([0.1, 0.2, 0.4, 0.3, 0.1, 0.2])
T = np.linspace(-1, 1, 6)
WATER = np.array([0.0, 0.0, 0.0, 1.0, 2.0, 1.0])
SOLVENT = np.array([0.0, 3.0, 0.0, 0.0, 0.0, 0.0])


def test_worked_example():
    # As the MSC example of P. Geladi, D. MacDougall, H. Martens, Applied Spectroscopy 39 (1985) 491 (from memory;
    # computed: a = 0.05, b = 1.5), with a line and an interferent on top, as in H. Martens, E. Stark, J. Pharm. Biomed.
    # Anal. 9 (1991) 625 (from memory).
    x = 0.05 + 1.5 * R + 0.2 * T + 0.7 * WATER
    np.testing.assert_allclose(emsc([x], R, polynomial=1, interferents=[WATER])[0], R, atol=1e-14)


def test_an_analyte_stays_and_does_not_disturb_the_scale():
    x = 0.05 + 1.5 * R + 0.2 * T + 0.6 * SOLVENT
    np.testing.assert_allclose(emsc([x], R, polynomial=1, analytes=[SOLVENT])[0], R + 0.4 * SOLVENT, atol=1e-14)
    without = emsc([x], R, polynomial=1)[0]
    assert np.abs(without - (R + 0.4 * SOLVENT)).max() > 0.05


def test_agrees_with_least_squares_row_by_row():
    axis = np.array([1800.0, 1790.0, 1770.0, 1700.0, 1690.0, 1680.0])
    spectra = R + np.random.default_rng(3).normal(scale=0.05, size=(4, 6))
    corrected = emsc(spectra, R, axis, 2, [WATER])
    t = (axis - 1740) / 60
    terms = np.column_stack([R, np.ones(6), t, t**2, WATER])
    for ours, x in zip(corrected, spectra, strict=True):
        found = np.linalg.lstsq(terms, x)[0]
        np.testing.assert_allclose(ours, (x - terms[:, 1:] @ found[1:]) / found[0], rtol=1e-9)


def test_the_reference_is_the_weighted_mean():
    spectra = np.array([R, 3 * R, 2 * R + 0.1])
    step = EMSC(polynomial=1).fit(spectra, sample_weight=[0.5, 0.5, 0])
    np.testing.assert_allclose(step.reference_, 2 * R)
    np.testing.assert_allclose(step.transform([7 * R - 4 + T]), [2 * R], atol=1e-13)


def test_the_size_of_an_interferent_does_not_matter():
    spectra = R + np.random.default_rng(4).normal(scale=0.05, size=(4, 6))
    small, large = (emsc(spectra, R, polynomial=1, interferents=[size * WATER]) for size in (1e-9, 1e9))
    np.testing.assert_allclose(small, large, rtol=1e-11)


def test_refuses_spectra_unlike_the_reference():
    with pytest.raises(QuantityError, match=r"2 spectra have nothing in common .*b about 0.*row\(s\) 1, 2 "):
        emsc([R, 0.3 + T, WATER], R, polynomial=1, interferents=[WATER])


def test_refuses_terms_that_cannot_be_told_apart():
    with pytest.raises(QuantityError, match="emsc: interferent 2 cannot be told from the terms before"):
        EMSC(0, [WATER, 2 * WATER]).fit([R, 2 * R])
    with pytest.raises(QuantityError, match=r"emsc: reference spectrum .* cannot be told"):
        EMSC(1).fit([0.3 + T, 0.5 - 2 * T])
    with pytest.raises(QuantityError, match=r"emsc: reference spectrum .* cannot be told"):
        EMSC(0, analytes=[R]).fit([R, 2 * R])


def test_refuses_too_few_points_and_other_lengths():
    with pytest.raises(NotEnoughDataError, match=r"emsc fits 7 terms, .* n_features = 6"):
        EMSC(5).fit([R])
    with pytest.raises(ParameterError, match="reference spectrum has 6 points, the spectra 2"):
        emsc([[1.0, 2.0]], R)
    with pytest.raises(ParameterError, match=r"interferents have 2 point\(s\), the spectra 6"):
        EMSC(0, [[1.0, 2.0]]).fit([R])
    with pytest.raises(ParameterError, match="polynomial = -1; expected the degree"):
        EMSC(-1).fit([R])
