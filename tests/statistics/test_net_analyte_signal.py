"""Net analyte signal against a computed example, from pure spectra and from a regression vector."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError, ParameterError
from quant.statistics.net_analyte_signal import (
    analytical_sensitivity,
    net_analyte_signal,
    net_analyte_signal_of_vector,
)

A, B = np.array([2.0, 1.0, 0.0]), np.array([1.0, 1.0, 1.0])


def test_the_computed_example():
    # Lorber 1986; Lorber, Faber, Kowalski 1997: formulas from memory, values computed.
    found = net_analyte_signal(A, [B])
    assert found.direction * found.sensitivity == pytest.approx([1.0, 0.0, -1.0])
    assert found.sensitivity == pytest.approx(1.414214, abs=5e-7)
    assert found.selectivity == pytest.approx(0.632456, abs=5e-7)
    gamma = analytical_sensitivity(found.sensitivity, 0.01)
    assert gamma == pytest.approx(141.4, abs=0.05)
    assert 1 / gamma == pytest.approx(0.00707, abs=5e-6)


def test_the_regression_vector_tells_the_same():
    b = np.array([0.5, 0.0, -0.5])
    assert [b @ A, b @ B] == [1.0, 0.0]
    found, known = net_analyte_signal_of_vector(b, A), net_analyte_signal(A, [B])
    assert found.direction == pytest.approx(known.direction)
    assert found.sensitivity == pytest.approx(known.sensitivity)
    assert found.selectivity == pytest.approx(known.selectivity)
    assert net_analyte_signal_of_vector(b).selectivity is None


def test_alone_everything_is_net_signal():
    found = net_analyte_signal(A, np.empty((0, 3)))
    assert found.selectivity == 1.0
    assert found.sensitivity == pytest.approx(np.sqrt(5))
    repeated = net_analyte_signal(A, [B, 2 * B, B])  # spectra that repeat each other take nothing more away
    assert repeated.sensitivity == pytest.approx(np.sqrt(2))


def test_impossible_questions_are_refused():
    with pytest.raises(NotEnoughDataError, match="nothing of the analyte"):
        net_analyte_signal(A, [B, A + B])
    with pytest.raises(NotEnoughDataError, match="regression vector is zero"):
        net_analyte_signal_of_vector([0.0, 0.0])
    with pytest.raises(ParameterError, match="one axis"):
        net_analyte_signal(A, [[1.0, 2.0]])
    with pytest.raises(ParameterError, match="one axis"):
        net_analyte_signal_of_vector(A, [1.0])
    with pytest.raises(ParameterError, match="above zero"):
        analytical_sensitivity(1.0, 0.0)
