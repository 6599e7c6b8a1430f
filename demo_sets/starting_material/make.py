"""Unreacted starting material in a product, in KBr pellets: makes the files of this set, or sets like it.

Everything is simulated and fictitious. `python demo_sets/starting_material/make.py` writes the same files again;
`draw_set(rng)` draws another set of the same kind with known truth.
"""

import csv
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import date, timedelta
from functools import lru_cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from quant.files import fingerprint, write_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.simulate import Band, PureComponent, pure_spectra
from quant.spectra.simulate_instrument import InstrumentState, measure
from quant.spectra.simulate_substances import ACETONITRILE, WATER
from quant.spectra.spectra_set import SpectraSet
from quant.units import transmittance_from_absorbance

HERE = Path(__file__).parent
SEED = 20260504
LABORATORY_ERROR = 0.015  # g/100 g, standard error of one reported reference value (liquid chromatography)
AXIS = SpectralAxis(np.arange(4000.0, 399.0, -2.0), "cm-1")
INSTRUMENT = InstrumentState(
    noise=5e-4,
    resolution=4.0,
    path_variation=0.2,
    baseline_offset=0.02,
    baseline_slope=0.015,
    baseline_curvature=0.008,
    water_vapour=1e-3,
    carbon_dioxide=4e-3,
)
PELLET = 0.008  # absorbance per % m/m for a band of height 1, in a pellet of ordinary thickness
ODD = 2  # position of the new sample to which the calibration does not apply
FloatArray = NDArray[np.float64]


def read_components(path: Path) -> dict[str, PureComponent]:
    """Read band tables: component, position and width [cm-1], height for the pure substance, shape."""
    with path.open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    bands: dict[str, list[Band]] = {row["component"]: [] for row in rows}
    for row in rows:
        bands[row["component"]].append(
            Band(float(row["position"]), float(row["width"]), float(row["height"]), row["shape"])
        )
    return {name: PureComponent(name, listed) for name, listed in bands.items()}


COMPONENTS = (*read_components(HERE / "bands.csv").values(), WATER)


@dataclass(frozen=True)
class Part:
    """Spectra with laboratory values and the truth behind them.

    Attributes
    ----------
    spectra : SpectraSet
        All replicates (one pellet each) as transmittance, sample after sample.
    reference : ReferenceTable
        One row a sample; "nitrile P1" with laboratory error; notes batch, origin, day.
    truth : array of shape (n_samples,)
        True nitrile P1 for 100 g of amide P2. [g/100 g]
    """

    spectra: SpectraSet
    reference: ReferenceTable
    truth: FloatArray


@dataclass(frozen=True)
class DrawnSet:
    """Standards, separately prepared validation samples, new samples of the same process."""

    standards: Part
    validation: Part
    new: Part


def draw_set(
    rng: np.random.Generator,
    n_standards: int = 14,
    n_validation: int = 8,
    n_new: int = 4,
    *,
    replicates: int = 2,
    laboratory_error: float = LABORATORY_ERROR,
    state: InstrumentState = INSTRUMENT,
) -> DrawnSet:
    """Draw a whole set in memory: compositions, laboratory errors and spectra, all new.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of everything random.
    n_standards, n_validation, n_new : int, optional
        Numbers of samples; standards are spread evenly over the range.
    replicates : int, optional
        Pellets a sample.
    laboratory_error : float, optional
        Standard deviation of reference value minus truth. [g/100 g]
    state : InstrumentState, optional
        The spectrometer.
    """
    standards = np.linspace(0.5, 8.0, n_standards) if n_standards > 1 else np.full(n_standards, 4.0)
    return DrawnSet(
        draw_part(rng, standards, "S", 1, replicates, laboratory_error, state),
        draw_part(rng, rng.uniform(0.7, 7.5, n_validation), "V", 11, replicates, laboratory_error, state),
        draw_part(rng, rng.uniform(0.7, 7.5, n_new), "N", 21, replicates, laboratory_error, state),
    )


def draw_part(
    rng: np.random.Generator,
    truth: FloatArray,
    letter: str,
    first_batch: int = 1,
    replicates: int = 2,
    laboratory_error: float = LABORATORY_ERROR,
    state: InstrumentState = INSTRUMENT,
    foreign: FloatArray | float = 0.0,
) -> Part:
    """Draw samples of known nitrile [g/100 g amide]; `foreign`: true absorbances to add, (n_samples, n_points)."""
    n_samples = len(truth)
    values = truth[:, None] + laboratory_error * rng.standard_normal((n_samples, 1))
    ids = [f"P2-{letter}{number:02d}" for number in range(1, n_samples + 1)]
    origin = "blended" if letter == "S" else "process"
    batches = [first_batch + i // 2 for i in range(n_samples)]
    notes = [{"batch": f"C{batch:02d}", "origin": origin, "day": _day(batch)} for batch in batches]
    rows = np.repeat(true_absorbances(truth, rng.uniform(0.1, 1.5, n_samples)) + foreign, replicates, axis=0)
    # Each pellet takes up moisture of its own while it is pressed.
    rows = rows + rng.uniform(3.0, 12.0, (len(rows), 1)) * _pure()[-1]
    light = transmittance_from_absorbance(SCATTER + measure(rows, AXIS.values, rng, state))
    spectra = SpectraSet(light, AXIS, [sample for sample in ids for _ in range(replicates)], "transmittance")
    return Part(
        spectra, ReferenceTable(ids, [Analyte("nitrile P1", "g/100 g", laboratory_error)], values, notes), truth
    )


def true_absorbances(nitrile: FloatArray, acid: FloatArray) -> FloatArray:
    """Absorbances that Beer-Lambert gives for nitrile and acid, both in g for 100 g of amide (dry, even pellet)."""
    parts = np.column_stack([np.full_like(nitrile, 100.0), nitrile, acid])
    shares: FloatArray = 100.0 * parts / parts.sum(axis=1, keepdims=True)  # % m/m
    return shares @ _pure()[:3]


# Grains scatter the shorter waves: a baseline that rises towards high wavenumbers.
SCATTER = 0.08 + 0.14 * (AXIS.values / 4000.0) ** 2


@lru_cache(maxsize=1)
def _pure() -> FloatArray:
    return PELLET * pure_spectra(COMPONENTS, AXIS.values)


def _day(batch: int) -> str:
    """Return the day a batch was measured, the next one the day after."""
    return (date(2026, 5, 4) + timedelta(days=batch - 1)).isoformat()


def write_set(folder: Path) -> None:
    """Write every data file of the demo set, and their fingerprints, into a folder."""
    rng = np.random.default_rng(SEED)
    drawn = draw_set(rng)
    acetonitrile = np.zeros(len(drawn.new.truth))
    acetonitrile[ODD] = 2.0  # % m/m, left from a wash
    foreign = acetonitrile[:, None] * PELLET * ACETONITRILE.spectrum(AXIS.values)
    new = draw_part(rng, drawn.new.truth, "N", 21, foreign=foreign)
    parts = {"standards": drawn.standards, "validation": drawn.validation, "new": new}
    for name, part in parts.items():
        _write_matrix(part.spectra, folder / f"{name}.csv")
    _write_reference(drawn.standards.reference, folder / "reference.csv")
    _write_reference(drawn.validation.reference, folder / "validation_reference.csv")
    truth = [
        (sample, f"{value:.4f}", f"{wash:.4f}")
        for name, part in parts.items()
        for sample, value, wash in zip(
            part.reference.sample_ids,
            part.truth,
            acetonitrile if name == "new" else np.zeros(len(part.truth)),
            strict=True,
        )
    ]
    _write_csv(folder / "truth.csv", [("sample", "nitrile_P1", "acetonitrile"), *truth])
    write_fingerprints(folder)


def write_fingerprints(folder: Path) -> None:
    """List the SHA-256 of every data file, as `sha256sum --check fingerprints.sha256` reads it."""
    files = {**{path.name: path for path in folder.glob("*.csv")}, "bands.csv": HERE / "bands.csv"}
    lines = [f"{fingerprint(path.read_bytes())}  {name}\n" for name, path in sorted(files.items())]
    write_text(folder / "fingerprints.sha256", "".join(lines))


def _write_matrix(spectra: SpectraSet, path: Path) -> None:
    """Write one spectrum a row as instruments in many countries export: %T, semicolons, decimal commas."""
    header = ["sample", "pellet", *(f"{position:.0f}" for position in AXIS.values)]
    rows = [
        [sample, str(i % 2 + 1), *(f"{value:.3f}".replace(".", ",") for value in row)]
        for i, (sample, row) in enumerate(zip(spectra.sample_ids, 100.0 * spectra.values, strict=True))
    ]
    _write_csv(path, [header, *rows], separator=";")


def _write_reference(table: ReferenceTable, path: Path) -> None:
    rows = [
        (sample, f"{value:.3f}", row["batch"], row["origin"], row["day"])
        for sample, value, row in zip(table.sample_ids, table.values[:, 0], table.notes, strict=True)
    ]
    _write_csv(path, [("sample", "nitrile_P1", "batch", "origin", "day"), *rows])


def _write_csv(path: Path, rows: Iterable[Sequence[str]], separator: str = ",") -> None:
    write_text(path, "".join(separator.join(row) + "\n" for row in rows))


if __name__ == "__main__":
    write_set(HERE)
