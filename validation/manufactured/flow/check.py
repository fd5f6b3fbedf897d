"""Order of both momentum equations and of continuity, with a viscosity that varies along r and z."""

from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.kernels.momentum import Viscosity
from axicfd.mesh.spacing import graded_map
from axicfd.results import lines
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.flow import Flow, flow_mesh
from validation.common import Row
from validation.manufactured.exact import (
    Array,
    Errors,
    by_r,
    by_z,
    errors,
    inside,
    net_outflow,
    plot,
    rows,
    through_axial,
    through_radial,
)

RADIUS, DENSITY, SPEED = 1.0, 1.0, 1.0
JOINT = 1.5  # m, where cells along z grow threefold at once
TO_JOINT, STRETCH, JUMP = 2, 3.0, 3.0  # cells before the joint per cell behind it, their grading to the inlet, the jump
_END_SLOPE = np.arccosh(np.sqrt(STRETCH)) / np.sqrt(1.0 - 1.0 / STRETCH)  # of the map at the joint: delta / tanh(delta)
LENGTH = JOINT * (1.0 + JUMP * _END_SLOPE / TO_JOINT)
MESHES = 16, 32, 64, 128
SOLVED = 1e-11


@dataclass(frozen=True)
class Tube:
    """Exact fields of one case. mu_mean [Pa s]; swing: how strongly the viscosity varies."""

    mu_mean: float
    swing: float

    def stream_function(self, z, r):
        """u = (1/r) d/dr of it, v = -(1/r) d/dz: no slip, and no net flow from g."""
        x2 = (r / RADIUS) ** 2
        return SPEED * RADIUS**2 * (x2 - 0.5 * x2**2 + _swell(z) * x2 * (1.0 - x2) ** 2 * (1.0 + x2))

    def u(self, z, r):
        x2, g = (r / RADIUS) ** 2, _swell(z)
        return SPEED * ((2.0 - 2.0 * x2) + g * (2.0 - 4.0 * x2 - 6.0 * x2**2 + 8.0 * x2**3))

    def v(self, z, r):
        s, x = z / LENGTH, r / RADIUS
        slope = 0.1 * np.sin(0.5 * np.pi * s) + 1.2 * np.sin(np.pi * s) ** 2 * np.cos(np.pi * s)
        slope *= np.pi / LENGTH
        return -SPEED * RADIUS * slope * x * (1.0 - x**2) ** 2 * (1.0 + x**2)

    def p(self, z, r):
        s, x2 = z / LENGTH, (r / RADIUS) ** 2
        size = DENSITY * SPEED**2 + 8.0 * self.mu_mean * SPEED * LENGTH / RADIUS**2
        return size * ((1.0 - s) * (1.0 + 0.4 * x2) + 0.3 * np.sin(np.pi * s) * np.cos(2.0 * x2))

    def mu(self, z, r):
        s, x2 = z / LENGTH, (r / RADIUS) ** 2
        return self.mu_mean * np.exp(self.swing * (np.sin(3.0 * s + 0.4) * (0.3 + x2) - 0.5 * s))


def _swell(z):
    s = z / LENGTH
    return 0.2 * (1.0 - np.cos(0.5 * np.pi * s)) + 0.4 * np.sin(np.pi * s) ** 3


CASES = {
    "Re 50": Tube(2.0 / 50.0, 1.2),
    "Re 0.1": Tube(20.0, 1.2),
    "Re 500": Tube(2.0 / 500.0, 1.2),
}


TO_INLET, TO_WALL = graded_map(STRETCH, True, False), graded_map(4.0, False, True)


def faces(cells: int) -> tuple[Array, Array]:
    """z (3 cells + 1,) with a jump of 1:3 in cell length at the joint, r (cells + 1,) graded to the wall."""
    first, share = TO_JOINT * cells, np.arange(cells + 1) / cells
    before = JOINT * TO_INLET(np.arange(first + 1) / first)
    return np.append(before, JOINT + (LENGTH - JOINT) * share[1:]), RADIUS * TO_WALL(share)


def sources(tube: Tube, z: Array, r: Array) -> tuple[Array, Array]:
    """fu (nz + 1, nr), fv (nz, nr + 1) [N]: net outflow of momentum and stress from each control volume."""
    u, v, p, mu, rho = tube.u, tube.v, tube.p, tube.mu, DENSITY
    u_z, u_r, v_z, v_r, p_r = by_z(u), by_r(u), by_z(v), by_r(v), by_r(p)
    zc, rc = 0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1])

    def shear(a, b):
        return mu(a, b) * (u_r(a, b) + v_z(a, b))

    fu, fv = np.zeros((len(z), len(r) - 1)), np.zeros((len(z) - 1, len(r)))
    along = through_axial(lambda a, b: rho * u(a, b) ** 2 + p(a, b) - 2.0 * mu(a, b) * u_z(a, b), zc, r)
    # the outlet plane has p = 0 and no viscous normal stress: the exact stress there is a given pull
    outlet = through_axial(lambda a, b: rho * u(a, b) ** 2, z[-1:], r)
    across = through_radial(lambda a, b: rho * u(a, b) * v(a, b) - shear(a, b), np.append(zc, z[-1]), r)
    fu[1:] = net_outflow(np.vstack([along, outlet]), across)
    along = through_axial(lambda a, b: rho * u(a, b) * v(a, b) - shear(a, b), z, rc)
    across = through_radial(lambda a, b: rho * v(a, b) ** 2 - 2.0 * mu(a, b) * v_r(a, b), z, rc)
    fv[:, 1:-1] = net_outflow(along, across)
    fv[:, 1:-1] += inside(lambda a, b: p_r(a, b) + 2.0 * mu(a, b) * v(a, b) / b**2, z, rc)
    return fu, fv


def solved(tube: Tube, cells: int) -> Flow:
    z, r = faces(cells)
    zc, rc = 0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1])
    mesh = flow_mesh(z, r, np.ones((len(zc), len(rc))))
    mu = Viscosity(*(np.ascontiguousarray(tube.mu(a[:, None], b[None, :])) for a, b in ((zc, rc), (z, r), (zc, r))))
    # like a developed inlet: values whose differences give the exact slopes, so that the wall shear begins right
    steps = by_r(tube.u)(np.zeros(cells), r[1:]) * mesh.drc[1:]
    flow = Flow(mesh, DENSITY, -np.cumsum(steps[::-1])[::-1], mu)
    flow.fu[...], flow.fv[...] = sources(tube, z, r)
    cycles = FlowCycle(flow)
    for _ in range(60):
        if flow.residual() < SOLVED:
            return flow
        cycles.cycle()
    raise RuntimeError(f"{cells} cells: residual {flow.residual():.1e}")


@lru_cache
def quantities(name: str) -> list[Errors]:
    tube = CASES[name]
    parts: dict[str, tuple[list, list, list]] = {}

    def add(what, found, exact, weight):
        for row, x in zip(parts.setdefault(what, ([], [], [])), (found, exact, weight), strict=True):
            row.append(x)

    for cells in MESHES:
        flow = solved(tube, cells)
        m = flow.mesh
        zc, rc = 0.5 * (m.z[1:] + m.z[:-1]), 0.5 * (m.r[1:] + m.r[:-1])
        add("u", flow.u, tube.u(m.z[:, None], rc), m.dzu[:, None] * m.area)
        add("v", flow.v, tube.v(zc[:, None], m.r), m.dz[:, None] * m.area_v)
        add("p", flow.p, tube.p(zc[:, None], rc), m.dz[:, None] * m.area)
        shear = flow.viscosity.corner[:, -1] * flow.u[:, -1] / (m.r[-1] - rc[-1])
        exact = -tube.mu(m.z, RADIUS) * by_r(tube.u)(m.z, np.full_like(m.z, RADIUS))
        add("wall shear", shear[1:], exact[1:], m.dzu[1:])
        at_inlet = lines.to_axis(lines.to_first_plane(flow.p, zc, 0.0)[None, :], rc)
        add("axis pressure in the inlet plane", at_inlet, np.array([tube.p(0.0, 0.0)]), np.ones(1))
        means = (flow.p * m.area).sum(axis=1) / m.area.sum()
        at_joint, _ = lines.to_faces(means, zc, m.z, ())
        i = int(np.argmin(np.abs(m.z - JOINT)))
        exact_mean = through_axial(tube.p, m.z[i : i + 1], np.array([0.0, RADIUS])).ravel() / m.area.sum()
        add("section pressure at the joint", at_joint[i : i + 1], exact_mean, np.ones(1))
    return [errors(what, list(MESHES), *three) for what, three in parts.items()]


def check() -> list[Row]:
    return [row for name in CASES for row in rows(name, quantities(name))]


def picture(folder: Path) -> None:
    plot(folder / "orders.png", {name: quantities(name) for name in CASES})
