"""ICH Q2(R2) and ISO 8466-1 figures of a line against published examples."""

import numpy as np
import pytest

from quant.errors import NotEnoughDataError
from quant.statistics.method_limits import ich_limits, method_standard_deviation
from quant.statistics.straight_line import fit_line, fit_line_through_origin, inverse_interval

FLUORESCEIN = fit_line([0, 2, 4, 6, 8, 10, 12], [2.1, 5.0, 9.0, 12.6, 17.3, 21.0, 24.7])


def test_fluorescein():
    # Miller & Miller: from memory, reproduced. LOD = a + 3·s: y 2.81640, x 0.67270; 3.3·s/b and 10·s/b computed.
    residual, intercept = ich_limits(FLUORESCEIN)
    assert residual.detection == pytest.approx(0.73997, abs=5e-6)
    assert residual.quantification == pytest.approx(2.24232, abs=5e-6)
    assert 3 / 3.3 * residual.detection == pytest.approx(0.67270, abs=5e-6)
    assert FLUORESCEIN.intercept + 3 * residual.sigma == pytest.approx(2.81640, abs=5e-6)
    assert intercept.way == "intercept SD"
    assert intercept.detection == pytest.approx(3.3 * 0.294936 / 1.930357, rel=2e-6)


def test_blanks_and_lines_through_the_origin():
    blanks = [0.10, 0.12, 0.09, 0.13]
    residual, found = ich_limits(fit_line_through_origin([1, 2, 3], [1.1, 1.9, 3.2]), blanks)
    assert (residual.way, found.way) == ("residual SD", "blanks")
    assert found.sigma == pytest.approx(np.std(blanks, ddof=1))
    assert found.quantification == pytest.approx(10 * found.sigma / found.slope)


def test_nitrite():
    # Ten standards as in ISO 8466-1 / DIN 38402-51: data from memory, attribution unverified, figures recomputed.
    x = np.arange(1, 11) * 0.05
    line = fit_line(x, [0.140, 0.281, 0.405, 0.535, 0.662, 0.789, 0.916, 1.058, 1.173, 1.303])
    sd, relative = method_standard_deviation(line)
    assert line.residual_sd == pytest.approx(0.0051659, abs=5e-8)
    assert sd == pytest.approx(0.0020060, abs=5e-8)
    assert relative == pytest.approx(0.7294, abs=5e-5)
    single, mean = (inverse_interval(line, [y], 2.3060, m) for y, m in ((0.641, 1), (0.631, 4)))
    assert [single.value[0], mean.value[0]] == pytest.approx([0.241916, 0.238033], abs=5e-7)
    assert [single.standard_error[0], mean.standard_error[0]] == pytest.approx([0.0021089, 0.0011979], abs=5e-8)
    half = [(result.high - result.low)[0] / 2 for result in (single, mean)]
    assert half == pytest.approx([0.0048632, 0.0027624], abs=2e-7)


def test_impossible_questions_are_refused():
    flat = fit_line([1, 2, 3], [1, 1, 1])
    with pytest.raises(NotEnoughDataError, match="no detection limit"):
        ich_limits(flat)
    with pytest.raises(NotEnoughDataError, match="no standard deviation"):
        method_standard_deviation(flat)
    with pytest.raises(NotEnoughDataError, match="1 blank"):
        ich_limits(FLUORESCEIN, [0.1])
