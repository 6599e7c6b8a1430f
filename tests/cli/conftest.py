"""A folder with all that a user has: spectra, reference values, a recipe; and the command line."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner, Result

from quant.calibration.calibrate import calibrate
from quant.cli.main import cli
from quant.model.storage import save_model
from quant.readers.matrix import write_matrix
from quant.recipe.load import load_recipe
from quant.spectra.axis import SpectralAxis
from quant.spectra.spectra_set import SpectraSet

RECIPE = """title = "Acid in a powder"

[spectra]
files = ["spectra.csv"]

[spectra.notes]
technique = "ATR"
resolution = "4"

[reference]
file = "reference.csv"

[[analyte]]
name = "acid"
unit = "% m/m"

[regression]
max_factors = 4
"""
N_SAMPLES = 12


@dataclass(frozen=True)
class Project:
    """A folder with files that fit each other, to be spoilt by a test."""

    folder: Path

    def run(self, *arguments: object) -> Result:
        """Run the command line; a traceback is a failure of the test."""
        result = CliRunner().invoke(cli, [str(argument) for argument in arguments], prog_name="quant")
        if result.exception is not None and not isinstance(result.exception, SystemExit):
            raise result.exception
        return result

    def calibrate(self, recipe: str = "recipe.toml") -> Result:
        """Calibrate by a recipe of the folder into its folder ``out``."""
        return self.run("calibrate", self.folder / recipe, "--out", self.folder / "out")

    def make_model(self) -> Path:
        """Leave the model that `calibrate` would leave, without its report, which takes a second to draw."""
        model = calibrate(load_recipe(self.folder / "recipe.toml")).model
        return save_model(model, self.folder / "out" / "acid.model")

    def replace(self, file: str, old: str, new: str) -> None:
        """Replace a text in a file, which has to be there."""
        path = self.folder / file
        text = path.read_text(encoding="utf-8")
        assert old in text
        path.write_text(text.replace(old, new, 1), encoding="utf-8")

    def write_spectra(self, spectra: SpectraSet, file: str) -> Path:
        """Write spectra as a table."""
        write_matrix(spectra, self.folder / file)
        return self.folder / file


def powder(values: np.ndarray, seed: int, axis: np.ndarray | None = None, quantity: str = "absorbance") -> SpectraSet:
    """Return spectra of a powder with so much acid, one a sample."""
    rng = np.random.default_rng(seed)
    axis = np.linspace(1800.0, 1600.0, 41) if axis is None else axis
    acid, matrix = (np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0))
    content = np.stack([values, rng.uniform(4, 6, values.size)], axis=1)
    spectra = content @ np.stack([acid, matrix]) * 0.05 + rng.normal(0, 0.001, (values.size, axis.size))
    ids = [f"S{i + 1:02d}" for i in range(values.size)]
    return SpectraSet(spectra.round(6), SpectralAxis(axis, "cm-1"), ids, quantity)


@pytest.fixture
def make_spectra() -> Callable[..., SpectraSet]:
    """Return what makes spectra of a powder with so much acid."""
    return powder


@pytest.fixture
def project(tmp_path: Path) -> Project:
    """Return a folder with files that calibrate without complaint."""
    made = Project(tmp_path)
    values = np.linspace(1.0, 9.0, N_SAMPLES).round(3)
    spectra = powder(values, seed=1)
    made.write_spectra(spectra, "spectra.csv")
    rows = [f"{sample},{value}\n" for sample, value in zip(spectra.sample_ids, values.tolist(), strict=True)]
    (tmp_path / "reference.csv").write_text("sample,acid\n" + "".join(rows), encoding="utf-8")
    (tmp_path / "recipe.toml").write_text(RECIPE, encoding="utf-8")
    return made
