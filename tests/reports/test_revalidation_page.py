"""The page of a revalidation."""

import importlib.util
import json
import sys
from dataclasses import replace

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.recipe.load import load_recipe
from quant.reports.revalidation_page import render_revalidation, revalidation_json
from quant.reports.write import write_revalidation
from quant.revalidation.history import control_chart
from quant.revalidation.revalidate import revalidate
from quant.spectra.sample_set import pair_samples


@pytest.fixture(scope="module")
def result(repository):
    path = repository / "demo_sets" / "service_visit" / "make.py"
    specification = importlib.util.spec_from_file_location("visits_for_the_page", path)
    maker = importlib.util.module_from_spec(specification)
    sys.modules["visits_for_the_page"] = maker
    specification.loader.exec_module(maker)
    rng = np.random.default_rng(20260301)
    standards = maker.dryer.draw_part(rng, 24, "S")
    recipe = load_recipe(repository / "configs" / "dryer_solvent.toml").model_copy(update={"validation": None})
    training = pair_samples(standards.spectra, standards.reference)
    visit = maker.draw_visit(rng, 8, after=replace(maker.BEFORE, shift=0.8))
    return revalidate(
        calibrate(recipe, training).model, visit.after, visit.reference, before=visit.before, training=training
    )


def test_the_four_questions_come_first_and_everything_is_escaped(result):
    hostile = replace(result, analyte="<b>acid", sample_ids=("<script>",) * 8)
    page = render_revalidation(hostile)
    places = [page.index(text) for text in ("Changed?", "Does it matter?", "Could these standards", "Least remedy")]
    assert places == sorted(places)
    assert places[-1] < page.index("Reasons, in order")
    assert "<script" not in page
    assert "<b>acid" not in page
    assert "http-equiv" in page
    assert 'src="http' not in page


def test_the_same_result_gives_the_same_bytes(result, tmp_path):
    first, second = (write_revalidation(result, tmp_path / name) for name in ("a", "b"))
    assert first.html.read_bytes() == second.html.read_bytes()
    assert first.json.read_bytes() == second.json.read_bytes()


def test_json_has_a_meaning_for_every_key(result):
    found = json.loads(revalidation_json(result, control_chart([0.0, 1.0], 1.0)))
    assert set(found) == {key for key in found["keys"] if "." not in key and "[" not in key}
    assert found["verdict"] == result.verdict
    assert "remedies[].rmse" in found["keys"]


def test_the_history_has_a_section_where_there_is_one(result):
    values = np.r_[np.zeros(10), np.full(10, 4.0)] + np.random.default_rng(1).normal(0, 0.5, 20)
    page = render_revalidation(result, control_chart(values, 1.0))
    assert "The check sample over time" in page
    assert "The check sample over time" not in render_revalidation(result)
