"""The demo sets: made again byte for byte, read back, and as good and as bad as their READMEs say."""

import csv
import importlib.util
import sys
from collections.abc import Callable
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from quant.files import fingerprint
from quant.preprocessing.snv import snv
from quant.readers.read import read_spectra
from quant.regression.band_area import BandArea
from quant.regression.pls import PLS
from quant.units import absorbance_from_transmittance

SETS = ("dryer_solvent", "starting_material")
READ_AS = {
    "dryer_solvent": {"sample_pattern": r"(?P<sample>[A-Z0-9]+-[SVN]\d+)_(?P<replicate>\d)"},
    "starting_material": {
        "sample_column": "sample",
        "separator": ";",
        "decimal": ",",
        "axis_unit": "cm-1",
        "quantity": "percent_transmittance",
    },
}
PARTS = {
    "dryer_solvent": ("standards", "validation", "new"),
    "starting_material": ("standards.csv", "validation.csv", "new.csv"),
}
REFERENCES = {
    "dryer_solvent": ("reference.csv", "validation.csv"),
    "starting_material": ("reference.csv", "validation_reference.csv"),
}
Load = Callable[[str], ModuleType]


@pytest.fixture(scope="module")
def load(repository: Path) -> Load:
    """Import the make.py of a set (both files bear one name)."""
    loaded: dict[str, ModuleType] = {}

    def load_set(name: str) -> ModuleType:
        if name not in loaded:
            place = repository / "demo_sets" / name / "make.py"
            spec = importlib.util.spec_from_file_location(f"make_{name}", place)
            assert spec is not None
            assert spec.loader is not None
            loaded[name] = sys.modules[f"make_{name}"] = importlib.util.module_from_spec(spec)
            spec.loader.exec_module(loaded[name])
        return loaded[name]

    return load_set


def rows_of(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def left_out_error(predict: Callable[[np.ndarray], np.ndarray], y: np.ndarray, groups: np.ndarray) -> float:
    """Root mean square of predicted − true, one group left out at a time; `predict(out)` predicts what `out` marks."""
    errors = np.concatenate([predict(groups == g) - y[groups == g] for g in np.unique(groups)])
    return float(np.sqrt(np.mean(errors**2)))


@pytest.mark.parametrize("name", SETS)
def test_the_files_are_made_again_byte_for_byte(name: str, load: Load, repository: Path, tmp_path: Path) -> None:
    stored = repository / "demo_sets" / name
    load(name).write_set(tmp_path)
    listed = (stored / "fingerprints.sha256").read_text("utf-8")
    assert (tmp_path / "fingerprints.sha256").read_text("utf-8") == listed
    for line in listed.splitlines():
        sha256, file = line.split("  ")
        assert fingerprint((stored / file).read_bytes()) == sha256, file


@pytest.mark.parametrize("name", SETS)
def test_every_data_file_is_listed(name: str, repository: Path) -> None:
    stored = repository / "demo_sets" / name
    listed = {line.split("  ")[1] for line in (stored / "fingerprints.sha256").read_text("utf-8").splitlines()}
    found = {path.relative_to(stored).as_posix() for path in stored.rglob("*") if path.suffix in (".csv", ".dx")}
    assert found == listed


def test_the_sets_stay_small(repository: Path) -> None:
    files = [path for name in SETS for path in (repository / "demo_sets" / name).rglob("*") if path.is_file()]
    assert sum(path.stat().st_size for path in files) < 3_000_000


@pytest.mark.parametrize("name", SETS)
def test_spectra_and_values_of_a_set_fit_together(name: str, load: Load, repository: Path) -> None:
    folder = repository / "demo_sets" / name
    standards, validation, new = (read_spectra(folder / part, **READ_AS[name]) for part in PARTS[name])
    assert standards.axis == validation.axis == new.axis == load(name).AXIS
    drawn = load(name).draw_set(np.random.default_rng(load(name).SEED))
    for spectra, part in ((standards, drawn.standards), (validation, drawn.validation)):
        assert spectra.quantity == part.spectra.quantity
        np.testing.assert_allclose(spectra.values, part.spectra.values, atol=5.001e-6)  # as rounded in the files
    for spectra, table in zip((standards, validation), REFERENCES[name], strict=True):
        ids = [row["sample"] for row in rows_of(folder / table)]
        assert list(dict.fromkeys(spectra.sample_ids)) == ids
        assert len(spectra) == 2 * len(ids)
    truth = {row["sample"] for row in rows_of(folder / "truth.csv")}
    assert truth == {*standards.sample_ids, *validation.sample_ids, *new.sample_ids}


@pytest.mark.parametrize(("name", "column"), [("dryer_solvent", "ethyl_acetate"), ("starting_material", "nitrile_P1")])
def test_laboratory_values_scatter_about_the_truth_as_stated(
    name: str, column: str, load: Load, repository: Path
) -> None:
    folder = repository / "demo_sets" / name
    truth = {row["sample"]: float(row[column]) for row in rows_of(folder / "truth.csv")}
    rows = [row for table in REFERENCES[name] for row in rows_of(folder / table)]
    scaled = np.array([float(row[column]) - truth[row["sample"]] for row in rows]) / load(name).LABORATORY_ERROR
    # 99.9 % of chi² with n degrees of freedom, by the normal approximation of Wilson and Hilferty (from memory)
    n = scaled.size
    bounds = [n * (1 - 2 / (9 * n) + z * np.sqrt(2 / (9 * n))) ** 3 for z in (-3.29, 3.29)]
    assert bounds[0] < (scaled**2).sum() < bounds[1]


def test_spectral_error_of_the_dryer_set_is_the_one_stated(load: Load, repository: Path) -> None:
    make = load("dryer_solvent")
    folder = repository / "demo_sets" / "dryer_solvent"
    spectra = read_spectra(folder / "standards", **READ_AS["dryer_solvent"])
    truth = {row["sample"]: float(row["ethyl_acetate"]) for row in rows_of(folder / "truth.csv")}
    table = rows_of(folder / "reference.csv")
    y = np.array([truth[row["sample"]] for row in table])
    batch = np.array([row["batch"] for row in table])
    x = spectra.axis.values
    X = snv(spectra.values[:, (x >= 900) & (x <= 1850)])

    def predict(out: np.ndarray) -> np.ndarray:
        rows = np.repeat(out, 2)
        model = PLS(4).fit(X[~rows], np.repeat(y[~out], 2))
        return np.asarray(model.predict(X[rows])).reshape(-1, 2).mean(axis=1)

    error = left_out_error(predict, y, batch)
    assert f"| {error:.3f} % m/m |" in (folder / "README.md").read_text("utf-8")
    assert error >= make.LABORATORY_ERROR / 0.3


def test_spectral_error_of_the_pellet_set_is_the_one_stated(load: Load, repository: Path) -> None:
    make = load("starting_material")
    folder = repository / "demo_sets" / "starting_material"
    spectra = read_spectra(folder / "standards.csv", **READ_AS["starting_material"])
    truth = {row["sample"]: float(row["nitrile_P1"]) for row in rows_of(folder / "truth.csv")}
    y = np.array([truth[sample] for sample in dict.fromkeys(spectra.sample_ids)])
    X = absorbance_from_transmittance(spectra.values).reshape(len(y), 2, -1).mean(axis=1)

    def predict(out: np.ndarray) -> np.ndarray:
        method = BandArea(
            bands=[{"signal": "area", "range": [2212, 2240], "baseline": [2196, 2256]}],
            reference_band={"signal": "area", "range": [1386, 1438], "baseline": [1386, 1438]},
            axis=spectra.axis.values,
        )
        return np.asarray(method.fit(X[~out], y[~out]).predict(X[out]))

    error = left_out_error(predict, y, np.arange(len(y)))
    assert f"| {error:.3f} g/100 g |" in (folder / "README.md").read_text("utf-8")
    assert error >= make.LABORATORY_ERROR / 0.3


@pytest.mark.parametrize("name", SETS)
def test_sets_in_memory_have_the_shape_asked_for(name: str, load: Load) -> None:
    drawn = load(name).draw_set(np.random.default_rng(1), 9, 5, 3, replicates=3)
    for part, n in ((drawn.standards, 9), (drawn.validation, 5), (drawn.new, 3)):
        assert len(part.spectra) == 3 * n
        assert list(dict.fromkeys(part.spectra.sample_ids)) == list(part.reference.sample_ids)
        assert part.truth.shape == (n,)
    exact = load(name).draw_set(np.random.default_rng(1), laboratory_error=0.0)
    np.testing.assert_array_equal(exact.standards.reference.values[:, 0], exact.standards.truth)


@pytest.mark.parametrize("name", SETS)
def test_sets_in_memory_follow_their_generator(name: str, load: Load) -> None:
    first, again, other = (load(name).draw_set(np.random.default_rng(seed)) for seed in (1, 1, 2))
    np.testing.assert_array_equal(first.standards.spectra.values, again.standards.spectra.values)
    assert np.abs(first.standards.spectra.values - other.standards.spectra.values).max() > 1e-3


def test_one_factor_is_not_enough_for_the_dryer_set(load: Load) -> None:
    make = load("dryer_solvent")
    drawn = make.draw_set(np.random.default_rng(11), n_validation=40)
    x = make.AXIS.values
    keep = (x >= 900) & (x <= 1850)
    model = PLS(6).fit(snv(drawn.standards.spectra.values[:, keep]), np.repeat(drawn.standards.truth, 2))
    found = model.predict_each(snv(drawn.validation.spectra.values[:, keep]))
    errors = np.sqrt(np.mean((found - np.repeat(drawn.validation.truth, 2)) ** 2, axis=1))
    factors = dict(zip(model.factor_counts_, errors, strict=True))
    assert factors[1] > 2 * factors[2] or factors[1] > 2 * factors[4]
    assert factors[2] > 1.3 * factors[4]


def unexplained(basis: np.ndarray, centre: np.ndarray, rows: np.ndarray) -> np.ndarray:
    """Sum of squares that a few principal components leave of each row."""
    centred = rows - centre
    return np.asarray(((centred - centred @ basis.T @ basis) ** 2).sum(axis=1))


@pytest.mark.parametrize("kind", ["other_solvent", "other_product", "empty_crystal", "wet_sample", "wrong_quantity"])
def test_foreign_spectra_are_foreign_and_good_ones_are_not(kind: str, load: Load) -> None:
    make = load("dryer_solvent")
    rng = np.random.default_rng(12)
    x = make.AXIS.values
    keep = (x >= 900) & (x <= 1850)
    standards = snv(make.draw_part(rng, 200, "S").spectra.values[:, keep])
    centre = standards.mean(axis=0)
    basis = np.linalg.svd(standards - centre, full_matrices=False)[2][:6]
    good = unexplained(basis, centre, snv(make.draw_part(rng, 100, "N").spectra.values[:, keep]))
    foreign = unexplained(basis, centre, snv(make.foreign_spectra(rng, kind, 20)[:, keep]))
    assert foreign.min() > np.quantile(good, 0.99)
    assert np.median(foreign) > 2 * good.max()


def test_an_unknown_kind_of_foreign_spectrum_is_named(load: Load) -> None:
    with pytest.raises(ValueError, match="kind = 'ghost'; expected one of other_solvent"):
        load("dryer_solvent").foreign_spectra(np.random.default_rng(1), "ghost", 1)


def test_thickness_of_the_pellet_divides_out(load: Load) -> None:
    make = load("starting_material")
    drawn = make.draw_set(np.random.default_rng(13))
    A = absorbance_from_transmittance(drawn.standards.spectra.values)
    method = BandArea(
        bands=[{"signal": "area", "range": [2212, 2240], "baseline": [2196, 2256]}], axis=make.AXIS.values
    )
    ratio = BandArea(
        bands=method.bands,
        reference_band={"signal": "area", "range": [1386, 1438], "baseline": [1386, 1438]},
        axis=make.AXIS.values,
    )
    y = np.repeat(drawn.standards.truth, 2)
    errors = [np.std(each.fit(A, y).predict(A) - y) for each in (method, ratio)]
    assert errors[1] < 0.5 * errors[0]
