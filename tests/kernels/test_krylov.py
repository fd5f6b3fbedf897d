"""Vector kernels of GMRES against numpy."""

import numpy as np
import pytest

from axicfd.kernels import krylov


def test_directions_stay_orthonormal():
    rng = np.random.default_rng(0)
    basis, n = np.zeros((6, 40)), 40
    start = rng.random(n)
    basis[0] = start / np.linalg.norm(start)
    for k in range(5):
        w, h = rng.random(n), np.zeros(6)
        asked = w.copy()
        krylov.orthogonalise(basis, k, w, h)
        assert h[: k + 2] @ basis[: k + 2] == pytest.approx(asked, rel=1e-12)
    assert basis @ basis.T == pytest.approx(np.eye(6), abs=1e-13)


def test_combination_and_norm():
    basis, y = np.arange(12.0).reshape(3, 4), np.array([2.0, -1.0])
    x = np.empty(4)
    krylov.combine(basis, y, 2, x)
    assert x == pytest.approx(2.0 * basis[0] - basis[1])
    assert krylov.norm(x) == pytest.approx(np.linalg.norm(x))


def test_rotations_solve_the_least_squares_problem():
    rng = np.random.default_rng(3)
    h = np.triu(rng.random((6, 5)), -1)
    columns, turns, g = np.zeros((5, 6)), np.zeros((5, 2)), np.zeros(6)
    g[0] = 2.0
    for k in range(5):
        columns[k] = h[:, k]
        left = krylov.rotate(columns[k], turns, k, g)
        y, squares, *_ = np.linalg.lstsq(h[: k + 2, : k + 1], 2.0 * np.eye(k + 2)[0], rcond=None)
        assert left**2 == pytest.approx(squares[0], rel=1e-10)
    assert np.linalg.solve(columns[:, :5].T, g[:5]) == pytest.approx(y, rel=1e-10)
