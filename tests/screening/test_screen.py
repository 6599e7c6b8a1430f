"""The whole search: what it leaves, interrupted or not, on any number of workers, on a cluster."""

import csv
import io
import os

import numpy as np
import pytest

from quant.calibration.calibrate import calibrate
from quant.errors import NotEnoughDataError
from quant.recipe.load import recipe_from_text
from quant.result import field_docs
from quant.screening.result import ScreenResult, window_edges
from quant.screening.screen import screen
from quant.screening.work import workers

SEARCH = """chains = [[], [{ step = "msc" }]]
[screen.ranges]
search = "windows"
block = 8
[screen.nested]
folds = 4
repeats = 2
[screen.chance]
permutations = 19
over = "all"
"""


@pytest.fixture(scope="module")
def found(make_recipe, make_samples):
    return screen(make_recipe(SEARCH), make_samples())


def told(result: ScreenResult) -> tuple[str, str, str]:
    return result.to_csv(), result.to_json(), str(result)


def test_what_is_printed(found):
    text = str(found)
    assert "Screening for acid [% m/m]: 24 samples, 4 random folds" in text
    assert text.index("RMSEP, nested") < text.index("RMSECV of the winner (took part in choosing: too good)")
    assert "looks better than it is by" in text
    assert "p of the search (all: lowest" in text
    assert "The winner does better than chance" in text


def test_the_table(found):
    rows = list(csv.DictReader(io.StringIO(found.to_csv())))
    assert len(rows) == found.n_candidates == found.n_possible == 2 * 21
    assert [row["winner"] for row in rows].count("yes") == 1
    assert [int(row["rank"]) for row in rows] == list(range(1, 43))
    scores = [float(row["rmsecv"]) for row in rows]
    n = len(found.leaders)
    assert scores[:n] == sorted(scores[:n])
    assert scores[n:] == sorted(scores[n:])
    assert {row["score"] for row in rows[:n]} == {"refitted"}
    assert {row["score"] for row in rows[n:]} == {"Gram matrix"}


def test_json_is_documented(found):
    content = found.to_dict()
    assert list(content) == list(field_docs(ScreenResult))
    assert content["nested"]["mean"] == pytest.approx(found.nested.mean)
    assert content["chance"]["p"] == found.chance.p
    assert content["winner"]["winner"] is True


def test_the_winner_calibrates_to_the_same_figures(found, make_samples, tmp_path):
    recipe = recipe_from_text(found.recipe_text(tmp_path), folder=tmp_path)
    result = calibrate(recipe, samples=make_samples()).analytes[0]
    assert result.factors == found.winner.factors
    assert result.cross_validation.rmsecv[result.factors] == pytest.approx(found.winner.rmsecv, rel=1e-9)
    assert "# RMSEP, nested" in found.recipe_text(tmp_path)


def test_the_window_map(found):
    windows = found.windows
    assert windows.edges[[0, -1]].tolist() == [1800.0, 1600.0]
    assert sorted(zip(windows.start, windows.stop, strict=True)) == [(i, j) for i in range(6) for j in range(i + 1, 7)]
    assert window_edges(np.arange(5.0), 2).tolist() == [0.0, 1.5, 3.5, 4.0]


@pytest.mark.parametrize("n_workers", [2, 3])
def test_any_number_of_workers_gives_the_same_bytes(found, make_recipe, make_samples, n_workers):
    assert told(screen(make_recipe(SEARCH), make_samples(), n_workers=n_workers)) == told(found)


def test_another_seed_gives_other_folds(found, make_recipe, make_samples):
    other = screen(make_recipe("seed = 2\n" + SEARCH), make_samples())
    assert other.to_csv() == found.to_csv()
    assert other.nested.rmsep.tolist() != found.nested.rmsep.tolist()


@pytest.fixture(scope="module")
def cluster():
    from distributed import LocalCluster

    options = {"threads_per_worker": 1, "processes": True, "dashboard_address": None, "silence_logs": 50}
    with LocalCluster(n_workers=2, **options) as found:
        yield found


def test_a_dask_cluster_gives_the_same_bytes(found, make_recipe, make_samples, cluster):
    assert told(screen(make_recipe(SEARCH), make_samples(), cluster=cluster.scheduler_address)) == told(found)


def test_the_cluster_does_the_work(cluster):
    with workers(1, cluster.scheduler_address) as hands:
        processes, interrupted = hands.run(lambda number: (number, os.getpid()), range(8), "processes")
    own = {worker.pid for worker in cluster.workers.values()}
    assert len(own) == 2
    assert not interrupted
    assert [number for number, _ in processes] == list(range(8))
    assert {process for _, process in processes} <= own


def test_values_dealt_out_at_random_are_no_better_than_chance(make_recipe, make_samples):
    values = np.random.default_rng(20261201).permutation(np.linspace(1.0, 9.0, 24))
    result = screen(make_recipe(SEARCH), make_samples(values=values))
    assert not result.better_than_chance
    assert "NOT BETTER THAN CHANCE" in str(result)
    assert "# NOT BETTER THAN CHANCE" in result.recipe_text()


def test_without_nested_and_chance_nothing_is_claimed(make_recipe, make_samples):
    bare = make_recipe("[screen.nested]\nrepeats = 0\n[screen.chance]\npermutations = 0\n")
    result = screen(bare, make_samples())
    assert result.nested is None
    assert result.chance is None
    assert "is no statement of performance" in str(result)


@pytest.mark.parametrize("stage", ["search.refit", "nested._outer_fold", "chance._one"])
def test_an_interruption_keeps_what_was_found(found, make_recipe, make_samples, monkeypatch, stage):
    module, _, name = stage.partition(".")
    place = __import__(f"quant.screening.{module}", fromlist=[name])
    own, calls = getattr(place, name), []

    def some(*arguments):
        calls.append(arguments)
        if len(calls) == 6:
            raise KeyboardInterrupt
        return own(*arguments)

    monkeypatch.setattr(place, name, some)
    result = screen(make_recipe(SEARCH), make_samples())
    assert result.interrupted
    assert "Interrupted: this is what was found until then." in str(result)
    assert result.n_candidates == found.n_candidates
    if stage == "search.refit":
        assert len(result.leaders) == 5
        assert (result.nested, result.chance) == (None, None)
    if stage == "nested._outer_fold":
        assert result.nested.rmsep.tolist() == found.nested.rmsep[:1].tolist()
        assert result.chance is None
    if stage == "chance._one":
        assert result.chance.lowest.tolist() == found.chance.lowest[:5].tolist()
        assert result.chance.p > 0.05  # of five it cannot be less
        assert result.better_than_chance


def test_an_interruption_before_anything_was_found(make_recipe, make_samples, monkeypatch):
    def at_once(*_):
        raise KeyboardInterrupt

    monkeypatch.setattr("quant.screening.search.run_task", at_once)
    with pytest.raises(NotEnoughDataError, match="Interrupted before"):
        screen(make_recipe(SEARCH), make_samples())


def test_validation_samples_take_no_part_but_their_spectra_compare(make_recipe, make_samples):
    recipe = make_recipe("[screen.nested]\nrepeats = 0\n[screen.chance]\npermutations = 0\n" + VALIDATION)
    result = screen(recipe, make_samples())
    assert result.n_samples == 20
    assert result.compared_on == "4 samples: the validation samples' spectra,"
    new = make_samples(7, seed=3).spectra
    assert screen(recipe, make_samples(), new=new).compared_on == "7 samples: new spectra,"


VALIDATION = '[validation]\nsamples = ["S05", "S10", "S15", "S20"]\n'
