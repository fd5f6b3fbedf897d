"""The pressure correction: its operator, its multigrid parts and what it does to the mass defect."""

import numpy as np
import pytest

from axicfd.kernels import continuity


class Random:
    """A random symmetric system as the pressure correction makes them."""

    def __init__(self, seed, nz=6, nr=4):
        rng = np.random.default_rng(seed)
        self.cz, self.cr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
        self.cz[1:] = 10.0 ** rng.uniform(-1.0, 1.0, (nz, nr))
        self.cr[:, 1:-1] = 10.0 ** rng.uniform(-1.0, 1.0, (nz, nr - 1))
        self.b = rng.normal(0.0, 1.0, (nz, nr))
        self.x = rng.normal(0.0, 1.0, (nz, nr))
        self.pivots = np.zeros((nz, nr))
        continuity.factors(self.cz, self.cr, self.pivots)

    def residual(self):
        """b minus sum c (x - x_neighbour), written plainly; beyond the outlet x = 0."""
        nz, nr = self.b.shape
        r = self.b.copy()
        for i in range(nz):
            for j in range(nr):
                x = self.x[i, j]
                r[i, j] -= self.cz[i, j] * (x - (self.x[i - 1, j] if i > 0 else x))
                r[i, j] -= self.cz[i + 1, j] * (x - (self.x[i + 1, j] if i < nz - 1 else 0.0))
                r[i, j] -= self.cr[i, j] * (x - (self.x[i, j - 1] if j > 0 else x))
                r[i, j] -= self.cr[i, j + 1] * (x - (self.x[i, j + 1] if j < nr - 1 else x))
        return r


def test_line_sweep_leaves_the_last_line_solved():
    for downstream in (True, False):
        s = Random(1)
        continuity.line_sweep(s.cz, s.cr, s.pivots, s.b, s.x, downstream)
        line = -1 if downstream else 0
        assert np.abs(s.residual()[line]).max() < 1e-12


def test_sweeps_and_shifts_solve_the_system():
    s = Random(2)
    for _ in range(600):
        continuity.line_sweep(s.cz, s.cr, s.pivots, s.b, s.x, True)
        continuity.line_sweep(s.cz, s.cr, s.pivots, s.b, s.x, False)
        continuity.station_shift(s.cz, s.cr, s.b, s.x)
    assert np.abs(s.residual()).max() < 1e-8


def test_station_shift_empties_every_station():
    s = Random(3)
    continuity.station_shift(s.cz, s.cr, s.b, s.x)
    assert np.abs(s.residual().sum(axis=1)).max() < 1e-11


@pytest.mark.parametrize("pair_r", [1, 2])
def test_restricted_residual_is_the_sum_over_joined_cells(pair_r):
    s = Random(4, 7, 4)  # an odd last station stays single
    coarse = np.zeros((4, 4 // pair_r))
    continuity.restrict_residual(s.cz, s.cr, s.b, s.x, pair_r, coarse)
    r = s.residual()
    for i in range(4):
        for j in range(coarse.shape[1]):
            joined = r[2 * i : 2 * i + 2, pair_r * j : pair_r * (j + 1)]
            assert coarse[i, j] == pytest.approx(joined.sum(), rel=1e-11, abs=1e-12)


def test_correction_brings_the_flow_that_was_missing():
    """With x solved, the corrected velocities of a one-station stream carry away exactly the defect."""
    rho, area, ring, dz = 1000.0, np.array([2e-6, 6e-6]), np.array([0.0, 6e-3, 9e-3]), np.array([0.01, 0.02])
    rng = np.random.default_rng(5)
    du, dv = rng.random((3, 2)), rng.random((2, 3))
    cz, cr = np.zeros((3, 2)), np.zeros((2, 3))
    continuity.coefficients(rho, area, ring, dz, du, dv, cz, cr)
    u, v, p = np.zeros((3, 2)), np.zeros((2, 3)), np.zeros((2, 2))
    x = rng.random((2, 2))
    continuity.correct(x, du, dv, np.ones((2, 2)), 0.3, u, v, p)
    mz, mr = rho * u * area, rho * v * ring * dz[:, None]
    b = np.zeros((2, 2))
    continuity.mass_defect(mz, mr, np.ones((2, 2)), np.zeros((2, 2)), b)
    s = Random(6, 2, 2)
    s.cz, s.cr, s.b, s.x = cz, cr, np.zeros((2, 2)), x
    assert b == pytest.approx(s.residual(), rel=1e-12)
    assert p == pytest.approx(0.3 * x)


def test_the_system_applied_is_the_defect_minus_the_residual():
    s = Random(6)
    y = np.zeros_like(s.x)
    continuity.apply(s.cz, s.cr, s.x, y)
    assert y == pytest.approx(s.b - s.residual(), rel=1e-11, abs=1e-11)


@pytest.mark.parametrize("pair_r", [1, 2])
def test_the_coarse_system_is_the_galerkin_product(pair_r):
    """P^T A P for corrections constant over joined cells, computed column by column from the fine system."""
    s = Random(7, 7, 4)
    cz, cr = np.zeros((5, 4 // pair_r)), np.zeros((4, 4 // pair_r + 1))
    continuity.coarsen(s.cz, s.cr, pair_r, cz, cr)
    unit, coarse, fine = np.zeros((4, 4 // pair_r)), np.zeros((4, 4 // pair_r)), np.zeros((7, 4))
    for k in range(unit.size):
        unit[...] = 0.0
        unit.flat[k] = 1.0
        continuity.apply(cz, cr, unit, coarse)
        spread = np.repeat(np.repeat(unit, 2, axis=0)[:7], pair_r, axis=1)
        continuity.apply(s.cz, s.cr, spread, fine)
        joined = np.add.reduceat(np.add.reduceat(fine, [0, 2, 4, 6], axis=0), range(0, 4, pair_r), axis=1)
        assert coarse == pytest.approx(joined, rel=1e-11, abs=1e-11)
