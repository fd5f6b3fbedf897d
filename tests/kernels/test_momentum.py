"""The momentum kernels against a slow version written from the equations, and laws they must keep."""

import numpy as np
import pytest

from axicfd.kernels import continuity, momentum
from axicfd.kernels.momentum import Viscosity
from axicfd.solver.flow import flow_mesh
from tests.reference.plain_flow import PlainFlow

SHAPES = [(1, 1), (3, 1), (1, 3), (2, 2), (3, 4), (9, 6)]


def random_faces(rng, n, start, ratio):
    """n cells whose sizes differ by up to `ratio`, from `start` on."""
    return np.concatenate([[start], start + np.cumsum(1e-3 * ratio ** rng.random(n))])


def blocks(shape, kind):
    """Fluid cells: all, or with parts of the cross-section blocked."""
    fluid = np.ones(shape)
    nz, nr = shape
    if kind == "step":  # the stream widens
        fluid[: nz // 2, nr // 2 :] = 0.0
    elif kind == "contraction":
        fluid[nz // 2 :, nr // 2 :] = 0.0
    elif kind == "obstacle":
        fluid[nz // 3 : 2 * nz // 3, nr // 3 : 2 * nr // 3] = 0.0
    return fluid


class Random:
    """Random fields on a strongly graded random mesh; velocities vanish on walls and blocked faces."""

    def __init__(self, seed, shape, r_first=0.0, kind="open", backwards=False):
        rng = np.random.default_rng(seed)
        nz, nr = shape
        self.z, self.r = random_faces(rng, nz, 0.0, 30.0), random_faces(rng, nr, r_first, 30.0)
        self.fluid = blocks(shape, kind)
        self.mesh = m = flow_mesh(self.z, self.r, self.fluid)
        self.rho = 900.0
        self.u = rng.normal(0.3, 1.0, (nz + 1, nr)) * np.vstack([self.fluid[:1], m.open_u[1:]])
        if backwards:
            self.u = -np.abs(self.u)
        self.v = rng.normal(0.0, 0.5, (nz, nr + 1)) * m.open_v
        self.p = rng.normal(0.0, 500.0, shape) * self.fluid
        self.mu = Viscosity(*(0.1 * 20.0 ** rng.random(s) for s in (shape, (nz + 1, nr + 1), (nz, nr + 1))))
        self.mz, self.mr = np.zeros_like(self.u), np.zeros_like(self.v)
        momentum.mass_fluxes(m, self.rho, self.u, self.v, self.mz, self.mr)

    def plain(self):
        return PlainFlow(self.z, self.r, self.fluid, self.rho, self.u, self.v, self.p, *self.mu)

    def residuals(self, fu=0.0, fv=0.0):
        su, sv = np.zeros_like(self.u), np.zeros_like(self.v)
        ru, rv = np.zeros_like(self.u), np.zeros_like(self.v)
        fu, fv = np.full_like(self.u, fu), np.full_like(self.v, fv)
        momentum.explicit_terms(self.mesh, self.mu, self.u, self.v, self.mz, self.mr, fu, fv, su, sv)
        momentum.residuals(self.mesh, self.mu, self.u, self.v, self.p, self.mz, self.mr, su, sv, ru, rv)
        return ru, rv


def assert_same(found, expected):
    scale = max(np.abs(expected).max(), 1e-30)
    assert np.abs(found - expected).max() <= 1e-12 * scale


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("r_first", [0.0, 2e-3])
@pytest.mark.parametrize("backwards", [False, True])
def test_residuals_are_the_equations(shape, r_first, backwards):
    fields = Random(1, shape, r_first, backwards=backwards)
    ru, rv, rc = fields.plain().residuals()
    found_u, found_v = fields.residuals()
    assert_same(found_u, ru)
    assert_same(found_v, rv)
    b = np.zeros(shape)
    total = continuity.mass_defect(fields.mz, fields.mr, fields.mesh.open_p, np.zeros(shape), b)
    assert_same(b, rc)
    assert total == pytest.approx(np.abs(rc).sum(), rel=1e-12)


@pytest.mark.parametrize("kind", ["step", "contraction", "obstacle"])
@pytest.mark.parametrize("r_first", [0.0, 2e-3])
def test_residuals_beside_blocked_cells(kind, r_first):
    fields = Random(2, (9, 6), r_first, kind)
    ru, rv, _ = fields.plain().residuals()
    found_u, found_v = fields.residuals()
    assert_same(found_u, ru)
    assert_same(found_v, rv)
    assert not found_u[fields.mesh.open_u == 0.0].any()
    assert not found_v[fields.mesh.open_v == 0.0].any()


def test_given_sources_are_added_to_every_open_equation():
    fields = Random(3, (5, 4))
    ru, rv = fields.residuals()
    with_u, with_v = fields.residuals(fu=2.0, fv=3.0)
    assert with_u[1:] - ru[1:] == pytest.approx(2.0)
    assert with_v[:, 1:-1] - rv[:, 1:-1] == pytest.approx(3.0)


@pytest.mark.parametrize("kind", ["open", "step", "obstacle"])
def test_viscous_heat_is_that_of_the_stresses(kind):
    fields = Random(4, (9, 6), 0.0 if kind == "open" else 1e-3, kind)
    phi = np.zeros((9, 6))
    momentum.dissipation(fields.mesh, fields.mu, fields.u, fields.v, phi)
    assert phi.sum() == pytest.approx(fields.plain().dissipation(), rel=1e-12)
    assert not phi[fields.fluid == 0.0].any(), "heat of a moving fluid must not appear in solid"


def test_a_line_of_coefficients_is_the_derivative_of_its_residual():
    """With convection by upwind alone (no explicit terms) the stencil is exact for frozen mass fluxes."""
    fields = Random(5, (5, 4))
    m, none_u, none_v = fields.mesh, np.zeros_like(fields.u), np.zeros_like(fields.v)
    i, step = 2, 1e-6
    k, moved = np.zeros((5, 6)), np.zeros((5, 6))
    momentum.u_line(m, fields.mu, fields.u, fields.p, fields.mz, fields.mr, none_u, i, k)
    neighbours = {momentum.N: (0, 1), momentum.S: (0, -1), momentum.W: (-1, 0), momentum.E: (1, 0)}
    for column, (a, b) in neighbours.items():
        u = fields.u.copy()
        u[i + a, 2 + b] += step
        momentum.u_line(m, fields.mu, u, fields.p, fields.mz, fields.mr, none_u, i, moved)
        slope = (moved[2, momentum.R] - k[2, momentum.R]) / step
        assert slope == pytest.approx(k[2, column], rel=1e-5)
    v = fields.v.copy()
    momentum.v_line(m, fields.mu, fields.v, fields.p, fields.mz, fields.mr, none_v, i, k)
    v[i, 2] += step
    momentum.v_line(m, fields.mu, v, fields.p, fields.mz, fields.mr, none_v, i, moved)
    slope = (moved[2, momentum.R] - k[2, momentum.R]) / step
    assert slope == pytest.approx(-k[2, momentum.P], rel=1e-5)


def test_mass_fluxes_of_plug_flow_add_up():
    fields = Random(6, (4, 5))
    fields.u[:] = 0.2
    momentum.mass_fluxes(fields.mesh, 1000.0, fields.u, fields.v, fields.mz, fields.mr)
    # closed form: rho U pi R^2
    assert fields.mz.sum(axis=1) == pytest.approx(1000.0 * 0.2 * np.pi * fields.r[-1] ** 2, rel=1e-14)
