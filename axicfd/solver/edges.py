"""Where a prescribed temperature begins beside a surface without one: conductances for the singular field.

Next to such a joint the temperature goes with the square root of the distance: T = T_w + C Im sqrt(s + i n),
s along the surface (s > 0 under the prescribed temperature), n the depth below it (separation of variables).
The flux grows as s^(-1/2); differences of cell values miss it by a share that no refinement lowers, so that
every heat of the section would converge at first order only. The conductances of faces near the joint are
therefore multiplied by the ratio of the exact heat of this field through the face to its difference quotient.
The ratio tends to 1 away from the joint, and nothing changes where the mesh does not resolve the square root.
"""

from dataclasses import dataclass

import numpy as np

from axicfd.case.layout import PlacedLayer, PlacedSection
from axicfd.case.model import Case
from axicfd.mesh.grid import Array, Grid
from axicfd.solver import boundary

REACH = 0.5  # of the layer's thickness and the sections' lengths: the square root holds near the joint only
RESOLVED = 2.0  # cells beside the joint that must fit into the reach


@dataclass(frozen=True)
class Edges:
    """Factors of conductances: along z (nz + 1, nr), along r (nz, nr + 1); the surface is at grid.outer."""

    z: Array
    r: Array


def edge_factors(case: Case, grid: Grid, t_in: float) -> Edges | None:
    """The factors of all such joints of a case; None without one."""
    along, across = np.ones((grid.nz + 1, grid.nr)), np.ones((grid.nz, grid.nr + 1))
    found = False
    sections = grid.layout.sections
    for k, (left, right) in enumerate(zip(sections[:-1], sections[1:], strict=True)):
        a, b = _surface(left), _surface(right)
        alike = (a.kind, a.material, a.r_inner, a.r_outer) == (b.kind, b.material, b.r_inner, b.r_outer)
        if not alike or left.surface_is_held == right.surface_is_held:
            continue
        i = int(np.searchsorted(grid.section, k + 1))
        j0, j1 = np.searchsorted(grid.rc, [a.r_inner, a.r_outer])
        ratio = _depth_ratio(case, a, t_in)
        reach = min(a.r_outer - a.r_inner, left.z1 - left.z0, right.z1 - right.z0) * REACH
        if a.kind == "stream":
            reach = min(reach, _conduction_reach(case, grid, a, t_in))
        if ratio is None or reach < RESOLVED * max(*grid.dz[i - 1 : i + 1], grid.r[j1] - grid.r[j1 - 1]):
            continue
        found = True
        side = 1.0 if right.surface_is_held else -1.0
        _multiply(along, across, grid, i, int(j0), int(j1), side, ratio, reach)
    return Edges(along, across) if found else None


def _surface(section: PlacedSection) -> PlacedLayer:
    """The outermost layer that conducts."""
    return [p for p in section.layers if p.kind != "void"][-1]


def _depth_ratio(case: Case, layer: PlacedLayer, t_in: float) -> float | None:
    """Multiplier of depths with which the layer conducts alike both ways; None if it does not along z."""
    if layer.kind == "stream":
        return 1.0 if case.physics.axial_conduction_in_streams else None
    solid = case.solid_of(layer.material)
    along, across = float(solid.conductivity_z(t_in)), float(solid.conductivity_r(t_in))
    return float(np.sqrt(along / across)) if along > 0.0 else None


def _conduction_reach(case: Case, grid: Grid, layer: PlacedLayer, t_in: float) -> float:
    """[m] depth within which conduction outweighs the flow: sqrt(diffusivity / shear rate)."""
    fluid = case.fluid_of(layer.material)
    density = float(fluid.density(t_in))
    diffusivity = float(fluid.conductivity(t_in)) / (density * float(fluid.specific_heat(t_in)))
    area = np.pi * (layer.r_outer**2 - layer.r_inner**2)
    shear_rate = 4.0 * boundary.mass_flow(case, grid.layout, layer.material) / (density * area * layer.r_outer)
    return float(np.sqrt(diffusivity / shear_rate)) if shear_rate > 0.0 else np.inf


def _multiply(
    along: Array,
    across: Array,
    grid: Grid,
    joint: int,
    j0: int,
    j1: int,
    side: float,
    ratio: float,
    reach: float,
) -> None:
    """Multiply the factors of one joint into both arrays, faces within `reach` only.

    joint : axial face of the joint        j0, j1 : cells of the layer
    side  : 1 if the prescribed temperature lies at larger z, else -1
    """
    s, sc = side * (grid.z - grid.z[joint]), side * (grid.zc - grid.z[joint])
    n, nc = ratio * (grid.r[j1] - grid.r), ratio * (grid.r[j1] - grid.rc)
    limit = ratio * reach
    for i in np.flatnonzero(np.abs(s) < limit):
        for j in range(j0, j1):
            if 0 < i < grid.nz and np.hypot(s[i], nc[j]) < limit:
                exact = _root(s[i], n[j + 1]).real - _root(s[i], n[j]).real
                slope = (_root(sc[i], nc[j]) - _root(sc[i - 1], nc[j])).imag / (sc[i] - sc[i - 1])
                along[i, j] *= exact / (slope * (n[j] - n[j + 1]))
    for i in np.flatnonzero(np.abs(sc) < limit):
        for j in range(j0, j1):
            # the outer face of cell j
            if np.hypot(sc[i], n[j + 1]) >= limit:
                continue
            if j + 1 < j1:
                slope = (_root(sc[i], nc[j]) - _root(sc[i], nc[j + 1])).imag / (nc[j] - nc[j + 1])
            elif sc[i] > 0.0:
                slope = _root(sc[i], nc[j]).imag / nc[j]
            else:
                continue  # nothing is conducted through the surface on this side
            exact = abs((_root(s[i + 1], n[j + 1]) - _root(s[i], n[j + 1])).real)
            across[i, j + 1] *= exact / (slope * grid.dz[i])


def _root(s: float, n: float) -> complex:
    return complex(np.sqrt(complex(s, n)))
