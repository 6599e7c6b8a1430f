"""What the audit costs: the whole of ``quant calibrate`` on the demo sets, against what is left without the audit.

There is no switch to leave the audit out, so that its share is timed from within, in the same run.
"""

import statistics
import time
from pathlib import Path

import pytest
from click.testing import CliRunner

from quant.calibration import calibrate as calibrating
from quant.cli.main import cli
from quant.reports import page

ROUNDS = 5
ALLOWED = 2.0
SECTIONS = {"standards", "diagnostics", "uncertainty", "detection", "decision"}
EVERYTHING = {
    "dryer_solvent": "\n[acceptance]\nmax_rmsep = 0.1\nmax_bias = 0.05\n[decision]\nlimit = 0.5\n",
    "starting_material": "\n[acceptance]\nmax_rmsep = 0.2\nmax_bias = 0.1\n[decision]\nlimit = 5.0\n",
}


@pytest.mark.benchmark
@pytest.mark.parametrize("name", EVERYTHING)
def test_the_audit_at_most_doubles_the_time(name: str, repository: Path, tmp_path: Path, monkeypatch, capsys):
    text = (repository / "configs" / f"{name}.toml").read_text("utf-8")
    recipe = tmp_path / "recipe.toml"
    recipe.write_text(text.replace("../demo_sets", str(repository / "demo_sets")) + EVERYTHING[name], "utf-8")
    spent = [0.0]

    def timed(function, counts=lambda *_: True):
        def wrapper(*arguments, **options):
            start = time.perf_counter()
            result = function(*arguments, **options)
            spent[0] += time.perf_counter() - start if counts(*arguments) else 0.0
            return result

        return wrapper

    for function in ("equip", "audit", "seal_of"):
        monkeypatch.setattr(calibrating, function, timed(getattr(calibrating, function)))
    monkeypatch.setattr(page, "render_section", timed(page.render_section, lambda part, *_: part.name in SECTIONS))
    ratios = []
    for number in range(ROUNDS + 1):
        spent[0], start = 0.0, time.perf_counter()
        done = CliRunner().invoke(cli, ["calibrate", str(recipe), "--out", str(tmp_path / str(number))])
        whole = time.perf_counter() - start
        assert done.exit_code == 0, done.output
        assert spent[0] > 0
        ratios.append(whole / (whole - spent[0]))
    ratio = statistics.median(ratios[1:])  # the first warms up
    with capsys.disabled():
        print(f"\nquant calibrate with / without audit, {name}: {ratio:.2f} (median of {ROUNDS})")
    assert ratio <= ALLOWED
