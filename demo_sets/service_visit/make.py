"""The dryer's spectrometer before and after a service visit: makes the files of this demo set, or visits in memory.

Everything is simulated and fictitious. `python demo_sets/service_visit/make.py` writes the same files again;
`draw_visit(rng)` draws another visit of the same kind with known truth.
"""

import csv
import importlib.util
import sys
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from types import ModuleType

import numpy as np
from numpy.typing import NDArray

from quant.files import fingerprint, write_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.simulate import PureComponent
from quant.spectra.simulate_effects import gaussian_line_shape, shift_axis
from quant.spectra.simulate_instrument import InstrumentState, measure
from quant.spectra.spectra_set import SpectraSet

HERE = Path(__file__).parent
FloatArray = NDArray[np.float64]


def _dryer() -> ModuleType:
    """Import make.py of the set whose calibration is being checked (both files bear one name)."""
    if "make_dryer_solvent" not in sys.modules:
        spec = importlib.util.spec_from_file_location("make_dryer_solvent", HERE.parent / "dryer_solvent" / "make.py")
        assert spec is not None
        assert spec.loader is not None
        sys.modules["make_dryer_solvent"] = importlib.util.module_from_spec(spec)
        spec.loader.exec_module(sys.modules["make_dryer_solvent"])
    return sys.modules["make_dryer_solvent"]


dryer = _dryer()
SEED = 20260601
BEFORE: InstrumentState = dryer.INSTRUMENT
# The interferometer was re-aligned (shift, stretch, a little resolution lost), the source exchanged (less noise) and
# the crystal's clamp set anew (gain).
AFTER = replace(BEFORE, shift=0.1, stretch=6e-5, resolution=4.3, gain=1.04, noise=6e-4)
N_CHECK, N_CONFIRMATION = 12, 12
DAY_BEFORE, DAY_AFTER, DAY_CONFIRMED = "2026-05-29", "2026-06-01", "2026-06-03"
PREPARED = ("2026-04-07", "2026-04-21", "2026-05-05", "2026-05-19")  # four batches of check standards
FILM_SCANS, BLANK_SCANS = 16, 4  # times the scans of a sample's spectrum: noise falls as the square root


@dataclass(frozen=True)
class Visit:
    """Check standards before and after, and what stands behind them.

    Attributes
    ----------
    before, after : SpectraSet
        The same standards, two spectra each.
    reference : ReferenceTable
        "ethyl acetate" with laboratory error; notes prepared, sealed.
    truth : array of shape (n_samples,)
        True ethyl acetate when the standards were prepared. [% m/m]
    """

    before: SpectraSet
    after: SpectraSet
    reference: ReferenceTable
    truth: FloatArray


def draw_visit(
    rng: np.random.Generator,
    n_standards: int = N_CHECK,
    *,
    after: InstrumentState = AFTER,
    before: InstrumentState = BEFORE,
    lost: float = 0.0,
    first: int = 101,
) -> Visit:
    """Draw check standards measured before and after a visit.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of everything random.
    n_standards : int, optional
        Three to a batch; two spectra each, before and after.
    after, before : InstrumentState, optional
        The spectrometer.
    lost : float, optional
        Share of the ethyl acetate that the oldest standards lose between the two measurements; the youngest lose none.
    first : int, optional
        Number of the first standard.
    """
    drawn = dryer.draw_part(rng, n_standards, "V")
    ids = [f"K7-V{first + i}" for i in range(n_standards)]
    batch = np.arange(n_standards) % len(PREPARED)
    composition = drawn.composition.copy()
    measured = measure(_rows(composition), dryer.AXIS.values, rng, before)
    composition[:, 0] *= 1.0 - lost * (1.0 - batch / (len(PREPARED) - 1))
    again = measure(_rows(composition), dryer.AXIS.values, rng, after)
    notes = [{"prepared": PREPARED[b], "sealed": "yes"} for b in batch.tolist()]
    analyte = Analyte("ethyl acetate", "% m/m", dryer.LABORATORY_ERROR)
    table = ReferenceTable(ids, [analyte], drawn.reference.values, notes)
    sets = [
        dryer.as_spectra(rows, ids, 2).with_notes({"date": day, "resolution": "4"})
        for rows, day in ((measured, DAY_BEFORE), (again, DAY_AFTER))
    ]
    return Visit(sets[0], sets[1], table, drawn.truth)


def film_spectrum(
    rng: np.random.Generator, state: InstrumentState, noise: float | None = None, axis: SpectralAxis = dryer.AXIS
) -> SpectraSet:
    """Draw a transmission spectrum of the polystyrene film on an instrument in some state.

    Parameters
    ----------
    rng : numpy.random.Generator
    state : InstrumentState
        Its resolution and wavenumber scale count; nothing else does.
    noise : float, optional
        Standard deviation at every point; by default that of a sample's spectrum, less for more scans. [transmittance]
    axis : SpectralAxis, optional
        Falling or rising, even. [cm⁻¹]
    """
    # On a fine axis first: a film's lines are a few points wide, and a scale error is no matter of interpolation.
    low, high = axis.values.min() - 20.0, axis.values.max() + 20.0
    fine = np.linspace(low, high, round((high - low) / 0.1) + 1)
    step = float(fine[1] - fine[0])
    light = gaussian_line_shape(10.0 ** -FILM.spectrum(fine)[None], step, state.resolution)
    light = shift_axis(light, fine, state.shift, state.stretch)[0]
    sd = state.noise / np.sqrt(FILM_SCANS) if noise is None else noise
    values = np.interp(axis.values, fine, light) + sd * rng.standard_normal(len(axis))
    return SpectraSet(values[None], axis, ["polystyrene film"], "transmittance", [{"technique": "transmission"}])


def blank_spectrum(rng: np.random.Generator, state: InstrumentState) -> SpectraSet:
    """Draw a 100 % line: the empty beam against itself, in transmittance."""
    quiet = InstrumentState(noise=state.noise / np.sqrt(BLANK_SCANS), water_vapour=state.water_vapour)
    absorbance = measure(np.zeros((1, len(dryer.AXIS))), dryer.AXIS.values, rng, quiet)
    return SpectraSet(10.0**-absorbance, dryer.AXIS, ["100 % line"], "transmittance")


def _rows(composition: FloatArray) -> FloatArray:
    rows: FloatArray = np.repeat(dryer.true_absorbances(composition), 2, axis=0)
    return rows


def read_film(path: Path) -> PureComponent:
    """Read the bands of the film, absorbances of about 38 µm."""
    with path.open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    bands = [(float(r["position"]), float(r["width"]), float(r["height"]), r["shape"]) for r in rows]
    return PureComponent("polystyrene film", bands)


FILM = read_film(HERE / "bands.csv")


def write_set(folder: Path) -> None:
    """Write every data file of the demo set, and their fingerprints, into a folder."""
    rng = np.random.default_rng(SEED)
    visit = draw_visit(rng)
    confirmation = draw_visit(rng, N_CONFIRMATION, before=AFTER, first=201)  # freshly prepared, measured after only
    _write_spectra(visit.before, DAY_BEFORE, folder / "before")
    _write_spectra(visit.after, DAY_AFTER, folder / "after")
    _write_spectra(confirmation.before, DAY_CONFIRMED, folder / "confirmation")
    for when, day, state in (("before", DAY_BEFORE, BEFORE), ("after", DAY_AFTER, AFTER)):
        _write_one(film_spectrum(rng, state), day, folder / f"film_{when}.dx")
        _write_one(blank_spectrum(rng, state), day, folder / f"blank_{when}.dx")
    _write_reference(visit.reference, folder / "reference.csv")
    _write_reference(confirmation.reference, folder / "confirmation.csv")
    both = ((visit.reference.sample_ids, visit.truth), (confirmation.reference.sample_ids, confirmation.truth))
    truth = [(sample, f"{value:.4f}") for ids, values in both for sample, value in zip(ids, values, strict=True)]
    _write_csv(folder / "truth.csv", [("sample", "ethyl_acetate"), *truth])
    made = {path.relative_to(folder).as_posix(): path for path in folder.rglob("*") if path.suffix in (".csv", ".dx")}
    files = {**made, "bands.csv": HERE / "bands.csv"}
    lines = [f"{fingerprint(path.read_bytes())}  {name}\n" for name, path in sorted(files.items())]
    write_text(folder / "fingerprints.sha256", "".join(lines))


def _write_spectra(spectra: SpectraSet, day: str, folder: Path) -> None:
    folder.mkdir(exist_ok=True)
    for old in folder.glob("*.dx"):
        old.unlink()
    for i, sample in enumerate(spectra.sample_ids):
        _write_one(spectra[i], day, folder / f"{sample}_{i % 2 + 1}.dx")


def _write_one(spectrum: SpectraSet, day: str, path: Path) -> None:
    from quant.readers.jcamp_dx.writer import write_jcamp_dx  # here: visits in memory do without

    notes = {"origin_of_file": "simulated", "resolution": "4", **spectrum.notes[0], "date": day}
    noted = SpectraSet(spectrum.values, spectrum.axis, spectrum.sample_ids, spectrum.quantity, [notes])
    write_jcamp_dx(noted, path, y_factor=1e-5 if spectrum.quantity == "absorbance" else 1e-6)


def _write_reference(table: ReferenceTable, path: Path) -> None:
    rows = [
        (sample, f"{value:.3f}", row["prepared"], row["sealed"])
        for sample, value, row in zip(table.sample_ids, table.values[:, 0], table.notes, strict=True)
    ]
    _write_csv(path, [("sample", "ethyl_acetate", "prepared", "sealed"), *rows])


def _write_csv(path: Path, rows: Iterable[Sequence[str]]) -> None:
    write_text(path, "".join(",".join(row) + "\n" for row in rows))


if __name__ == "__main__":
    write_set(HERE)
