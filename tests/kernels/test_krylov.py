"""Vector kernels of GMRES against numpy."""

import numpy as np
import pytest

from axicfd.kernels import krylov


def test_directions_stay_orthonormal():
    rng = np.random.default_rng(0)
    start = rng.random((8, 5))
    basis = [start / np.linalg.norm(start)]
    for _ in range(5):
        w = rng.random((8, 5))
        asked = w.copy()
        h = [krylov.take_out(v, w) for v in basis]
        h.append(krylov.norm(w))
        basis.append(w / h[-1])
        assert sum(a * v for a, v in zip(h, basis, strict=True)) == pytest.approx(asked, rel=1e-12)
    flat = np.array(basis).reshape(6, -1)
    assert flat @ flat.T == pytest.approx(np.eye(6), abs=1e-13)


def test_multiple_and_norm():
    v, x = np.arange(12.0).reshape(3, 4), np.ones((3, 4))
    krylov.add(-2.0, v, x)
    assert x == pytest.approx(1.0 - 2.0 * np.arange(12.0).reshape(3, 4))
    assert krylov.norm(x) == pytest.approx(np.linalg.norm(x))


def test_rotations_solve_the_least_squares_problem():
    rng = np.random.default_rng(3)
    h = np.triu(rng.random((6, 5)), -1)
    columns, turns, g = [], [], [2.0]
    for k in range(5):
        columns.append(list(h[: k + 2, k]))
        left = krylov.rotate(columns[k], turns, g)
        y, squares, *_ = np.linalg.lstsq(h[: k + 2, : k + 1], 2.0 * np.eye(k + 2)[0], rcond=None)
        assert left**2 == pytest.approx(squares[0], rel=1e-10)
    triangle = np.zeros((5, 5))
    for k, column in enumerate(columns):
        triangle[: k + 1, k] = column[: k + 1]
    assert np.linalg.solve(triangle, g[:5]) == pytest.approx(y, rel=1e-10)
