"""Residual-solvent limits: ICH Q3C(R8), from memory, the arithmetic recomputed."""

import pytest

from quant.chemistry.solvent_limits import daily_intake, solvent_limit, solvent_names
from quant.errors import ParameterError


@pytest.mark.parametrize(
    ("name", "solvent_class", "pde", "ppm"),
    [
        ("benzene", 1, None, 2),
        ("1,1,1-trichloroethane", 1, None, 1500),
        ("acetonitrile", 2, 4.1, 410),
        ("dichloromethane", 2, 6.0, 600),
        ("ethylene glycol", 2, 6.2, 620),  # found: page of the European Medicines Agency
        ("cyclopentyl methyl ether", 2, 15, 1500),  # found: announcement of Q3C(R8), as the next two
        ("tert-butyl alcohol", 2, 35, 3500),
        ("2-methyltetrahydrofuran", 3, 50, 5000),
        ("ethyl acetate", 3, 50, 5000),
    ],
)
def test_limits_of_option_1(name, solvent_class, pde, ppm):
    found = solvent_limit(name)
    assert (found.solvent_class, found.pde, found.ppm) == (solvent_class, pde, ppm)
    assert "to be confirmed against the edition in force" in found.edition


def test_every_concentration_is_100_times_the_exposure():
    with_exposure = [found for found in map(solvent_limit, solvent_names()) if found.pde is not None]
    assert len(with_exposure) == len(solvent_names()) - 5  # all but class 1
    for found in with_exposure:
        assert found.ppm == pytest.approx(100 * found.pde)  # option 1 of the guideline: a dose of 10 g/day


def test_a_dose_of_ones_own():
    assert solvent_limit("acetonitrile", 5.0).ppm == pytest.approx(820)  # 1000·4.1/5
    assert solvent_limit("acetonitrile", 20.0).ppm == pytest.approx(205)
    assert solvent_limit("acetonitrile", 10.0) == solvent_limit("acetonitrile")
    assert (solvent_limit("benzene", 1.0).ppm, solvent_limit("benzene", 1.0).dose_g) == (2, None)


@pytest.mark.parametrize(
    ("name", "solvent"),
    [
        ("DMF", "N,N-dimethylformamide"),
        ("n,n dimethyl formamide", "N,N-dimethylformamide"),
        ("Isopropanol", "2-propanol"),
        ("ethylbenzene", "xylene"),
        ("MTBE", "tert-butyl methyl ether"),
    ],
)
def test_second_names_and_spellings(name, solvent):
    assert solvent_limit(name).solvent == solvent


def test_no_name_means_two_solvents():
    assert len(set(solvent_names())) == len(solvent_names())
    for name in solvent_names():
        assert solvent_limit(name).solvent == name


def test_option_2_worked_case_of_the_guideline():
    # The guideline's example (from memory, arithmetic checked): acetonitrile in drug substance and two excipients.
    found = daily_intake("acetonitrile", [(0.3, 800), (0.9, 400), (3.8, 800)])
    assert found.intake == pytest.approx(3.64)
    assert found.dose_g == pytest.approx(5.0)
    assert found.ppm == pytest.approx(728)  # above the 410 of option 1 and yet permitted
    assert found.passes
    worse = daily_intake("acetonitrile", [(0.3, 800), (0.9, 2000), (3.8, 800)])
    assert worse.intake == pytest.approx(5.08)
    assert worse.ppm == pytest.approx(1016)
    assert not worse.passes


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: solvent_limit("acetonitril"), "Did you mean acetonitrile"),
        (lambda: solvent_limit("unobtainium"), "expected one of its"),
        (lambda: solvent_limit("triethylamine"), "contradict each other"),
        (lambda: solvent_limit("acetone", 0.0), "above 0"),
        (lambda: daily_intake("benzene", [(1, 1)]), "class 1"),
        (lambda: daily_intake("acetone", []), "at least one"),
        (lambda: daily_intake("acetone", [(0, 5)]), "weigh nothing"),
        (lambda: daily_intake("acetone", [(1, -5)]), "no number below 0"),
    ],
)
def test_what_is_refused(call, words):
    with pytest.raises(ParameterError, match=words):
        call()


def test_the_limit_in_one_line():
    assert str(solvent_limit("acetone", 5)).startswith(
        "acetone: 10000 mg/kg (class 3, at least 50 mg/day, dose 5 g/day; ICH Q3C(R8)"
    )
    assert str(solvent_limit("benzene")).startswith("benzene: 2 mg/kg (class 1; ICH")
