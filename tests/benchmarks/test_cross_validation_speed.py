"""Fast cross-validation beside scikit-learn, in turn in one run; what counts are ratios.

One core each: linear algebra with one thread, and the processor's time of this process, which neighbours disturb less
than the clock on the wall. All cores: the clock. Flops are those that are done, a multiplication and an addition each
counting one; what is not a product of two matrices is done at a fraction of their rate, and counts all the same.
"""

import os
import statistics
import time
import tracemalloc
from functools import partial
from pathlib import Path

import numpy as np
import pytest
from sklearn.cross_decomposition import PLSRegression
from sklearn.model_selection import GridSearchCV, PredefinedSplit
from threadpoolctl import threadpool_info, threadpool_limits

from quant.preprocessing.savitzky_golay import savitzky_golay
from quant.preprocessing.snv import snv
from quant.recipe.schema import Recipe
from quant.regression.fast_cross_validation import fast_left_out
from quant.regression.fast_cross_validation_gram import Gram, centred_gram
from quant.regression.fast_cross_validation_many import cross_validate_many
from quant.regression.fast_cross_validation_windows import WindowGrams
from quant.screening.first_steps import FirstSteps
from quant.screening.problem import Problem
from quant.screening.scores import score_whole
from quant.spectra.axis import SpectralAxis
from quant.spectra.reference_table import Analyte, ReferenceTable
from quant.spectra.sample_set import pair_samples
from quant.spectra.spectra_set import SpectraSet

pytestmark = pytest.mark.benchmark
FACTORS, FOLDS, BATCH = 15, 10, 64


def spectra(n, k, substances=30, noise=2e-3, seed=1):
    """Overlapping bands of many substances and noise, so that all factors stand out of rounding; y one of them."""
    rng = np.random.default_rng(seed)
    x = np.linspace(0, 1, k)
    bands = np.exp(-(((x - rng.uniform(0, 1, (substances, 1))) / rng.uniform(0.02, 0.2, (substances, 1))) ** 2))
    amounts = rng.uniform(0, 1, (n, substances))
    X = 0.5 + amounts @ bands + noise * rng.standard_normal((n, k))
    return X, 10 * amounts[:, 0] + 0.1 * rng.standard_normal(n), rng.permutation(n) % FOLDS


def grid_search(X, y, fold, jobs=1, factors=FACTORS):
    grid = {"n_components": list(range(1, factors + 1))}
    search = GridSearchCV(
        *(PLSRegression(scale=False), grid),
        scoring="neg_mean_squared_error",
        cv=PredefinedSplit(fold),
        n_jobs=jobs,
        refit=False,
    )
    return np.sqrt(-search.fit(X, y).cv_results_["mean_test_score"])


def one_fit(X, y, out, factors):
    """The best a user can write: one fit, and the coefficients of all factor counts summed up."""
    model = PLSRegression(n_components=factors, scale=False).fit(X[~out], y[~out])
    coefficients = np.cumsum(model.x_rotations_ * model.y_loadings_[0], axis=1)
    return y[~out].mean() + (X[out] - X[~out].mean(axis=0)) @ coefficients


def one_fit_a_fold(X, y, fold, factors=FACTORS):
    squared = np.empty((y.size, factors))
    for f in np.unique(fold):
        squared[fold == f] = (one_fit(X, y, fold == f, factors) - y[fold == f, None]) ** 2
    return np.sqrt(squared.mean(axis=0))


def gram(X):
    return centred_gram(X.copy())


def preprocessed(X, window, derivative):
    return savitzky_golay(snv(X), window, 2, derivative)


def own_gram(X, window, derivative):
    return centred_gram(preprocessed(X, window, derivative))


def problem_of(X, y, steps):
    """The same candidates as a search of `quant screen` has them."""
    tables = [{"step": "savitzky_golay", "window": w, "polynomial": 2, "derivative": d} for w, d in steps]
    recipe = Recipe.model_validate(
        {
            "title": "Speed",
            "spectra": {"files": ["none.csv"]},
            "reference": {"file": "none.csv"},
            "analyte": [{"name": "y", "unit": "1"}],
            "regression": {"max_factors": FACTORS},
            "cross_validation": {"scheme": "random_folds", "folds": FOLDS, "repeats": 1},
            "screen": {"chains": [[{"step": "snv"}, table] for table in tables]},
        }
    )
    names = [f"S{i}" for i in range(y.size)]
    values = ReferenceTable(names, [Analyte("y", "1")], y[:, None])
    axis = SpectralAxis(np.arange(1000.0, 1000.0 + X.shape[1]), "cm-1")
    return Problem(pair_samples(SpectraSet(X, axis, names), values), recipe, "y")


def in_turn(works):
    for work in works:  # results are let go: holding them would take fresh memory for each
        work()


def seconds(works, rounds=7, clock=time.process_time):
    """Median time of each work, done in turn, after one round that warms up."""
    taken = {name: [] for name in works}
    for turn in range(rounds + 1):
        for name, work in works.items():
            start = clock()
            work()
            if turn:
                taken[name].append(clock() - start)
    return {name: statistics.median(times) for name, times in taken.items()}


def flops(n, folds, factors):
    """Of `gram_scores`, by factor a: G·U, T·w and h·T over a scores, and seven passes over the n rows of each fold."""
    return sum(2 * n * n * folds + folds * (4 * n * a + 7 * n) for a in range(1, factors + 1))


def matrix_product():
    matrix = np.random.default_rng(0).standard_normal((1000, 1000))
    return partial(np.matmul, matrix, matrix, out=np.empty_like(matrix))


@pytest.fixture
def one_core():
    with threadpool_limits(limits=1):
        yield


@pytest.fixture
def show(capsys):
    def display(*lines):
        kernel = next(part["architecture"] for part in threadpool_info() if part["user_api"] == "blas")
        with capsys.disabled():
            print(f"\n[kernel {kernel}]", *lines, sep="\n  ")

    return display


def test_candidates_against_scikit_learn_on_one_core(one_core, show):
    X, y, fold = spectra(100, 2000)
    G, centred = gram(X), X.copy()
    steps = [(window, derivative) for window in range(5, 5 + 2 * 16, 2) for derivative in (1, 2)]
    own = [partial(own_gram, X, *step) for step in steps]
    problem = problem_of(X, y, steps)
    searched = partial(score_whole, problem, range(len(steps)))
    together = partial(cross_validate_many, [G] * BATCH, y, [fold], FACTORS)
    shuffled = np.array([np.random.default_rng(seed).permutation(y) for seed in range(BATCH)])
    time_of = seconds(
        {
            "grid search": partial(grid_search, X, y, fold),
            "one fit a fold": partial(one_fit_a_fold, X, y, fold),
            "cross-validation": together,
            "cross-validation, one Gram matrix, many y": partial(cross_validate_many, [G], shuffled, [fold], FACTORS),
            "preprocessing": lambda: in_turn(partial(preprocessed, X, *step) for step in steps),
            "Gram matrix": lambda: in_turn(partial(centred_gram, centred) for _ in steps),
            "all three, each by itself": partial(cross_validate_many, own, y, [fold], FACTORS),
            "all three, as quant screen does them": lambda: searched(FirstSteps(problem)),
            "one set with residuals (fast_left_out)": partial(fast_left_out, X, y, [fold], FACTORS),
        },
    )
    for name in ("cross-validation", "cross-validation, one Gram matrix, many y"):
        time_of[name] /= BATCH
    for name in ("preprocessing", "Gram matrix", "all three, each by itself", "all three, as quant screen does them"):
        time_of[name] /= len(steps)
    slow, better = time_of["grid search"], time_of["one fit a fold"]
    show(
        "100 x 2000, 15 factors, 10 folds, one core      ms a candidate   grid search /   one fit a fold /",
        *(f"{name:46} {1e3 * t:15.3f} {slow / t:15.0f} {better / t:17.1f}" for name, t in time_of.items()),
    )
    ours = together().rmsecv[0, 0, 1:]
    assert ours == pytest.approx(grid_search(X, y, fold), rel=1e-8)
    assert ours == pytest.approx(one_fit_a_fold(X, y, fold), rel=1e-8)
    X1 = preprocessed(X, 5, 1)
    assert cross_validate_many(own[:1], y, [fold], FACTORS).rmsecv[0, 0, 1:] == pytest.approx(
        one_fit_a_fold(X1, y, fold), rel=1e-8
    )
    assert slow / time_of["cross-validation"] >= 1000
    assert better / time_of["cross-validation"] >= 100
    assert slow / time_of["all three, as quant screen does them"] >= 400
    assert better / time_of["all three, as quant screen does them"] >= 40


def test_candidates_against_scikit_learn_on_all_cores(show):
    X, y, fold = spectra(100, 2000)
    matrices = [gram(X) for _ in range(512)]  # each in memory of its own, as the workers are sent them
    functions = [partial(own_gram, X, window, 1) for window in range(5, 37, 2)] * 16
    busy = os.getloadavg()[0]
    time_of = seconds(
        {
            "grid search": partial(grid_search, X, y, fold, jobs=-1),
            "one fit a fold": partial(one_fit_a_fold, X, y, fold),
            "Gram matrices, one": partial(cross_validate_many, matrices, y, [fold], FACTORS),
            "Gram matrices, all": partial(cross_validate_many, matrices, y, [fold], FACTORS, n_jobs=-1),
            "formed by the worker, one": partial(cross_validate_many, functions, y, [fold], FACTORS),
            "formed by the worker, all": partial(cross_validate_many, functions, y, [fold], FACTORS, n_jobs=-1),
        },
        rounds=5,
        clock=time.perf_counter,
    )
    for name, candidates in (("Gram matrices", matrices), ("formed by the worker", functions)):
        one, ours = (time_of[f"{name}, {who}"] / len(candidates) for who in ("one", "all"))
        slow, better = time_of["grid search"] / ours, time_of["one fit a fold"] / ours
        show(
            f"{name}, on {os.cpu_count()} cores, by the clock: {1e3 * ours:.3f} ms a candidate, "
            f"{one / ours:.2f} times as fast as one worker (load before: {busy:.1f}); "
            f"grid search / {slow:.0f}, one fit a fold / {better:.0f}"
        )
    ours = time_of["Gram matrices, all"] / len(matrices)
    assert time_of["grid search"] / ours >= 1000
    assert time_of["one fit a fold"] / ours >= 100


def test_share_of_the_rate_of_matrix_products(one_core, show):
    X, y, fold = spectra(100, 2000)
    large, y_large, fold_large = spectra(500, 2000)
    G, G_large = gram(X), gram(large)
    each = np.arange(100)
    works = {  # name: (work, flops)
        "product of 1000 x 1000": (matrix_product(), 2e9),
        "n = 100, 10 folds": (
            partial(cross_validate_many, [G] * BATCH, y, [fold], FACTORS),
            BATCH * flops(100, 10, FACTORS),
        ),
        "n = 100, leave one out": (
            partial(cross_validate_many, [G] * 8, y, [each], FACTORS),
            8 * flops(100, 100, FACTORS),
        ),
        "n = 500, 10 folds": (
            partial(cross_validate_many, [G_large] * 4, y_large, [fold_large], FACTORS),
            4 * flops(500, 10, FACTORS),
        ),
        "n = 500, leave one out": (
            partial(cross_validate_many, [G_large], y_large, [np.arange(500)], FACTORS),
            flops(500, 500, FACTORS),
        ),
    }
    time_of = seconds({name: work for name, (work, _) in works.items()}, rounds=9)
    rate = {name: count / time_of[name] for name, (_, count) in works.items()}
    limit = rate["product of 1000 x 1000"]
    show(
        "one core                    GFLOP/s   share of the product's",
        *(f"{name:26} {value / 1e9:8.1f} {value / limit:10.2f}" for name, value in rate.items()),
    )
    assert max(value for name, value in rate.items() if name.startswith("n = 100")) >= limit / 3


def test_every_window_of_every_width(one_core, show):
    X, y, fold = spectra(100, 2000)
    windows = WindowGrams(X, 20)

    def search(places):
        return cross_validate_many((partial(windows.gram, *place) for place in places), y, [fold], FACTORS)

    every = list(windows.every())
    assert len(every) == 5050
    tracemalloc.start()
    found = search(every)
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    time_of = seconds({"search": partial(search, every), "product": matrix_product()}, rounds=3)
    limit = 2e9 / time_of["product"] / flops(100, 10, FACTORS)
    rate = len(every) / time_of["search"]
    megabytes = (peak + windows.sums.nbytes) / 1e6
    show(
        f"5050 windows: {time_of['search']:.2f} s on one core, {rate:.0f} a second; products alone: {limit:.0f}; "
        f"share {rate / limit:.2f}; {megabytes:.0f} MB beyond the data"
    )
    best = np.unravel_index(np.argmin(found.rmsecv[:, 0]), found.rmsecv[:, 0].shape)
    points = windows.points(*every[best[0]])
    again = fast_left_out(X[:, points], y, [fold], int(best[1]) or 1)
    assert np.sqrt(np.mean((again.predicted[0, best[1]] - y) ** 2)) == pytest.approx(found.rmsecv[best[0], 0, best[1]])
    assert rate >= limit / 5
    assert megabytes < 200


def test_large_archive(one_core, show):
    n, factors = 20_000, 20
    X, y, fold = spectra(n, 700)
    out = fold == 0
    found = fast_left_out(X, y, [fold], factors, residuals=False)
    expected = one_fit(X, y, out, factors)
    assert found.predicted[0, 1:, out] == pytest.approx(expected, rel=1e-8, abs=1e-8)

    def part_of_grid(count):
        PLSRegression(n_components=count, scale=False).fit(X[~out], y[~out]).predict(X[out])

    time_of = seconds(
        {
            "ours": partial(fast_left_out, X, y, [fold], factors, residuals=False),
            "ours, with residuals": partial(fast_left_out, X, y, [fold], factors),
            "one fold": partial(one_fit, X, y, out, factors),
            "grid, 1 component": partial(part_of_grid, 1),
            "grid, 20 components": partial(part_of_grid, 20),
        },
        rounds=2,
    )
    better = FOLDS * time_of["one fold"]
    slow = FOLDS * factors * (time_of["grid, 1 component"] + time_of["grid, 20 components"]) / 2
    ours = time_of["ours"]
    show(
        f"20 000 x 700, 20 factors, 10 folds, one core: {ours:.2f} s; with residuals "
        f"{time_of['ours, with residuals']:.2f} s",
        f"one fit a fold, extrapolated from 1 of its 10 fits: {better:.1f} s, / {better / ours:.1f}",
        "grid search, extrapolated from 2 of its 200 fits, those of 1 and 20 components in one fold: "
        f"{slow:.0f} s, / {slow / ours:.0f}",
    )
    assert better / ours >= 10
    assert slow / ours >= 100


def test_growth_of_cost(one_core, show, tmp_path):
    base = {"n": 100, "points": 2000, "folds": 10, "factors": 15}
    steps = {
        "n": [50, 100, 200, 500],
        "points": [500, 1000, 2000, 4000],
        "folds": [5, 10, 20, 50],
        "factors": [5, 10, 15, 20],
    }
    grown = {}
    for name, values in steps.items():
        works = {}
        for value in values:
            case = {**base, name: value}
            X, y, _ = spectra(case["n"], case["points"])
            fold = np.arange(case["n"]) % case["folds"]
            G, count = gram(X), 16 if case["n"] <= 200 else 2
            works[value, "Gram"] = partial(centred_gram, X.copy()), 1
            works[value, "cross-validation"] = (
                partial(cross_validate_many, [G] * count, y, [fold], case["factors"]),
                count,
            )
        time_of = seconds({key: work for key, (work, _) in works.items()}, rounds=3)
        grown[name] = {key: 1e3 * t / works[key][1] for key, t in time_of.items()}
    rows = [
        f"{name:8} {value:6} {times[value, 'Gram']:10.3f} {times[value, 'cross-validation']:10.3f}"
        for name, times in grown.items()
        for value in steps[name]
    ]
    picture = draw(grown, steps, Path(os.environ.get("QUANT_BENCHMARK_FOLDER", tmp_path)))
    show(f"growth about {base}; ms a candidate on one core: Gram, cross-validation", *rows, f"picture: {picture}")
    # Folds four times as many cost at most four times as much, and some margin: they share the products.
    assert grown["folds"][20, "cross-validation"] < 6 * grown["folds"][5, "cross-validation"]


def draw(grown, steps, folder):
    from matplotlib.figure import Figure

    figure = Figure(figsize=(10, 3.2), layout="constrained")
    for axes, (name, times) in zip(figure.subplots(1, len(grown), sharey=True), grown.items(), strict=True):
        for what in ("Gram", "cross-validation"):
            axes.loglog(steps[name], [times[value, what] for value in steps[name]], marker="o", label=what)
        axes.set_xlabel(f"number of {name}" if name != "n" else "number of spectra")
        axes.set_xticks(steps[name], map(str, steps[name]))
        axes.minorticks_off()
        axes.grid(alpha=0.3)
        axes.yaxis.set_major_formatter("{x:g}")
    figure.axes[0].set_ylabel("ms a candidate, one core")
    figure.axes[0].legend()
    folder.mkdir(parents=True, exist_ok=True)
    file = folder / "cross_validation_growth.png"
    figure.savefig(file, dpi=120)
    return file


def test_a_gram_matrix_of_its_own_size_is_taken():
    X, y, fold = spectra(30, 50)
    G = gram(X)
    plain = cross_validate_many([G], y, [fold], 3)
    assert (cross_validate_many([Gram(G, float(np.trace(G)))], y, [fold], 3).rmsecv == plain.rmsecv).all()
