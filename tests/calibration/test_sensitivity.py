"""What would break a calibration."""

from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.sensitivity import sensitivity
from quant.model.calibration import Calibration, Limits, Uncertainty
from quant.model.manifest import from_manifest, to_manifest
from quant.model.revalidation_basis import RevalidationBasis
from quant.regression.pls import PLS
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte

AXIS = np.arange(1800.0, 1599.0, -2.0)
BAND = np.exp(-(((AXIS - 1700) / 12) ** 2))
BASIS = RevalidationBasis(allowed_bias=0.1, allowed_sep=0.2, source="test", sep=0.1, n_samples=20, sep_source="test")


@pytest.fixture(scope="module")
def model() -> Calibration:
    """One band on a flat ground: ŷ is linear in its height, and nearly blind to offsets."""
    values = np.linspace(1.0, 9.0, 12)
    spectra = 0.1 * values[:, None] * BAND
    method = PLS(n_factors=1).fit(spectra, values)
    return Calibration(
        analyte=Analyte("acid", "% m/m"),
        axis=SpectralAxis(AXIS, "cm-1"),
        quantity="absorbance",
        reading={},
        domain={},
        steps=(),
        method=method,
        factors=1,
        n_samples=12,
        limits=Limits(
            residual_warn=1.0,
            residual_stop=2.0,
            leverage_warn=1.0,
            leverage_stop=2.0,
            lowest=1.0,
            highest=9.0,
            margin_t=3.0,
        ),
        uncertainty=Uncertainty(
            s0=0.1, t=2.2, degrees_of_freedom=10, laboratory_error=None, replicate_sd=None, replicates=1.0
        ),
        test_spectra=spectra[:1],
        test_predictions=method.predict(spectra[:1]),
        revalidation=BASIS,
    )


def spectra_of(values):
    return 0.1 * np.asarray(values)[:, None] * BAND


def test_gain_and_offset_by_hand(model):
    values = np.linspace(1.0, 9.0, 12)
    found = {limit.kind: limit for limit in sensitivity(model, spectra_of(values), BASIS)}
    assert set(found) == {"shift", "stretch", "gain", "offset", "slope", "resolution", "noise", "vapour"}
    # Gain g moves the mean 5 by 5·g: 0.1 allowed at 2 %. Its scatter, 2.6·g, is below √(0.2² - 0.1²) there.
    assert found["gain"].size == pytest.approx(2.0, rel=2e-3)
    assert found["gain"].costs == "bias"
    # Offset d moves every prediction by d·Σb, b = BAND/(0.1·ΣBAND²).
    moved = BAND.sum() / (0.1 * BAND @ BAND)
    assert found["offset"].size == pytest.approx(0.1 / moved, rel=2e-3)
    # White noise σ scatters predictions by σ·|b|: √(0.2² - 0.1²) allowed.
    assert found["noise"].size == pytest.approx(np.sqrt(0.03) * 0.1 * np.sqrt(BAND @ BAND), rel=0.2)
    assert found["noise"].costs == "SEP"
    assert "costs the allowed bias" in found["gain"].told()


def test_what_costs_nothing_is_said(model):
    generous = replace(BASIS, allowed_bias=1e6, allowed_sep=1e6)
    found = sensitivity(model, spectra_of(np.linspace(1, 9, 12)), generous)
    assert all(limit.size is None for limit in found)
    assert "no size up to" in found[0].told()


def test_a_limit_is_as_large_as_what_is_allowed(model):
    twice = replace(BASIS, allowed_bias=0.2, allowed_sep=0.4)
    small, large = (sensitivity(model, spectra_of(np.linspace(1, 9, 12)), basis) for basis in (BASIS, twice))
    assert all(b.size > a.size for a, b in zip(small, large, strict=True) if a.size and b.size)


def test_limits_are_stored_with_the_model(model):
    kept = replace(
        model, revalidation=replace(BASIS, monitoring=sensitivity(model, spectra_of([1.0, 5.0, 9.0]), BASIS))
    )
    assert from_manifest(*to_manifest(kept)).revalidation == kept.revalidation
