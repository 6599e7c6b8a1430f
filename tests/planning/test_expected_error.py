import numpy as np
import pytest

from quant.errors import DataError, ParameterError
from quant.planning.expected_error import expected_errors, mean_leverage, net_signals

A_AND_B = np.array([[2.0, 1.0, 0.0], [1.0, 1.0, 1.0]])


def test_the_worked_example():
    # Formulas from memory (Lorber 1986; Lorber, Faber, Kowalski 1997), numbers computed: s_A = (2, 1, 0) and
    # s_B = (1, 1, 1) give the net analyte signal (1, 0, −1) of A, SEN 1.414214, SEL 0.632456.
    a, _ = net_signals(A_AND_B, ["A", "B"])
    assert a.sensitivity == pytest.approx(1.414214, abs=5e-7)
    assert a.selectivity == pytest.approx(0.632456, abs=5e-7)
    # Noise 0.01: smallest distinguishable difference 0.00707.
    standards = np.array([[0.0, 0.0], [0.0, 9.0], [9.0, 0.0], [9.0, 9.0]])
    found = expected_errors(A_AND_B, ["A", "B"], standards, standards, 0.01, [(0.0, "")] * 2)[0]
    assert found.noise_part == pytest.approx(0.00707, abs=5e-6)


def test_signals_equal_the_projection_that_defines_them():
    spectra = np.random.default_rng(1).random((4, 30))
    for c, found in enumerate(net_signals(spectra, list("abcd"))):
        others = np.delete(spectra, c, axis=0).T
        net = spectra[c] - others @ np.linalg.pinv(others) @ spectra[c]
        assert found.sensitivity == pytest.approx(np.linalg.norm(net))
        assert found.selectivity == pytest.approx(np.linalg.norm(net) / np.linalg.norm(spectra[c]))


def test_a_fixed_total_counts_differences_to_the_balance():
    spectra = np.random.default_rng(2).random((3, 20))
    closed = net_signals(spectra, ["a", "b", "rest"], closed=True)
    differences = net_signals(spectra[:2] - spectra[2], ["a", "b"])
    assert [s.sensitivity for s in closed[:2]] == pytest.approx([s.sensitivity for s in differences])
    # The balance is minus the sum of the others, so its regression vector is minus the sum of theirs.
    vectors = np.linalg.pinv(spectra[:2] - spectra[2])
    assert closed[2].sensitivity == pytest.approx(1 / np.linalg.norm(vectors.sum(axis=1)))
    assert 0 < closed[2].selectivity <= 1


def test_mean_leverage_of_the_standards_themselves():
    standards = np.random.default_rng(3).random((12, 3))
    assert mean_leverage(standards, standards) == pytest.approx(4 / 12)  # (k + 1)/n
    assert mean_leverage(standards, standards.mean(axis=0, keepdims=True)) == pytest.approx(1 / 12)
    with pytest.raises(DataError, match="do not vary the components independently"):
        mean_leverage(standards[:, [0, 0]], standards[:, [0, 0]])


def test_little_noise_gives_the_textbook_formula():
    rng = np.random.default_rng(4)
    spectra, standards, samples = rng.random((2, 50)), rng.random((10, 2)), rng.random((5, 2))
    h = mean_leverage(standards, samples)
    for found in expected_errors(spectra, ["a", "b"], standards, samples, 1e-6, [(2e-6, "x"), (0.0, "y")]):
        expected = found.noise_part**2 * (1 + h) + found.laboratory_error**2 * h
        assert found.against_truth**2 == pytest.approx(expected, rel=1e-4)
        assert found.against_reference**2 == pytest.approx(expected + found.laboratory_error**2, rel=1e-4)
        assert found.shrinkage < 1e-4 * found.noise_part


@pytest.mark.parametrize(
    ("spectra", "closed", "message"),
    [
        ([[1.0, 2.0, 3.0], [2.0, 4.0, 6.0], [1.0, 0.0, 1.0]], False, "spectra of a, b cannot be told apart"),
        ([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [1.0, 2.0, 0.0]], False, "spectra of a, b, c cannot be told apart"),
        ([[1.0, 2.0], [2.0, 1.0], [1.0, 1.0]], False, "cannot be told apart"),
        ([[1.0, 2.0, 0.0], [1.0, 0.0, 1.0], [1.0, 2.0, 0.0]], True, "spectra of a cannot be told apart"),
        ([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]], False, "spectra of a cannot be told apart"),
    ],
)
def test_spectra_that_no_calibration_can_tell_apart(spectra, closed, message):
    with pytest.raises(DataError, match=message):
        net_signals(spectra, ["a", "b", "c"], closed=closed)


def test_numbers_that_do_not_fit():
    with pytest.raises(ParameterError, match="2 pure spectra for components a; expected one each"):
        net_signals(A_AND_B, ["a"])
    with pytest.raises(ParameterError, match="1 pure spectra for components rest"):
        net_signals(A_AND_B[:1], ["rest"], closed=True)
