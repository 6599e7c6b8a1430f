"""The demo set of the service visit: made again byte for byte, small, and as its README says."""

import csv
import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from quant.files import fingerprint
from quant.readers.read import read_spectra
from quant.revalidation.film import film_evidence
from quant.revalidation.instrument import instrument_evidence

PATTERN = r"(?P<sample>[A-Z0-9]+-[SVN]\d+)_(?P<replicate>\d)"


@pytest.fixture(scope="module")
def place(repository: Path) -> Path:
    return repository / "demo_sets" / "service_visit"


@pytest.fixture(scope="module")
def make(place: Path) -> ModuleType:
    spec = importlib.util.spec_from_file_location("make_service_visit", place / "make.py")
    assert spec is not None
    assert spec.loader is not None
    module = sys.modules["make_service_visit"] = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_the_files_are_made_again_byte_for_byte(make: ModuleType, place: Path, tmp_path: Path) -> None:
    make.write_set(tmp_path)
    listed = (place / "fingerprints.sha256").read_text("utf-8")
    assert (tmp_path / "fingerprints.sha256").read_text("utf-8") == listed
    for line in listed.splitlines():
        sha256, file = line.split("  ")
        assert fingerprint((place / file).read_bytes()) == sha256, file


def test_every_data_file_is_listed_and_the_set_is_small(place: Path) -> None:
    listed = {line.split("  ")[1] for line in (place / "fingerprints.sha256").read_text("utf-8").splitlines()}
    found = [path for path in place.rglob("*") if path.suffix in (".csv", ".dx")]
    assert {path.relative_to(place).as_posix() for path in found} == listed
    assert sum(path.stat().st_size for path in found) < 1_000_000


@pytest.mark.parametrize(("part", "table"), [("before", "reference"), ("after", "reference"), ("confirmation",) * 2])
def test_spectra_and_reference_values_fit_together(part: str, table: str, place: Path) -> None:
    spectra = read_spectra(place / part, sample_pattern=PATTERN)
    with (place / f"{table}.csv").open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    assert list(dict.fromkeys(spectra.sample_ids)) == [row["sample"] for row in rows]
    assert len(spectra) == 2 * len(rows) == 24
    assert {row["date"] for row in map(dict, spectra.notes)} == {
        {"before": "2026-05-29", "after": "2026-06-01", "confirmation": "2026-06-03"}[part]
    }


def test_the_film_shows_what_was_done_to_the_axis(make: ModuleType, place: Path) -> None:
    now, before = (read_spectra(place / f"film_{when}.dx") for when in ("after", "before"))
    assert now.quantity == "transmittance"
    found = film_evidence(now, before)
    assert found.passed  # within the pharmacopoeia's tolerances, and yet too much for the calibration
    change = found.axis_change
    assert change is not None
    assert change.stretch == pytest.approx(make.AFTER.stretch, abs=4 * change.stretch_error)
    assert change.at(0.0) == pytest.approx(make.AFTER.shift, abs=0.03)
    assert "±1" in str(found) or "within tolerance" in str(found)


def test_the_new_source_is_quieter(make: ModuleType, place: Path) -> None:
    now, before = (read_spectra(place / f"blank_{when}.dx") for when in ("after", "before"))
    found = instrument_evidence(now, before)
    assert found.noisier is False
    ratio = np.mean([w.rms / w.previous_rms for w in found.noise])
    assert ratio == pytest.approx(make.AFTER.noise / make.BEFORE.noise, abs=0.25)


def test_losses_go_with_age(make: ModuleType) -> None:
    quiet = {"noise": 0.0, "path_variation": 0.0, "baseline_offset": 0.0, "baseline_slope": 0.0, "water_vapour": 0.0}
    state = make.replace(make.BEFORE, **quiet, baseline_curvature=0.0, carbon_dioxide=0.0)
    visit = make.draw_visit(np.random.default_rng(1), before=state, after=state, lost=0.5)
    fallen = (visit.before.values - visit.after.values)[::2]
    solvent = int(np.argmin(np.abs(visit.before.axis.values - 1741.0)))
    share = fallen[:, solvent] / visit.truth
    oldest = np.array([note["prepared"] == make.PREPARED[0] for note in visit.reference.notes])
    youngest = np.array([note["prepared"] == make.PREPARED[-1] for note in visit.reference.notes])
    assert fallen[youngest] == pytest.approx(0.0, abs=1e-12)
    assert share[oldest].min() > 0
