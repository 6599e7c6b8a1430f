"""Everyday prediction beside the import of NumPy alone, in turn in one run; only their ratio counts."""

import compileall
import statistics
import subprocess
import sys
import time
from pathlib import Path

import pytest

from quant.calibration.calibrate import calibrate
from quant.model.storage import save_model
from quant.recipe.load import load_recipe

PAIRS = 15
ALLOWED = 2.0


@pytest.mark.benchmark
def test_one_prediction_takes_at_most_twice_as_long_as_importing_numpy(repository: Path, tmp_path: Path, capsys):
    # As installed: with byte code, which a setting or a read-only folder may have kept from being written.
    compileall.compile_dir(str(repository / "quant"), quiet=1)
    result = calibrate(load_recipe(repository / "configs" / "gasoline.toml"))
    model = save_model(result.model, tmp_path / "octane.model")
    lines = (repository / "tests" / "reference_values" / "gasoline.csv").read_text("utf-8").splitlines()
    spectrum = tmp_path / "one.csv"
    spectrum.write_text("\n".join([lines[0], lines[1]]) + "\n", encoding="utf-8")
    predict = [sys.executable, "-m", "quant", "predict", str(model), str(spectrum)]
    load = [sys.executable, "-c", "import numpy"]
    pairs = [(_seconds(predict, repository), _seconds(load, repository)) for _ in range(PAIRS + 1)]
    pairs = pairs[1:]  # the first warms up
    ratio = statistics.median(one / other for one, other in pairs)
    with capsys.disabled():
        print(f"\nquant predict / import numpy: {ratio:.2f} (median of {PAIRS} pairs)")
    assert ratio <= ALLOWED


def _seconds(command: list[str], folder: Path) -> float:
    start = time.perf_counter()
    subprocess.run(command, check=True, cwd=folder, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start
