"""What the report shows of each regression method."""

import re

import pytest

from quant.reports.contents import SECTIONS
from quant.reports.page import render_section

BY_NAME = {section.name: section for section in SECTIONS}
BAND = 'method = "band_area"\nbands = [{ signal = "area", range = [1030, 1010] }]\n'
CASES = {
    "pcr": 'method = "pcr"\nmax_factors = 2',
    "components": 'method = "classical_least_squares"\nbackground = true\nbaseline = "offset"',
    "non-negative": 'method = "classical_least_squares"\nbackground = true\nnon_negative = true',
    "quadratic": f'{BAND}curve = "quadratic"',
    "weighted": f'{BAND}line_weights = "1/x"',
}


@pytest.fixture(scope="module")
def results(make):
    return {name: make(regression) for name, regression in CASES.items()}


def shown(name, result):
    return render_section(BY_NAME[name], result)


@pytest.mark.parametrize("case", CASES)
def test_every_section_renders(results, case):
    for section in BY_NAME.values():
        assert render_section(section, results[case]).strip()


def test_principal_components_show_their_vector_and_what_they_explain(results):
    assert "Regression vector" in shown("view", results["pcr"])
    assert "Variance explained" in shown("calibration", results["pcr"])
    assert re.search(r"PCR, \d factor", shown("answer", results["pcr"]))


def test_classical_least_squares_shows_pure_and_residual_spectra(results):
    view = shown("view", results["components"])
    for text in ("Pure spectrum: acetone.", "Pure spectrum: background.", "What the components leave", "offset"):
        assert text in view
    assert view.count("<svg ") == 3
    assert "classical least squares, 1 component and a background" in shown("answer", results["components"])
    assert "held at zero" in shown("view", results["non-negative"])
    assert "allowed" in view


def test_the_picture_holds_what_classical_least_squares_found(results):
    found = results["components"].analytes[0]
    picture, method = found.picture, found.model.method
    assert picture.components == ("acetone", "background")
    assert picture.pure_spectra.tolist() == [*method.pure_spectra_.tolist(), method.background_.tolist()]
    assert picture.residual_spectra.shape == picture.processed.shape
    assert picture.regression_vector.tolist() == method.coefficients_[0].tolist()
    assert results["non-negative"].analytes[0].picture.regression_vector is None


def test_a_quadratic_shows_its_terms_and_its_picture(results):
    view = shown("view", results["quadratic"])
    for text in ("Calibration quadratic with its samples.", "quadratic coefficient", "the quadratic turns at"):
        assert text in view
    found = results["quadratic"].analytes[0]
    contents, signals = found.picture.curve
    assert [contents[0], contents[-1]] == [found.model.method.curve_.lowest, found.model.method.curve_.highest]
    assert signals.tolist() == found.model.method.signal_at(contents).tolist()
    assert "band area, quadratic" in shown("answer", results["quadratic"])


def test_weights_are_named(results):
    assert "1/x; results state the weight of their own signal" in shown("view", results["weighted"])
    assert "band area, straight line, weights 1/x" in shown("answer", results["weighted"])


def test_results_turn_into_json(results):
    for result in results.values():
        assert result.to_dict()["analytes"]
