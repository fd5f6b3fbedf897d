"""The solver's structure is general: an annulus and a step need no code of their own."""

import numpy as np
import pytest

from axicfd.kernels.momentum import Viscosity
from axicfd.mesh.spacing import graded_map
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.flow import Flow, flow_mesh

RHO, U = 1000.0, 0.1


def flow_on(z, r, fluid, u_in, mu):
    mesh = flow_mesh(z, r, fluid)
    shapes = fluid.shape, (len(z), len(r)), (fluid.shape[0], len(r))
    return Flow(mesh, RHO, u_in, Viscosity(*(np.full(s, mu) for s in shapes)))


def cycles_needed(flow, below=1e-8, limit=40):
    cycle = FlowCycle(flow)
    for n in range(limit):
        if flow.residual() < below:
            return n
        cycle.cycle()
    raise AssertionError(f"residual {flow.residual():.1e} after {limit} cycles")


# ---------------------------------------------------------------------- annulus


@pytest.mark.parametrize("ratio", [0.1, 0.5, 0.9])
def test_a_developed_annulus(ratio):
    """f Re from the wall shear of both walls and from the pressure gradient, at the end of a long annulus.

    Fanning f Re = 16 (1 - k)^2 / (1 + k^2 - B), B = (1 - k^2) / ln(1/k); Re and f with D_h = 2 (R - r) (closed form).
    """
    outer = 5e-3
    inner, cells, stations = ratio * outer, 32, 48
    gap = outer - inner
    r = inner + gap * graded_map(4.0, True, True)(np.arange(cells + 1) / cells)
    z = 30.0 * gap * graded_map(20.0, True, False)(np.arange(stations + 1) / stations)
    mu = RHO * U * 2.0 * gap / 50.0
    flow = flow_on(z, r, np.ones((stations, cells)), np.full(cells, U), mu)
    assert cycles_needed(flow) <= 12
    b = (1.0 - ratio**2) / np.log(1.0 / ratio)
    expected = 16.0 * (1.0 - ratio) ** 2 / (1.0 + ratio**2 - b)
    # at the end of the annulus Fanning's f = tau / (rho U^2 / 2), tau averaged over both walls
    rc = 0.5 * (r[1:] + r[:-1])
    shear = mu * flow.u[-2, -1] / (outer - rc[-1]), mu * flow.u[-2, 0] / (rc[0] - inner)
    tau = (outer * shear[0] + inner * shear[1]) / (outer + inner)
    assert tau / (RHO * U**2 / 2.0) * 50.0 == pytest.approx(expected, rel=5e-3)
    gradient = (flow.p[-3].mean() - flow.p[-2].mean()) / (flow.mesh.dzu[-3])
    assert gradient * gap / 2.0 / (RHO * U**2 / 2.0) * 50.0 == pytest.approx(expected, rel=5e-3)


# ---------------------------------------------------------------------- step


def expansion(cells, before, after):
    """A developed stream at Re 50 that widens from radius h to 2 h, with cells graded to the step in r and z.

    cells : across each of the small tube and the step        before, after : stations
    """
    h = 5e-3
    inside = graded_map(4.0, False, True)(np.arange(cells + 1) / cells)
    outside = graded_map(4.0, True, True)(np.arange(1, cells + 1) / cells)
    r = h * np.concatenate([inside, 1.0 + outside])
    up = graded_map(20.0, False, True)(np.arange(before + 1) / before)
    down = graded_map(20.0, True, False)(np.arange(1, after + 1) / after)
    z = np.concatenate([3.0 * h * (up - 1.0), 20.0 * h * down])
    fluid = np.ones((before + after, 2 * cells))
    fluid[:before, cells:] = 0.0
    rc = 0.5 * (r[1:] + r[:-1])
    u_in = np.where(rc < h, 2.0 * U * (1.0 - (rc / h) ** 2), 0.0)
    return flow_on(z, r, fluid, u_in, RHO * U * 2.0 * h / 50.0), h


def reattachment(flow, h):
    """Length in step heights at which the wall shear of the wide tube changes its sign for good."""
    z, u = flow.mesh.z, flow.u[:, -1]
    i = int(np.flatnonzero((z > 0.0) & (u < 0.0))[-1])
    return (z[i] + (z[i + 1] - z[i]) * u[i] / (u[i] - u[i + 1])) / h


def test_a_sudden_expansion_reattaches_where_it_should():
    """1:2 at Re 50 of the small tube: 4.412 step heights.

    Independent computation, not published (Taylor-Hood finite elements on three meshes); near L/h = 0.0876 Re of
    Macagno & Hung 1967 (J. Fluid Mech. 28, 43) and Hammad, Otugen & Arik 1999 (Exp. Fluids 26, 266), from memory.
    """
    flow, h = expansion(20, 24, 96)
    assert cycles_needed(flow) <= 16
    assert reattachment(flow, h) == pytest.approx(4.412, rel=0.02)
