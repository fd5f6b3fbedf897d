"""The developed flow and heat transfer of one stream: the one-dimensional radial problem on the same radial mesh.

It gives the developed inlet profile (an analytic profile sampled on the mesh would start a spurious development of the
order of the mesh error), and the values that entry lengths are measured against.
"""

import numpy as np

from axicfd.kernels.momentum import FlowMesh
from axicfd.mesh.grid import Array

SETTLED = 1e-9  # relative change of the decay rate; with a weak film its round-off is not far below


def velocity(mesh: FlowMesh, density: float, mass_flow: float) -> Array:
    """(nr,) [m/s] developed axial velocity of a fluid of uniform viscosity.

    Solves (1/r) d(r du/dr)/dr = constant with the radial differences of the momentum equations.
    """
    link = mesh.ring / mesh.drc
    u = _solve(link, mesh.area)
    return u * mass_flow / (density * (u * mesh.area).sum())


def friction_reynolds(mesh: FlowMesh, u: Array) -> float:
    """Darcy f Re of a developed velocity profile u on the stream's mesh: 64 in a round tube.

    From the wall shear of unit viscosity: f = 8 tau / (rho U^2) and Re = rho U D_h / mu.
    """
    wetted = mesh.ring[0] + mesh.ring[-1]
    area = mesh.area.sum()
    mean = (u * mesh.area).sum() / area
    shear = (u[-1] * mesh.ring[-1] / mesh.drc[-1] + u[0] * mesh.ring[0] / mesh.drc[0]) / wetted
    return float(8.0 * shear * 4.0 * area / wetted / mean)


def nusselt_uniform_flux(mesh: FlowMesh, u: Array) -> float:
    """Developed Nusselt number with uniform wall flux (48/11 in a round tube)."""
    link = mesh.ring / mesh.drc
    flow = u * mesh.area
    heat = 2.0 * np.pi  # per length, conductivity 1
    # T rises linearly along z; each ring passes inward what the flow inside it takes up
    inward = heat * np.cumsum(flow)[:-1] / flow.sum()
    t = np.concatenate([[0.0], np.cumsum(inward / link[1:-1])])
    bulk = (t * flow).sum() / flow.sum()
    wall = t[-1] + heat * mesh.drc[-1] / mesh.ring[-1]
    diameter = mesh.ring[-1] / np.pi
    return float(heat / mesh.ring[-1] * diameter / (wall - bulk))


def nusselt_third_kind(mesh: FlowMesh, u: Array, biot: float, peclet: float) -> float:
    """Developed Nusselt number with an outer resistance: Biot = U D / k of wall and film (infinite: uniform wall
    temperature).

    The slowest decaying solution T ~ phi(r) exp(-g z) of convection, radial and axial conduction; the axial part is
    iterated (it matters below Pe of about 10). Round tube: 3.6568 at infinite Biot, 4 at Biot 4, both at large Pe.
    """
    radius = mesh.ring[-1] / (2.0 * np.pi)
    area = mesh.area.sum()
    flow = u * mesh.area
    flow = flow * (peclet * area / (2.0 * radius) / flow.sum())  # m cp, in units of the conductivity
    half = mesh.drc[-1] / mesh.ring[-1]
    film = 0.0 if np.isinf(biot) else 2.0 * radius / (biot * mesh.ring[-1])
    link = mesh.ring / mesh.drc
    link[0], link[-1] = 0.0, 1.0 / (half + film)
    matrix = np.diag(link[:-1] + link[1:]) - np.diag(link[1:-1], 1) - np.diag(link[1:-1], -1)
    g = 0.0
    for _ in range(200):
        scale = 1.0 / np.sqrt(flow + g * mesh.area)
        values, vectors = np.linalg.eigh(matrix * np.outer(scale, scale))
        done = abs(values[0] - g) < SETTLED * values[0]
        g = 0.5 * (g + values[0]) if g else values[0]
        if done:
            break
    t = scale * vectors[:, 0]
    bulk = (t * flow).sum() / flow.sum()
    out = t[-1] * link[-1]
    wall = t[-1] - out * half
    return float(out / mesh.ring[-1] * 2.0 * radius / (bulk - wall))


def _solve(link: Array, source: Array) -> Array:
    """Tridiagonal conduction between cells with links to zero at both ends."""
    n = len(source)
    # the flow that passes each face but for what passes the innermost one, and the fall from it to the outside
    passed = np.concatenate([[0.0], np.cumsum(source)])
    resistance = np.zeros(n + 1)
    np.divide(1.0, link, out=resistance, where=link > 0.0)
    total = resistance.sum()
    inner = (passed * resistance).sum() / total if link[0] > 0.0 else 0.0
    return np.cumsum(((passed - inner) * resistance)[:0:-1])[::-1]
