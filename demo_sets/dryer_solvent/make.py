"""Residual solvent at the end point of drying: makes the files of this demo set, or sets like it in memory.

Everything is simulated and fictitious. `python demo_sets/dryer_solvent/make.py` writes the same files again;
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
from quant.spectra.simulate_effects import atr_depth, water_vapour_spectrum
from quant.spectra.simulate_instrument import InstrumentState, measure
from quant.spectra.simulate_substances import ACETONE, ETHYL_ACETATE, WATER
from quant.spectra.spectra_set import SpectraSet

HERE = Path(__file__).parent
SEED = 20260302
LABORATORY_ERROR = 0.009  # % m/m, standard error of one reported reference value (gas chromatography)
AXIS = SpectralAxis(np.arange(4000.0, 649.0, -2.0), "cm-1")
INSTRUMENT = InstrumentState(
    noise=8e-4,
    resolution=4.0,
    path_variation=0.12,
    baseline_offset=4e-3,
    baseline_slope=2e-3,
    baseline_curvature=1.2e-3,
    water_vapour=4e-4,
    carbon_dioxide=1e-3,
)
# Absorbance at 1000 cm-1 per % m/m of a band of height 1: powder pressed on the crystal, one reflection.
CONTACT = 0.004
ODD = 3  # position of the new sample to which the calibration does not apply
FOREIGN = ("other_solvent", "other_product", "empty_crystal", "wet_sample", "wrong_quantity")
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


PRODUCT, IMPURITY = read_components(HERE / "bands.csv").values()
# The product's disordered share has wider, slightly shifted bands.
COMPONENTS = (PRODUCT, PRODUCT.broadened(1.8, shift=3.0), ETHYL_ACETATE, WATER, IMPURITY)


@dataclass(frozen=True)
class Part:
    """Spectra with laboratory values and the truth behind them.

    Attributes
    ----------
    spectra : SpectraSet
        All replicates, sample after sample.
    reference : ReferenceTable
        One row a sample; "ethyl acetate" with laboratory error; notes batch, origin, day.
    truth : array of shape (n_samples,)
        True ethyl acetate. [% m/m]
    composition : array of shape (n_samples, 4)
        True ethyl acetate, water, precursor K6 [% m/m] and disordered share of the product [%].
    """

    spectra: SpectraSet
    reference: ReferenceTable
    truth: FloatArray
    composition: FloatArray


@dataclass(frozen=True)
class DrawnSet:
    """Standards, separately prepared validation samples, new samples of the same process."""

    standards: Part
    validation: Part
    new: Part


def draw_set(
    rng: np.random.Generator,
    n_standards: int = 36,
    n_validation: int = 16,
    n_new: int = 5,
    *,
    replicates: int = 2,
    laboratory_error: float = LABORATORY_ERROR,
    state: InstrumentState = INSTRUMENT,
) -> DrawnSet:
    """Draw a whole set in memory: batches, compositions, laboratory errors and spectra, all new.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of everything random.
    n_standards, n_validation, n_new : int, optional
        Numbers of samples; four to a batch.
    replicates : int, optional
        Spectra a sample, each of a fresh portion on the crystal.
    laboratory_error : float, optional
        Standard deviation of reference value minus truth. [% m/m]
    state : InstrumentState, optional
        The spectrometer.
    """
    return DrawnSet(
        draw_part(rng, n_standards, "S", 1, replicates, laboratory_error, state),
        draw_part(rng, n_validation, "V", 41, replicates, laboratory_error, state),
        draw_part(rng, n_new, "N", 61, replicates, laboratory_error, state),
    )


def draw_part(
    rng: np.random.Generator,
    n_samples: int,
    letter: str,
    first_batch: int = 1,
    replicates: int = 2,
    laboratory_error: float = LABORATORY_ERROR,
    state: InstrumentState = INSTRUMENT,
) -> Part:
    """Draw samples that the calibration is meant for: K7-<letter>01 ..., four to a batch."""
    batch = np.arange(n_samples) // 4
    # Half of the standards break the tie between solvent and water that the process has.
    process = (np.arange(n_samples) % 4 < 2) if letter == "S" else np.ones(n_samples, dtype=bool)
    composition = _compositions(rng, batch, process)
    values = composition[:, :1] + laboratory_error * rng.standard_normal((n_samples, 1))
    ids = [f"K7-{letter}{number:02d}" for number in range(1, n_samples + 1)]
    origins = [("process" if drawn else ("spiked", "blended")[i % 2]) for i, drawn in enumerate(process)]
    notes = [
        {"batch": f"B{first_batch + b:02d}", "origin": origin, "day": _day(first_batch + b)}
        for b, origin in zip(batch.tolist(), origins, strict=True)
    ]
    rows = np.repeat(true_absorbances(composition), replicates, axis=0)
    spectra = as_spectra(measure(rows, AXIS.values, rng, state), ids, replicates)
    table = ReferenceTable(ids, [Analyte("ethyl acetate", "% m/m", laboratory_error)], values, notes)
    return Part(spectra, table, composition[:, 0], composition)


def foreign_spectra(
    rng: np.random.Generator, kind: str, n_spectra: int, state: InstrumentState = INSTRUMENT
) -> FloatArray:
    """Draw spectra to which the calibration does not apply, shape (n_spectra, n_points).

    Parameters
    ----------
    rng : numpy.random.Generator
    kind : {"other_solvent", "other_product", "empty_crystal", "wet_sample", "wrong_quantity"}
        Acetone besides ethyl acetate; another product (the precursor, still unreacted); nothing on the crystal; wet
        product under strong water vapour; transmittance handed over as if it were absorbance.
    n_spectra : int
    state : InstrumentState, optional
        The spectrometer.
    """
    composition = _compositions(rng, np.arange(n_spectra), np.ones(n_spectra, dtype=bool))
    spectra = true_absorbances(composition)
    pure = CONTACT * atr_depth(pure_spectra((ACETONE, IMPURITY, WATER), AXIS.values), AXIS.values)
    amount = rng.uniform(4.0, 8.0, (n_spectra, 1))  # % m/m: plainly another material
    if kind == "other_solvent":
        spectra += amount * pure[0]
    elif kind == "other_product":
        spectra = (98.0 - amount) * pure[1]
    elif kind == "empty_crystal":
        spectra = np.zeros_like(spectra)
    elif kind == "wet_sample":
        spectra += 2.0 * amount * pure[2] + 0.004 * amount * water_vapour_spectrum(AXIS.values, state.resolution)
    elif kind != "wrong_quantity":
        raise ValueError(f"kind = {kind!r}; expected one of {', '.join(FOREIGN)}.")
    measured = measure(spectra, AXIS.values, rng, state)
    return 10.0**-measured if kind == "wrong_quantity" else measured


def true_absorbances(composition: FloatArray) -> FloatArray:
    """Absorbances that Beer-Lambert gives for rows of (ethyl acetate, water, K6 [% m/m], disordered share [%])."""
    solvent, water, impurity, disordered = composition.T
    product = 100.0 - solvent - water - impurity
    amounts = (product * (1 - disordered / 100), product * disordered / 100, solvent, water, impurity)
    return np.column_stack(amounts) @ _pure()


def as_spectra(rows: FloatArray, ids: Sequence[str], replicates: int) -> SpectraSet:
    """Name rows that belong to samples, `replicates` rows each."""
    return SpectraSet(rows, AXIS, [sample for sample in ids for _ in range(replicates)])


@lru_cache(maxsize=1)
def _pure() -> FloatArray:
    return CONTACT * atr_depth(pure_spectra(COMPONENTS, AXIS.values), AXIS.values)


def _compositions(rng: np.random.Generator, batch: NDArray[np.intp], process: NDArray[np.bool_]) -> FloatArray:
    """Rows of (ethyl acetate, water, K6, disordered share); solvent and water leave the dryer together."""
    n = len(batch)
    n_batches = int(batch.max(initial=-1)) + 1
    solvent = rng.uniform(0.1, 2.0, n)
    drying_together = 0.08 + 0.22 * solvent + 0.05 * np.abs(rng.standard_normal(n))
    water = np.where(process, drying_together, rng.uniform(0.08, 0.8, n))
    impurity = rng.uniform(0.2, 1.8, n_batches)[batch] * np.exp(0.08 * rng.standard_normal(n))
    disordered = rng.uniform(0.5, 8.0, n_batches)[batch] * np.exp(0.15 * rng.standard_normal(n))
    return np.column_stack([solvent, water, impurity, disordered])


def _day(batch: int) -> str:
    """Return the day a batch was measured, the next one two days later."""
    return (date(2026, 3, 2) + timedelta(days=2 * (batch - 1))).isoformat()


def write_set(folder: Path) -> None:
    """Write every data file of the demo set, and their fingerprints, into a folder."""
    rng = np.random.default_rng(SEED)
    drawn = draw_set(rng)
    acetone = np.zeros(len(drawn.new.truth))
    acetone[ODD] = 2.5  # % m/m
    rows = true_absorbances(drawn.new.composition) + acetone[:, None] * (CONTACT * _acetone())
    measured = measure(np.repeat(rows, 2, axis=0), AXIS.values, rng, INSTRUMENT)
    new = as_spectra(measured, drawn.new.reference.sample_ids, 2)
    parts = {"standards": drawn.standards, "validation": drawn.validation, "new": drawn.new}
    for name, part in parts.items():
        _write_spectra(new if name == "new" else part.spectra, part.reference, folder / name)
    _write_reference(drawn.standards.reference, folder / "reference.csv")
    _write_reference(drawn.validation.reference, folder / "validation.csv")
    truth = [
        (sample, *(f"{value:.4f}" for value in row), f"{foreign:.4f}")
        for name, part in parts.items()
        for sample, row, foreign in zip(
            part.reference.sample_ids,
            part.composition,
            acetone if name == "new" else np.zeros(len(part.truth)),
            strict=True,
        )
    ]
    header = ("sample", "ethyl_acetate", "water", "precursor_K6", "disordered_share", "acetone")
    _write_csv(folder / "truth.csv", [header, *truth])
    write_fingerprints(folder)


def write_fingerprints(folder: Path) -> None:
    """List the SHA-256 of every data file, as `sha256sum --check fingerprints.sha256` reads it."""
    made = {path.relative_to(folder).as_posix(): path for path in [*folder.glob("*.csv"), *folder.glob("*/*.dx")]}
    files = {**made, "bands.csv": HERE / "bands.csv"}
    lines = [f"{fingerprint(path.read_bytes())}  {name}\n" for name, path in sorted(files.items())]
    write_text(folder / "fingerprints.sha256", "".join(lines))


def _acetone() -> FloatArray:
    return atr_depth(ACETONE.spectrum(AXIS.values), AXIS.values)


def _write_spectra(spectra: SpectraSet, table: ReferenceTable, folder: Path) -> None:
    folder.mkdir(exist_ok=True)
    for old in folder.glob("*.dx"):
        old.unlink()
    day = {sample: row["day"] for sample, row in zip(table.sample_ids, table.notes, strict=True)}
    from quant.readers.jcamp_dx.writer import write_jcamp_dx  # here: sets in memory do without

    for i, sample in enumerate(spectra.sample_ids):
        notes = {"title": sample, "origin_of_file": "simulated", "date": day[sample], "resolution": "4"}
        write_jcamp_dx(spectra[i].with_notes(notes), folder / f"{sample}_{i % 2 + 1}.dx", form="DIFDUP", y_factor=1e-5)


def _write_reference(table: ReferenceTable, path: Path) -> None:
    rows = [
        (sample, f"{value:.3f}", row["batch"], row["origin"], row["day"])
        for sample, value, row in zip(table.sample_ids, table.values[:, 0], table.notes, strict=True)
    ]
    _write_csv(path, [("sample", "ethyl_acetate", "batch", "origin", "day"), *rows])


def _write_csv(path: Path, rows: Iterable[Sequence[str]]) -> None:
    write_text(path, "".join(",".join(row) + "\n" for row in rows))


if __name__ == "__main__":
    write_set(HERE)
