"""Laws of PLS: identities of the decomposition, and changes of the data that must change nothing, or only the unit."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from quant.regression.bidiagonal import pls_bidiagonal
from quant.regression.pls import PLS

laws = settings(max_examples=25, deadline=None, derandomize=True)


@st.composite
def problems(draw):
    """Smooth random spectra, reference values and weights, with a factor count that both allow."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    n, k = draw(st.integers(6, 30)), draw(st.integers(4, 60))
    X = rng.standard_normal((n, k)).cumsum(axis=1)
    y = X @ rng.standard_normal(k) / k + 0.3 * rng.standard_normal(n) + 10
    weight = rng.uniform(0.2, 2.0, n)
    return X, y, weight, draw(st.integers(1, min(n - 2, k, 6)))


@laws
@given(problems())
def test_decomposition(problem):
    X, y, weight, A = problem
    found = pls_bidiagonal(X, y, weight, A)
    W, T, root = found.weights, found.scores, np.sqrt(weight)[:, None]
    Xc = (X - np.average(X, axis=0, weights=weight)) * root
    yc = (y - np.average(y, weights=weight)) * root[:, 0]
    B = np.diag(found.diagonal) + np.diag(found.superdiagonal, 1)
    size = np.linalg.norm(Xc)
    assert np.allclose(W.T @ W, np.eye(A), atol=1e-13)
    assert np.allclose(T.T @ T, np.eye(A), atol=1e-13)
    assert np.allclose(Xc @ W, T @ B, atol=1e-12 * size)
    assert np.allclose(found.rotations @ B, W, atol=1e-10)
    assert np.allclose(found.loadings, Xc.T @ T, atol=1e-12 * size)
    assert np.allclose(found.y_loadings, T.T @ yc, atol=1e-12 * np.linalg.norm(yc))
    assert (found.y_loadings >= 0).all()
    assert (found.diagonal > 0).all()
    assert found.guard_note == ""


@laws
@given(problems())
def test_scores_leverages_and_residuals_of_the_training_rows(problem):
    X, y, weight, A = problem
    model = PLS(A).fit(X, y, weight)
    assert np.allclose(model.scores_.T @ (weight[:, None] * model.scores_), np.eye(A), atol=1e-8)
    assert np.allclose(model.leverage_each(X) @ weight, np.arange(A + 1) + 1, atol=1e-8)
    squares = model.residual_each(X) @ weight
    left = squares[0] * (1 - np.concatenate([[0], np.cumsum(model.explained_x_)]))
    assert np.allclose(squares, left, atol=1e-9 * squares[0])
    errors = ((model.predict_each(X) - y) ** 2) @ weight
    assert np.allclose(errors, errors[0] * (1 - np.concatenate([[0], np.cumsum(model.explained_y_)])), atol=1e-9)


def predictions(X, y, weight, A, new):
    model = PLS(A).fit(X, y, weight)
    return np.stack([model.predict_each(new), model.leverage_each(new), model.residual_each(new)])


@laws
@given(problems(), st.integers(2, 4))
def test_replicates_of_one_over_m_equal_one_row(problem, m):
    X, y, weight, A = problem
    weight = np.ones_like(weight)
    rows = np.concatenate([np.zeros(m, dtype=int), np.arange(1, y.size)])
    shared = np.concatenate([np.full(m, 1 / m), weight[1:]])
    assert np.allclose(
        predictions(X[rows], y[rows], shared, A, X), predictions(X, y, weight, A, X), rtol=1e-7, atol=1e-8
    )
    assert PLS(A).fit(X[rows], y[rows], shared).n_samples_ == pytest.approx(y.size)


@laws
@given(problems())
def test_weight_zero_is_an_absent_row(problem):
    X, y, weight, A = problem
    weight[-1] = 0.0
    absent = predictions(X[:-1], y[:-1], weight[:-1], A, X)
    assert np.allclose(predictions(X, y, weight, A, X), absent, rtol=1e-9, atol=1e-10)


@laws
@given(problems(), st.randoms(use_true_random=False))
def test_order_of_samples_is_irrelevant(problem, random):
    X, y, weight, A = problem
    order = random.sample(range(y.size), y.size)
    assert np.allclose(
        predictions(X[order], y[order], weight[order], A, X), predictions(X, y, weight, A, X), rtol=1e-7, atol=1e-8
    )


@laws
@given(problems())
def test_reversed_axis_changes_nothing(problem):
    X, y, weight, A = problem
    mirrored = predictions(X[:, ::-1], y, weight, A, X[:, ::-1])
    assert np.allclose(mirrored, predictions(X, y, weight, A, X), rtol=1e-7, atol=1e-8)


@laws
@given(problems(), st.floats(-100, 100))
def test_a_constant_spectrum_added_changes_nothing(problem, constant):
    X, y, weight, A = problem
    offset = constant * np.linspace(0.5, 1.5, X.shape[1])
    moved = predictions(X + offset, y, weight, A, X + offset)
    assert np.allclose(moved, predictions(X, y, weight, A, X), rtol=1e-6, atol=1e-6)


@laws
@given(problems(), st.sampled_from([1e-6, 0.01, 1e4]), st.floats(-50, 50))
def test_another_unit_of_y(problem, factor, shift):
    X, y, weight, A = problem
    model, other = PLS(A).fit(X, y, weight), PLS(A).fit(X, factor * (y + shift), weight)
    assert np.allclose(other.predict_each(X), factor * (model.predict_each(X) + shift), rtol=1e-8, atol=1e-8 * factor)
    assert np.allclose(other.leverage_each(X), model.leverage_each(X), rtol=1e-6)
    assert np.allclose(other.explained_y_, model.explained_y_, atol=1e-9)


@laws
@given(problems(), st.sampled_from([1e-3, 100.0]))
def test_another_unit_of_the_spectra(problem, factor):
    X, y, weight, A = problem
    expected = predictions(X, y, weight, A, X)
    expected[2] *= factor**2
    assert np.allclose(predictions(factor * X, y, weight, A, factor * X), expected, rtol=1e-7, atol=1e-8 * factor**2)
