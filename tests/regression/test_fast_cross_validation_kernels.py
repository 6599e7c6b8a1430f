"""The kernels below fast cross-validation: columns, Gram matrices, rotated spectra, cross-products, threads."""

import os
import platform
import subprocess
import sys

import numpy as np
import pytest
from threadpoolctl import threadpool_info, threadpool_limits

from quant.errors import ParameterError
from quant.regression import fast_cross_validation_cross_products as cross_products
from quant.regression import fast_cross_validation_exact as exact
from quant.regression import fast_cross_validation_gram as gram_kernel
from quant.regression.fast_cross_validation_columns import fold_columns
from quant.regression.fast_cross_validation_threads import one_blas_thread
from quant.regression.pls import PLS


@pytest.fixture
def data():
    rng = np.random.default_rng(41)
    X = rng.standard_normal((20, 9)).cumsum(axis=1)
    X -= X.mean(axis=0)
    return X, X[:, 2] + rng.standard_normal(20), fold_columns([np.arange(20) % 3], 20)


def test_columns_of_unequal_folds_are_filled_up():
    columns = fold_columns([np.array([0, 1, 1, 2, 0, 1, -1])], 7)
    assert columns.training.astype(int).tolist() == [
        [0, 1, 1, 1, 0, 1, 0],
        [1, 0, 0, 1, 1, 0, 0],
        [1, 1, 1, 0, 1, 1, 0],
    ]
    assert [rows[real].tolist() for rows, real in zip(columns.asked, columns.real, strict=True)] == [
        [0, 4, 6],
        [1, 2, 5, 6],
        [3, 6],
    ]
    assert [block.stop - block.start for block in columns.blocks(10, 25)] == [2, 1]


@pytest.mark.parametrize(
    ("labels", "message"),
    [([np.full(4, -1)], "nothing to leave out"), ([np.zeros(4)], "whole"), ([np.array([0, 0, 0, 1])], "fewer than 2")],
)
def test_refuses_labels_that_leave_nothing(labels, message):
    with pytest.raises(ParameterError, match=message):
        fold_columns(labels, 4)


def test_results_do_not_depend_on_blocks(data, monkeypatch):
    X, y, _ = data
    columns = fold_columns([np.arange(20)], 20)
    whole = gram_kernel.gram_scores((X @ X.T)[None], columns, y[None], 4)
    whole_exact = exact.exact_scores(X, columns, y[None], 4, np.ones(20), 9)
    for module in (gram_kernel, exact):
        monkeypatch.setattr(module, "BLOCK_BYTES", 1)
    parts = gram_kernel.gram_scores((X @ X.T)[None], columns, y[None], 4)
    parts_exact = exact.exact_scores(X, columns, y[None], 4, np.ones(20), 9)
    assert parts.predicted() == pytest.approx(whole.predicted(), rel=1e-10)
    assert parts_exact.residual == pytest.approx(whole_exact.residual, rel=1e-9)


def test_cross_products_of_folds_too_many_to_keep_are_formed_twice(data, monkeypatch):
    X, y, columns = data
    kept = cross_products.cross_product_scores(X, columns, y[None], 4, np.ones(20))
    monkeypatch.setattr(cross_products, "PARTS_BYTES", 0)
    monkeypatch.setattr(cross_products, "VECTORS_BYTES", 1)
    again = cross_products.cross_product_scores(X, columns, y[None], 4, np.ones(20))
    assert again.predicted() == pytest.approx(kept.predicted(), rel=1e-10)


def test_a_score_that_cancels_is_made_orthogonal_again(data, monkeypatch):
    rng = np.random.default_rng(42)
    n, values = 40, 10.0 ** -np.arange(0, 4, 0.1)
    U = np.linalg.qr(rng.standard_normal((n, n)))[0]
    X = U * values
    X -= X.mean(axis=0)
    y, fold = U[:, :12] @ rng.standard_normal(12), np.arange(n) % 4
    passes = []
    once = gram_kernel._remove
    monkeypatch.setattr(gram_kernel, "_remove", lambda *given, **named: passes.append(1) or once(*given, **named))
    monkeypatch.setattr(gram_kernel, "CANCELLED", 0.9)
    found = gram_kernel.gram_scores((X @ X.T)[None], fold_columns([fold], n), y[None], 10)
    assert len(passes) > 10
    model = PLS(10).fit(X[fold != 1], y[fold != 1])
    last = found.stopped[0, 1]
    assert found.predicted()[0, 1, : last + 1] == pytest.approx(model.predict_each(X[fold == 1])[: last + 1], abs=1e-9)


def test_a_gram_matrix_for_every_column(data):
    X, y, columns = data
    others = [X, X[:, :7], X[:, 2:]]  # as where a step learns in every fold
    grams = np.stack([gram_kernel.centred_gram(part.copy()) for part in others])
    found = gram_kernel.gram_scores(grams[None], columns, y[None], 4)
    for number, part in enumerate(grams):
        alone = gram_kernel.gram_scores(part[None], columns.take(np.array([number])), y[None], 4)
        assert found.predicted()[0, number] == pytest.approx(alone.predicted()[0, 0], rel=1e-10)
        assert found.stopped[0, number] == alone.stopped[0, 0]


def test_a_mean_spectrum_is_taken_out_of_a_gram_matrix():
    X = 1e3 + np.random.default_rng(44).standard_normal((6, 40))
    centred = X - X.mean(axis=0)
    assert gram_kernel.centred_gram(X) == pytest.approx(centred @ centred.T, rel=1e-12)
    np.testing.assert_allclose(X, centred)


@pytest.mark.skipif(
    platform.libc_ver()[0] != "glibc", reason="other C libraries keep freed memory by rules of their own"
)
def test_freed_memory_is_used_again():
    script = """
import resource, numpy as np
from quant.regression.fast_cross_validation_threads import keep_freed_memory
def faults():
    before = resource.getrusage(resource.RUSAGE_SELF).ru_minflt
    for _ in range(50):
        parts = [np.ones(200_000) for _ in range(4)]
        del parts
    return resource.getrusage(resource.RUSAGE_SELF).ru_minflt - before
first = faults()
keep_freed_memory()
faults()
print(first, faults())
"""
    own = {name: value for name, value in os.environ.items() if not name.startswith("MALLOC_")}  # Dask sets some
    done = subprocess.run([sys.executable, "-c", script], env=own, capture_output=True, check=True)
    before, after = map(int, done.stdout.split())
    assert before > 10_000  # 50 times four arrays of 400 pages, most of them fresh: else there is nothing to mend
    assert after < 100


def test_rotation_keeps_all_inner_products():
    X = 3 + np.random.default_rng(43).standard_normal((6, 40))
    weight = np.array([1, 0.5, 0.5, 1, 1, 0])
    short = exact.rotated(X, weight)
    centred = X - np.average(X, axis=0, weights=weight)
    assert short.shape == (6, 6)
    assert short @ short.T == pytest.approx(centred @ centred.T, abs=1e-12)


def test_linear_algebra_keeps_to_one_thread_and_gets_its_own_back():
    def threads():
        return {part["num_threads"] for part in threadpool_info() if part["user_api"] == "blas"}

    with threadpool_limits(2, user_api="blas"):
        with one_blas_thread():
            assert 1 in threads()
        assert threads() == {2}
