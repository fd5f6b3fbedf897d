"""The direct solve of small grids against a dense one."""

import numpy as np
import pytest

from axicfd.kernels import heat_lines


@pytest.mark.parametrize("nz, nr", [(1, 1), (4, 1), (1, 5), (5, 3), (3, 6)])
def test_factors_solve_the_five_point_system(nz, nr):
    rng = np.random.default_rng(nz + 10 * nr)
    w, e, s, n = (rng.random((nz, nr)) for _ in range(4))
    w[0] = e[-1] = s[:, 0] = n[:, -1] = 0.0
    d = w + e + s + n + 0.1
    index = np.arange(nz * nr).reshape(nz, nr)
    matrix = np.diag(d.ravel())
    matrix[index[1:], index[:-1]] -= w[1:]
    matrix[index[:-1], index[1:]] -= e[:-1]
    matrix[index[:, 1:], index[:, :-1]] -= s[:, 1:]
    matrix[index[:, :-1], index[:, 1:]] -= n[:, :-1]
    band, b, x = np.empty((nz * nr, 2 * nr + 1)), rng.random((nz, nr)), np.empty((nz, nr))
    assert heat_lines.eliminate(w, e, s, n, d, band)
    heat_lines.substitute(band, b, x)
    assert x.ravel() == pytest.approx(np.linalg.solve(matrix, b.ravel()), rel=1e-12)


def test_a_system_without_a_solution_is_noticed():
    zero = np.zeros((2, 2))
    assert not heat_lines.eliminate(zero, zero, zero, zero, zero, np.empty((4, 5)))
