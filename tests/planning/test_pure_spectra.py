import numpy as np
import pytest

from quant.errors import AxisMismatchError, QuantityError, SampleMismatchError
from quant.planning.load import plan_from_text
from quant.planning.pure_spectra import read_pure_spectra

PLAN = """title = "t"
unit = "g/L"
standards = 6
[[component]]
name = "b"
low = 0
high = 1
[[component]]
name = "a"
low = 0
high = 1
[pure_spectra]
files = ["pure.csv"]
concentration = 10
noise = 0.001
axis_unit = "cm-1"
quantity = "absorbance"
"""
TABLE = "sample,1000,1010,1020\na,0.1,0.2,0.3\nb,1,2,3\na,0.3,0.2,0.1\nc,9,9,9\n"


@pytest.fixture
def read(tmp_path):
    def read(table: str = TABLE, old: str = "", new: str = "") -> np.ndarray:
        (tmp_path / "pure.csv").write_text(table, encoding="utf-8")
        plan = plan_from_text(PLAN.replace(old, new) if old else PLAN, folder=tmp_path)
        return read_pure_spectra(plan, plan.pure_spectra)

    return read


def test_one_spectrum_a_component_in_the_plan_s_order(read):
    assert read() == pytest.approx(np.array([[0.1, 0.2, 0.3], [0.02, 0.02, 0.02]]))


def test_ranges_choose_points(read):
    assert read(old="noise", new="ranges = [[1021, 1005]]\nnoise").shape == (2, 2)
    with pytest.raises(AxisMismatchError, match="no point from 1100 to 1200; the spectra lie on 1000 → 1020"):
        read(old="noise", new="ranges = [[1100, 1200]]\nnoise")


def test_a_component_without_a_spectrum(read):
    with pytest.raises(SampleMismatchError, match=r"no spectrum of b; the files hold a, c\. The sample ID has to be"):
        read(TABLE.replace("b,1,2,3\n", ""))


def test_transmittance_becomes_absorbance_and_reflectance_is_refused(tmp_path, monkeypatch):
    from quant.planning import pure_spectra
    from quant.spectra.axis import SpectralAxis
    from quant.spectra.spectra_set import SpectraSet

    plan = plan_from_text(PLAN, folder=tmp_path)
    values, axis = np.array([[0.1, 1.0], [0.01, 1.0]]), SpectralAxis([1000.0, 1010.0], "cm-1")
    monkeypatch.setattr(pure_spectra, "read_spectra", lambda *_: SpectraSet(values, axis, ["b", "a"], "transmittance"))
    assert read_pure_spectra(plan, plan.pure_spectra) == pytest.approx(np.array([[0.1, 0], [0.2, 0]]))
    monkeypatch.setattr(pure_spectra, "read_spectra", lambda *_: SpectraSet(values, axis, ["b", "a"], "reflectance"))
    with pytest.raises(QuantityError, match="are reflectance; expected absorbance"):
        read_pure_spectra(plan, plan.pure_spectra)
