"""Laws of saved models: what is loaded is what was saved, bit by bit, whatever the pipeline."""

import json
import tempfile
from pathlib import Path

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.calibration.calibrate import calibrate
from quant.model.calibration import Calibration
from quant.model.storage import load_model, save_model
from quant.prediction.predict import predict
from quant.recipe.load import recipe_from_text
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

laws = settings(max_examples=15, deadline=None, derandomize=True)

HEAD = 'title = "{title}"\n[spectra]\nfiles = ["x"]\n[reference]\nfile = "x"\n[[analyte]]\nname = "acid"\n'
STEPS = {
    "keep_ranges": "ranges = [[1790, 1690], [1680, 1610]]",
    "snv": "",
    "msc": "",
    "emsc": "polynomial = 1",
    "unit_length": "",
    "unit_area": "",
    "gap_derivative": "gap = 2\nsegment = 3",
    "detrend": "polynomial = 1",
    "asymmetric_baseline": "smoothness = 1e3",
    "savitzky_golay": "window = 5\npolynomial = 2\nderivative = 1",
    "straight_baseline": "first = 1762\nsecond = 1643",
    "mean_centre": "",
    "scale_columns": "",
}
METHODS = (
    "[regression]\nfactors = 2",
    "[regression]\nfactors = 5",
    '[regression]\nmethod = "band_area"\n'
    'bands = [{ signal = "height", range = [1720, 1740], baseline = [1700, 1750] }]',
)


@st.composite
def models(draw: st.DrawFn) -> tuple[Calibration, SpectraSet]:
    """Return a model with up to two steps in front of either method, and new spectra."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    method = draw(st.sampled_from(METHODS))
    steps = draw(st.lists(st.sampled_from(sorted(STEPS)), max_size=2, unique=True)) if "band" not in method else []
    axis, n, m = np.linspace(1800.0, 1600.0, 41), draw(st.integers(9, 14)), draw(st.integers(1, 3))
    bands = np.stack([np.exp(-(((axis - centre) / 15) ** 2)) for centre in (1730.0, 1670.0)])

    def spectra(values: np.ndarray) -> SpectraSet:
        rows = np.repeat(np.arange(values.size), m)
        content = np.stack([values, rng.uniform(4, 6, values.size)], axis=1)[rows]
        made = 0.1 * content @ bands + rng.normal(0, 0.003, (rows.size, axis.size)) + 0.02
        return SpectraSet(made, SpectralAxis(axis, "cm-1"), [f"S{i}" for i in rows])

    values = rng.uniform(1, 9, n)
    analyte = Analyte("acid", "%", draw(st.sampled_from([None, 0.0, 0.01])))
    table = ReferenceTable([f"S{i}" for i in range(n)], [analyte], values[:, None])
    title = draw(st.text(st.characters(exclude_categories=("Cs", "Cc"), exclude_characters='"\\'), min_size=1))
    tables = "".join(f'[[preprocessing]]\nstep = "{step}"\n{STEPS[step]}\n' for step in steps)
    recipe = recipe_from_text(HEAD.format(title=title) + tables + method)
    return calibrate(recipe, pair_samples(spectra(values), table)).model, spectra(rng.uniform(2, 8, 5))


@laws
@given(models())
def test_what_is_loaded_predicts_the_same_bits(case):
    model, new = case
    with tempfile.TemporaryDirectory() as folder:
        first, second = (save_model(model, Path(folder) / name) for name in ("a.model", "b.model"))
        assert first.read_bytes() == second.read_bytes()
        loaded = load_model(first)
        assert save_model(loaded, second).read_bytes() == first.read_bytes()
    assert predict(loaded, new).to_json() == predict(model, new).to_json()
    assert loaded.predict_values(new.values).tobytes() == model.predict_values(new.values).tobytes()
    assert loaded.recipe == model.recipe


@laws
@given(models())
def test_a_state_is_all_that_is_needed_to_come_back(case):
    model, new = case
    spectra = new.values
    for step in model.steps:
        parameters, arrays = step.state()
        again = type(step).from_state(json.loads(json.dumps(parameters)), arrays)
        assert again.transform(spectra).tobytes() == step.transform(spectra).tobytes()
        spectra = step.transform(spectra)
    parameters, arrays = model.method.state()
    method = type(model.method).from_state(json.loads(json.dumps(parameters)), arrays)
    for name in ("predict_each", "leverage_each", "residual_each"):
        assert getattr(method, name)(spectra).tobytes() == getattr(model.method, name)(spectra).tobytes()
