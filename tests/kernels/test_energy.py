"""The energy kernels against a slow version written from the balance of each cell."""

import numpy as np
import pytest

from axicfd.kernels import energy as kernel
from tests.reference.plain_energy import NOTHING, SOLID, STREAM, PlainEnergy

CAPACITY = 4000.0


class Random:
    """A stream, a wall with a one-cell layer, a void and a shorter stack, on a strongly graded mesh."""

    def __init__(self, seed, nz=9, nr=8, sign=1):
        rng = np.random.default_rng(seed)
        self.nz, self.nr = nz, nr
        self.z = np.concatenate([[0.0], np.cumsum(1e-3 * 30.0 ** rng.random(nz))])
        self.r = np.concatenate([[0.0], np.cumsum(1e-4 * 30.0 ** rng.random(nr))])
        kind = np.full((nz, nr), SOLID)
        kind[:, : nr // 2] = STREAM
        kind[nz // 3 : nz // 2, nr - 2] = NOTHING  # a void between two solids
        kind[nz // 2 :, nr - 1] = NOTHING  # nothing outside the shorter stack
        self.kind = kind
        material = np.where(kind == STREAM, 0, 1)
        material[:, nr // 2 + 1] = 2  # one cell thick
        k_r, k_z = np.array([0.6, 16.0, 0.2]), np.array([0.6, 16.0, 0.0])
        contact = np.zeros((nz, nr + 1))
        contact[:, nr // 2 + 1] = 1e-4
        flowing = kind == STREAM
        mz = sign * rng.random((nz + 1, nr)) * np.vstack([flowing[:1], flowing]) * 1e-3
        mz[:, 0] *= -1.0  # one ring runs the other way
        mr = rng.normal(0.0, 1e-3, (nz, nr + 1))
        mr[:, 0] = mr[:, nr // 2 :] = 0.0
        self.plain = PlainEnergy(
            self.z,
            self.r,
            kind,
            np.where(kind == NOTHING, 0.0, rng.normal(0.0, 20.0, (nz, nr))),
            lambda cell, other: k_r[material[cell]],
            lambda cell, other: k_z[material[cell]],
            contact,
            rng.random((nz, nr)) * 1e6 * (kind == SOLID),
            rng.normal(0.0, 1.0, (nz, nr)),
            mz,
            mr,
            lambda t: CAPACITY * t + 3.0 * t**2,
            rng.normal(0.0, 5.0, nr),
            rng.normal(0.0, 5.0, nr),
            {2, 5, 6},
        )
        p = self.plain
        conducts = kind != NOTHING
        self.gz, self.gr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
        self.rise_in, self.rise_out = np.zeros((nz, nr)), np.zeros((nz, nr))
        for i in range(nz):
            for j in range(nr):
                if conducts[i, j]:
                    self.rise_in[i, j], self.rise_out[i, j] = p.rise(i, j, j), p.rise(i, j, j + 1)
                if j > 0 and conducts[i, j] and conducts[i, j - 1]:
                    total = p.half_across(i, j - 1, j, None) + p.half_across(i, j, j, None)
                    total += contact[i, j] / (2.0 * np.pi * self.r[j] * p.dz(i))
                    self.gr[i, j] = 1.0 / total
                if i > 0 and conducts[i, j] and conducts[i - 1, j]:
                    k1, k2 = k_z[material[i - 1, j]], k_z[material[i, j]]
                    if k1 > 0.0 and k2 > 0.0:
                        self.gz[i, j] = p.ring(j) / (p.dz(i - 1) / 2.0 / k1 + p.dz(i) / 2.0 / k2)
        rc = np.array(p.rc)
        self.g = np.zeros(nr + 1)
        self.g[1:-1] = (self.r[1:-1] - rc[:-1]) / np.diff(rc)
        upwind = np.isin(np.arange(nz + 1), list(p.upwind))
        self.weights = np.zeros((nz + 1, nr, 4))
        kernel.z_scheme(mz, self.z, np.array(p.zc), upwind, self.weights)

    def residual(self, t=None):
        p = self.plain
        t = p.t if t is None else t
        tz, tr = np.zeros((self.nz + 1, self.nr)), np.zeros((self.nz, self.nr + 1))
        qz, qr, found = np.zeros_like(tz), np.zeros_like(tr), np.zeros_like(t)
        kernel.face_temperatures(t, self.weights, self.g, p.inflow_first, p.inflow_last, p.mz, tz, tr)
        kernel.conducted(t, self.rise_in, self.rise_out, self.gz, self.gr, qz, qr)
        volume = np.array([[p.ring(j) * p.dz(i) for j in range(self.nr)] for i in range(self.nz)])
        gain = p.source * volume + p.extra
        kernel.balance(p.mz * p.h(tz), p.mr * p.h(tr), qz, qr, gain, found)
        found[self.kind == NOTHING] = 0.0
        self.tz, self.tr, self.qz, self.qr = tz, tr, qz, qr
        return found


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize("size", [(9, 8), (6, 6), (3, 4)])
def test_residual_is_the_balance_of_each_cell(sign, size):
    case = Random(1, *size, sign)
    expected, found = case.plain.residual(), case.residual()
    scale = np.abs(case.plain.mz).max() * CAPACITY * 20.0
    assert np.abs(expected).max() > 0.01 * scale
    assert np.abs(found - expected).max() <= 1e-12 * max(scale, np.abs(expected).max())


def test_what_leaves_one_cell_enters_the_next():
    """The sum over all cells is gain plus what crosses the two planes: nothing is lost inside."""
    case = Random(2)
    r = case.residual()
    p = case.plain
    planes = (p.mz[0] * p.h(case.tz[0])).sum() - (p.mz[-1] * p.h(case.tz[-1])).sum()
    volume = np.array([[p.ring(j) * p.dz(i) for j in range(case.nr)] for i in range(case.nz)])
    gain = ((p.source * volume + p.extra) * (case.kind != NOTHING)).sum()
    assert r.sum() == pytest.approx(planes + gain, rel=1e-12)


def test_stencil_is_the_derivative_of_the_residual():
    """Constant heat capacity makes the residual linear, so one step is exact."""
    case = Random(3)
    p = case.plain
    p.h = lambda t: CAPACITY * t
    empty = case.kind == NOTHING
    loss = np.zeros((case.nz, case.nr))
    links = np.empty((7, case.nz, case.nr))
    kernel.stencil(
        case.gz,
        case.gr,
        p.mz * CAPACITY,
        p.mr * CAPACITY,
        case.weights,
        case.g,
        loss,
        empty,
        links,
    )
    assert (links[0][empty] == 1.0).all() and not links[1:, empty].any()
    change = np.where(empty, 0.0, np.random.default_rng(4).normal(0.0, 1.0, p.t.shape))
    before, after = case.residual().copy(), case.residual(p.t + change)
    expected = np.empty_like(change)
    kernel.apply(links, change, expected)
    assert not expected[empty].any()
    assert np.abs(before - after - expected).max() <= 1e-11 * np.abs(before).max()


@pytest.mark.parametrize("sign", [1.0, -1.0])
@pytest.mark.parametrize("upwind", [False, True])
def test_axial_scheme_carries_a_straight_line_exactly(sign, upwind):
    """Both schemes are of second order on uneven cells: exact for T linear in z."""
    rng = np.random.default_rng(5)
    z = np.concatenate([[0.0], np.cumsum(30.0 ** rng.random(8))])
    zc = 0.5 * (z[1:] + z[:-1])
    weights = np.zeros((9, 1, 4))
    mz = np.full((9, 1), sign)
    kernel.z_scheme(mz, z, zc, np.full(9, upwind), weights)
    tz, tr = np.zeros((9, 1)), np.zeros((8, 2))
    end = np.array([2.0 + 3.0 * z[0]]), np.array([2.0 + 3.0 * z[-1]])
    kernel.face_temperatures(2.0 + 3.0 * zc[:, None], weights, np.zeros(2), *end, mz, tz, tr)
    assert tz[:, 0] == pytest.approx(2.0 + 3.0 * z, rel=1e-13)


def test_linear_upwind_looks_only_upstream():
    z = np.linspace(0.0, 1.0, 9)
    weights = np.zeros((9, 1, 4))
    kernel.z_scheme(np.ones((9, 1)), z, 0.5 * (z[1:] + z[:-1]), np.ones(9, bool), weights)
    assert not weights[2:, 0, 2:].any()
    # uniform cells: T_P + (T_P - T_W)/2
    assert weights[4, 0] == pytest.approx([-0.5, 1.5, 0.0, 0.0])


def test_fromm_on_even_cells():
    """(1/4) (T_E - T_W) beside the cell upstream: Fromm 1968, J. Comput. Phys. 3, 176-189 (from memory)."""
    z = np.linspace(0.0, 1.0, 9)
    weights = np.zeros((9, 1, 4))
    kernel.z_scheme(np.ones((9, 1)), z, 0.5 * (z[1:] + z[:-1]), np.zeros(9, bool), weights)
    assert weights[4, 0] == pytest.approx([-0.25, 1.0, 0.25, 0.0])
    kernel.z_scheme(-np.ones((9, 1)), z, 0.5 * (z[1:] + z[:-1]), np.zeros(9, bool), weights)
    assert weights[4, 0] == pytest.approx([0.0, 0.25, 1.0, -0.25])
