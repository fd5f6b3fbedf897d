"""Work of the heat solver over conductivity ratio, wall thickness, shape of cells and Péclet number."""

import numpy as np

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.mesh.build import LEVELS, family
from axicfd.solver.solve import _Run, solve_on
from validation.robustness.cases import band, heated

FLUID = 0.14  # W/m/K, conductivity of the oil of `robustness.cases`
RADIUS = 5.0  # mm
RATIO, WALL, PECLET = 80.0, 0.2, 5000.0
DROP = 1e-8
FLOW_BELOW = 1e-6


def one(ratio: float = RATIO, wall: float = WALL, peclet: float = PECLET, along: float = 100.0) -> Case:
    """A tube of given ratio, wall [radii] and Péclet number; a band of `along` mm between lengths of as much."""
    prandtl = 100.0 if peclet >= 10.0 else 1.0
    return heated(
        band('heat = "1 W"', along, along), peclet / prandtl, prandtl, profile="developed", exponent=0.0,
        wall=ratio * FLUID, thickness=wall * RADIUS,
    ).replace({"mesh.at_most": 20_000})  # fmt: skip


def cases() -> dict[str, Case]:
    found = {f"conductivity ratio {r:g}": one(ratio=r) for r in (0.1, 1, 10, 100, 1e3, 1e4)}
    found |= {f"wall of {w:g} radii": one(wall=w) for w in (0.02, 0.1, 0.5, 2.0)}
    found |= {f"Péclet number {p:g}": one(peclet=p) for p in (0.1, 10, 1e3, 1e5)}
    # Re stays laminar up to Pe 1e5 at Pr 100; the rest by a more viscous oil
    found["Péclet number 1e+06"] = heated(
        band('heat = "1 W"'), 1000, 1000, profile="developed", exponent=0.0, wall=RATIO * FLUID, thickness=1.0
    ).replace({"mesh.at_most": 20_000})
    found |= {f"lengths of {a:g} mm": one(along=a) for a in (0.1, 1, 10, 1e3, 1e4)}
    found["ratio 1e4, wall of 2 radii, Péclet number 0.1"] = one(ratio=1e4, wall=2.0, peclet=0.1)
    found["ratio 1e4, wall of 0.02 radii, lengths of 10 m"] = one(ratio=1e4, wall=0.02, along=1e4)
    return found


def steps(case: Case) -> tuple[int, int, float, float]:
    """Steps of GMRES, cells, and the smallest and largest dz/dr of the cells."""
    meshes = family(case, layout(case))
    start = None
    for level in range(LEVELS - 1, 0, -1):
        start = solve_on(case, meshes.grid(level), start, 1e-5)
    grid = meshes.grid(0)
    run = _Run(case, grid, start, 1e-8, None)
    assert run.flow is not None and run.cycle is not None and run.energy.cycle is not None
    run.energy.t[...] = 0.0
    while run.flow.residual() > FLOW_BELOW:
        run.cycle.cycle()
    run._hand_over_flow()
    run.energy.error()
    run.energy._linearise()
    run.energy.cycle.solve(run.energy.residual().copy(), DROP)
    shapes = grid.dz[:, None] / np.diff(grid.r)[None, :]
    return run.energy.cycle.steps, grid.cells, float(shapes.min()), float(shapes.max())
