"""The iteration on small complex symmetric systems, and how it reports failure."""

import numpy as np
import pytest

from substrate.errors import NotConverged
from substrate.solve.krylov import cocr


def system(n: int, seed: int = 0):
    rng = np.random.default_rng(seed)
    a = rng.standard_normal((n, n)) + 1j * rng.standard_normal((n, n))
    matrix = np.eye(n) * (3.0 + 1.0j) + 0.3 * (a + a.T) / np.sqrt(n)
    return matrix, rng.standard_normal((n, 1)) + 1j * rng.standard_normal((n, 1))


def test_solution_equals_dense_solution():
    matrix, right = system(60)
    x, report = cocr(lambda v: matrix @ v, right, 1e-10, 200)
    assert report.residual <= 1e-10 and report.converged
    assert np.linalg.norm(x - np.linalg.solve(matrix, right)) < 1e-8 * np.linalg.norm(x)  # condition number of order 10


def test_residual_in_the_report_is_the_true_one():
    matrix, right = system(40, 2)
    x, report = cocr(lambda v: matrix @ v, right, 1e-6, 200)
    true = np.linalg.norm(right - matrix @ x) / np.linalg.norm(right)
    assert abs(report.residual - true) < 1e-15


def test_good_guess_saves_products():
    matrix, right = system(60, 3)
    exact = np.linalg.solve(matrix, right)
    _, cold = cocr(lambda v: matrix @ v, right, 1e-8, 200)
    _, warm = cocr(lambda v: matrix @ v, right, 1e-8, 200, guess=exact * (1 + 1e-5))
    assert warm.products < cold.products


def test_too_few_products_raise_with_the_best_vector():
    matrix, right = system(60, 4)
    with pytest.raises(NotConverged, match="5 products were spent") as caught:
        cocr(lambda v: matrix @ v, right, 1e-12, 5)
    residual = np.linalg.norm(right - matrix @ caught.value.best) / np.linalg.norm(right)
    assert residual < 1.0 and abs(caught.value.report.residual - residual) < 1e-14


def test_numbers_that_stop_being_finite_are_noticed():
    matrix, right = system(20, 5)
    calls = []

    def poisoned(v):
        calls.append(1)
        return matrix @ v if len(calls) < 4 else np.full_like(v, np.nan)

    with pytest.raises(NotConverged, match="finite"):
        cocr(poisoned, right, 1e-12, 100)


def test_zero_right_hand_side():
    matrix, right = system(10)
    x, report = cocr(lambda v: matrix @ v, 0 * right, 1e-8, 10)
    assert not x.any() and report.products == 0
