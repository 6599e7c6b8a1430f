"""Laws of the shares of regions and of the oscillator."""

from types import SimpleNamespace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.calibration.band_shares import band_shares
from quant.chemistry.oscillator import MASSES, isotope_ratio, oscillator_wavenumber
from quant.chemistry.solvent_limits import solvent_limit, solvent_names
from quant.recipe.chemistry_schema import ChemistryTable

positions = st.lists(st.floats(1000, 2500), max_size=3)
atoms = st.sampled_from(sorted(MASSES))


def evidence(axis, mean, vector):
    """What the shares look at."""
    model = SimpleNamespace(axis=SimpleNamespace(unit="cm-1"), steps=())
    return SimpleNamespace(axis_after=axis, mean=mean, vector=vector, model=model)


@settings(deadline=None, max_examples=60)
@given(seed=st.integers(0, 2**31), analyte=positions, matrix=positions.filter(bool))
def test_shares_add_up_to_one_and_points_to_all_from_either_end(seed, analyte, matrix):
    rng = np.random.default_rng(seed)
    axis = np.arange(2500.0, 999.0, -10.0)
    mean, vector = rng.normal(size=(8, axis.size)), rng.normal(size=axis.size)
    table = ChemistryTable.model_validate({"analyte": analyte, "matrix": matrix})
    found = band_shares(evidence(axis, mean, vector), table)
    assert sum(each.share for each in found) == pytest.approx(1)
    assert sum(each.n_points for each in found) == axis.size
    turned = band_shares(evidence(axis[::-1], mean[:, ::-1], vector[::-1]), table)
    assert [each.share for each in turned] == pytest.approx([each.share for each in found])


@given(a=atoms, b=atoms, c=atoms, d=atoms, k=st.floats(0.1, 30))
def test_isotope_ratios_multiply_and_move_every_band_alike(a, b, c, d, k):
    ratio = isotope_ratio((a, b), (c, d))
    assert ratio * isotope_ratio((c, d), (a, b)) == pytest.approx(1)
    assert oscillator_wavenumber(c, d, k) == pytest.approx(ratio * oscillator_wavenumber(a, b, k))
    assert oscillator_wavenumber(a, b, k) == pytest.approx(oscillator_wavenumber(b, a, k))


@given(name=st.sampled_from(solvent_names()), dose=st.floats(0.1, 100))
def test_a_dose_at_the_limit_brings_the_permitted_exposure(name, dose):
    found = solvent_limit(name, dose)
    if found.pde is not None:
        assert found.ppm * dose / 1000 == pytest.approx(found.pde)
