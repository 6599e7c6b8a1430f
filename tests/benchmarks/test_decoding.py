"""Reading JCAMP-DX beside numpy.loadtxt on the same ordinates as plain text, in turn in one run; only ratios count."""

import statistics
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from quant.readers.jcamp_dx.encode import FORMS
from quant.readers.jcamp_dx.scan import scan_lines
from quant.readers.jcamp_dx.tokens import decode_compressed
from quant.readers.jcamp_dx.writer import write_jcamp_dx
from quant.readers.read import read_spectra
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

N_POINTS = 200_001
ROUNDS = 15
LEAST = 1.0  # times the points a second of loadtxt, from DIF text; three times as many is the aim
Y_FACTOR = 1e-5


def absorbances(x: np.ndarray) -> np.ndarray:
    """Two bands and noise of 20 ordinate units."""
    bands = np.exp(-(((x - 1700) / 50) ** 2)) + 0.5 * np.exp(-(((x - 2900) / 90) ** 2))
    return bands + 2e-4 * np.random.default_rng(20260401).standard_normal(x.size)


def seconds(action: Callable[[], object]) -> float:
    start = time.perf_counter()
    action()
    return time.perf_counter() - start


@pytest.mark.benchmark
def test_decoding_is_at_least_as_fast_as_reading_plain_numbers(tmp_path: Path, capsys) -> None:
    axis = SpectralAxis(np.linspace(4000, 400, N_POINTS), "cm-1")
    spectrum = SpectraSet([absorbances(axis.values)], axis, ["S"])
    ordinates = np.rint(spectrum.values[0] / Y_FACTOR)
    plain = tmp_path / "plain.txt"
    np.savetxt(plain, ordinates, fmt="%d")  # one ordinate a line
    ratios = {}
    for form in FORMS:
        file = tmp_path / f"{form}.dx"
        write_jcamp_dx(spectrum, file, form, y_factor=Y_FACTOR)
        table = file.read_bytes().partition(b"(X++(Y..Y))\n")[2].partition(b"##END")[0]
        assert np.array_equal(decode_compressed(scan_lines(table)).values, ordinates)
        ratios[form] = in_turn(
            lambda: np.loadtxt(plain),
            lambda file=file: read_spectra(file),
            lambda table=table: decode_compressed(scan_lines(table)),
        )
    with capsys.disabled():
        print(f"\nJCAMP-DX, points a second / numpy.loadtxt ({N_POINTS} points, medians of {ROUNDS} rounds):")
        for form, (whole, decoder) in ratios.items():
            print(f"  {form:6s}  read_spectra {whole:.2f}  decoder {decoder:.2f}")
    assert min(ratios["DIF"]) >= LEAST


def in_turn(reference: Callable[[], object], *others: Callable[[], object]) -> list[float]:
    """Return how many times faster than the reference the others are; the first round warms up."""
    rounds = [[seconds(action) for action in (reference, *others)] for _ in range(ROUNDS + 1)][1:]
    first, *rest = (statistics.median(column) for column in zip(*rounds, strict=True))
    return [first / each for each in rest]
