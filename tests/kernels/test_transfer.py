"""Transfers between nested meshes: flows and residuals add up, smooth changes come back."""

import numpy as np
import pytest

from axicfd.kernels import transfer
from axicfd.solver.flow import neighbours


@pytest.mark.parametrize("pairs", [(2, 2), (2, 1), (1, 2)])
def test_restricted_velocities_carry_the_same_flow(pairs):
    rng = np.random.default_rng(1)
    nz, nr = 7, 4
    area, dz = rng.random(nr), rng.random(nz)
    u, v, p = rng.random((nz + 1, nr)), rng.random((nz, nr + 1)), rng.random((nz, nr))
    volume = dz[:, None] * area
    cnz, cnr = -(-nz // pairs[0]), nr // pairs[1]
    cu, cv, cp = np.zeros((cnz + 1, cnr)), np.zeros((cnz, cnr + 1)), np.zeros((cnz, cnr))
    transfer.restrict_velocity(u, v, p, area, dz, volume, *pairs, cu, cv, cp)
    coarse_area = area.reshape(cnr, -1).sum(axis=1)
    starts = np.arange(0, nz, pairs[0])
    coarse_dz = np.add.reduceat(dz, starts)
    faces = np.minimum(np.arange(cnz + 1) * pairs[0], nz)
    assert (cu * coarse_area).sum(axis=1) == pytest.approx((u * area).sum(axis=1)[faces], rel=1e-13)
    through = (v * dz[:, None]).sum(axis=0)[:: pairs[1]]
    assert (cv * coarse_dz[:, None]).sum(axis=0) == pytest.approx(through, rel=1e-13)
    assert (cp * coarse_dz[:, None] * coarse_area).sum() == pytest.approx((p * volume).sum(), rel=1e-13)


def test_a_coarse_cell_without_fluid_has_no_pressure():
    u, v, p = np.zeros((3, 2)), np.zeros((2, 3)), np.ones((2, 2))
    cu, cv, cp = np.zeros((2, 1)), np.zeros((1, 2)), np.ones((1, 1))
    transfer.restrict_velocity(u, v, p, np.ones(2), np.ones(2), np.zeros((2, 2)), 2, 2, cu, cv, cp)
    assert cp[0, 0] == 0.0


@pytest.mark.parametrize("nz", [6, 7])
@pytest.mark.parametrize("pair_r", [1, 2])
def test_restricted_residuals_keep_their_sum(nz, pair_r):
    rng = np.random.default_rng(2)
    ru, rv, rc = rng.random((nz + 1, 4)), rng.random((nz, 5)), rng.random((nz, 4))
    ru[0] = 0.0  # the inlet plane is given
    rv[:, 0] = rv[:, -1] = 0.0
    cnz, cnr = -(-nz // 2), 4 // pair_r
    cru, crv, crc = np.zeros((cnz + 1, cnr)), np.zeros((cnz, cnr + 1)), np.zeros((cnz, cnr))
    transfer.restrict_residuals(ru, rv, rc, 2, pair_r, cru, crv, crc)
    assert crc.sum() == pytest.approx(rc.sum(), rel=1e-13)
    # half of the first inner face's residual belongs to the inlet plane, half of the v beside a wall to it
    assert cru.sum() == pytest.approx(ru.sum() - 0.5 * ru[1].sum(), rel=1e-13)
    lost = 0.5 * (rv[:, 1].sum() + rv[:, -2].sum()) if pair_r == 2 else 0.0
    assert crv.sum() == pytest.approx(rv.sum() - lost, rel=1e-13)


def test_prolonged_changes_are_bilinear():
    coarse_z, coarse_r = np.array([0.0, 1.0, 3.0]), np.array([0.0, 2.0])
    fine_z, fine_r = np.array([0.0, 0.5, 1.0, 2.5, 3.0]), np.array([0.5, 2.0])
    coarse = 2.0 + coarse_z[:, None] - 3.0 * coarse_r + coarse_z[:, None] * coarse_r
    expected = 2.0 + fine_z[:, None] - 3.0 * fine_r + fine_z[:, None] * fine_r
    fine, open_ = np.ones((5, 2)), np.ones((5, 2))
    open_[3, 1] = 0.0
    transfer.prolong_add(coarse, *neighbours(fine_z, coarse_z), *neighbours(fine_r, coarse_r), open_, fine)
    assert fine == pytest.approx(1.0 + expected * open_, rel=1e-14)


def test_sums_over_joined_cells_of_any_size():
    values = np.random.default_rng(5).normal(size=(7, 5))
    rows, columns = np.array([0, 2, 3, 5]), np.array([0, 1, 3])
    total = np.empty((4, 3))
    transfer.sums(values, rows, columns, total)
    np.testing.assert_allclose(total, np.add.reduceat(np.add.reduceat(values, rows, axis=0), columns, axis=1))
