"""The whole plan, and the ready ones."""

import re
from pathlib import Path

import numpy as np
import pytest

from quant.errors import ParameterError
from quant.planning.load import load_plan
from quant.planning.plan import CAUTIONS, plan

BALANCE = '[mixture]\ntotal = 100\nbalance = "rest"\n'
WEIGHING = "[weighing]\nbatch = 10\nmass_uncertainty = 0.0002\n"


def test_parts_fit_each_other(make_plan, short_search):
    wanted = make_plan(3, standards=12, rest=f"{BALANCE}{WEIGHING}[validation]\nsamples = 5\n")
    result = plan(wanted)
    assert result.components == ("a", "b", "c", "rest")
    assert result.sample_ids == tuple(f"S{n:02d}" for n in range(1, 13))
    assert result.validation_ids == ("V01", "V02", "V03", "V04", "V05")
    assert result.standards.sum(axis=1) == pytest.approx(100, abs=1e-9)
    assert result.validation.sum(axis=1) == pytest.approx(100, abs=1e-9)
    assert result.weighings.masses == pytest.approx(result.standards / 10)
    assert result.judgement.balance == "rest"
    assert result.expected == ()
    assert result.expected_basis.startswith("Not computed: it needs [pure_spectra]")
    assert "5 validation samples; ASTM E1655 asks for 20" in "\n".join(result.findings)
    assert re.search(r"5 validation samples; \d+ are needed to know RMSEP within ±30 %\.", "\n".join(result.findings))


def test_the_order_of_the_components_changes_only_that_of_the_columns(make_plan, short_search):
    wanted = make_plan(3, top='constraints = ["a + b <= 14"]')
    turned = wanted.model_copy(update={"component": [wanted.component[i] for i in (2, 0, 1)]})
    one, other = plan(wanted), plan(turned)
    assert np.array_equal(one.standards[:, [2, 0, 1]], other.standards)
    assert np.array_equal(one.validation[:, [2, 0, 1]], other.validation)


def test_no_validation_samples(make_plan, short_search):
    result = plan(make_plan(2, rest=f"{WEIGHING}[validation]\nsamples = 0\n"))
    assert result.validation.shape == (0, 2)
    assert "Validation samples [" not in str(result)
    assert result.to_csv("validation").count("\n") == 1


def test_an_impossible_range_is_named(make_plan):
    with pytest.raises(ParameterError, match="b 50 to 95: only 50 to 50 % m/m can be reached"):
        plan(make_plan(2, low=50, high=95, rest=BALANCE))


def test_expected_errors_use_the_weighings_or_what_is_stated(make_plan, short_search, tmp_path):
    (tmp_path / "pure.csv").write_text("sample,1000,1010,1020\na,1,0,0\nb,0,1,0\nrest,0,0,1\n", encoding="utf-8")
    pure = '[pure_spectra]\nfiles = ["pure.csv"]\nconcentration = 100\nnoise = 0.0001\naxis_unit = "cm-1"\n'
    wanted = make_plan(2, rest=f'{BALANCE}{WEIGHING}{pure}quantity = "absorbance"\n')
    tables = [wanted.component[0].model_copy(update={"laboratory_error": 0.5}), wanted.component[1]]
    wanted = wanted.model_copy(update={"component": tables})
    wanted._folder = str(tmp_path)
    result = plan(wanted)
    a, b, rest = result.expected
    assert (a.laboratory_error, a.laboratory_source) == (0.5, "as stated for the component")
    for c, entry in ((1, b), (2, rest)):
        assert entry.laboratory_error == pytest.approx(np.sqrt((result.weighings.uncertainties[:, c] ** 2).mean()))
    # a and b differ from the rest by (1, 0, −1)/100 and (0, 1, −1)/100: KK' = [[2, 1], [1, 2]]/10⁴, of which the
    # inverse is [[2, −1], [−1, 2]]·10⁴/3.
    assert a.sensitivity == pytest.approx(np.sqrt(1.5) / 100)
    assert rest.sensitivity == pytest.approx(np.sqrt(1.5) / 100)
    assert "Laboratory error: as stated for the component." in str(result)
    noisy = wanted.model_copy(update={"pure_spectra": wanted.pure_spectra.model_copy(update={"noise": 0.02})})
    assert "a: the expected RMSEP of" in "\n".join(plan(noisy).findings)


@pytest.mark.parametrize("name", ["plan_residual_solvents", "plan_reaction_mixture"])
def test_a_ready_plan_gives_what_it_names(repository: Path, name):
    result = plan(load_plan(repository / "configs" / f"{name}.toml"))
    assert result.judgement.largest_correlation <= 0.0505
    varied = [entry for entry in result.judgement.components if entry.component != "powder"]
    assert [entry.coverage for entry in varied] == pytest.approx([100] * 4)
    assert result.judgement.n_standards == result.judgement.e1655_standards == 30
    assert result.judgement.findings == ()
    assert result.validation_size.needed == 36
    stocks = {stock.component for stock in result.weighings.stocks}
    expected = {"ethyl acetate", "acetone", "toluene", "water"} if name == "plan_residual_solvents" else set()
    assert stocks == expected
    with_balance = [pair.r for pair in result.judgement.correlations if pair.unavoidable is not None]
    assert len(with_balance) == (4 if expected else 0)
    assert all(-0.75 < r < -0.15 for r in with_balance)


def test_cautions_speak_of_solvents_and_of_a_qualified_person():
    text = " ".join(CAUTIONS)
    assert "Solvents" in text
    assert "do not replace, a qualified person's decision" in text
