"""The flow of one stream by five ways on one discretisation: multigrid, SIMPLEC, SIMPLE, Newton with a sparse LU.

All stop at the same normalised residual and start from the same fields, the developed profile carried everywhere.
"""

import time
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_matrix, csc_matrix
from scipy.sparse.linalg import splu

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.mesh.build import LEVELS, family
from axicfd.mesh.grid import Grid
from axicfd.mesh.nest import carry
from axicfd.solver import boundary, developed, properties
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.flow import Flow, stream_mesh

STOP_BELOW = 1e-8
ALONG, ACROSS = 5, 3  # an equation holds no unknown further away than half of these: two stations, one ring
STEP = 1e-7  # of the differences, as a share of the largest value of a field
NEWTON_STEPS = 30


@dataclass(frozen=True)
class Took:
    """What one solve took; wall and processor seconds without compilation."""

    seconds: float
    processor: float
    iterations: int
    residual: float


def new_flow(case: Case, grid: Grid, consistent: bool = True) -> Flow:
    """The flow of a case of one stream with constant viscosity, before any iteration."""
    (name,) = grid.streams
    j0, j1 = grid.streams[name]
    fluid, mesh = case.fluid_of(name), stream_mesh(grid, name, mirrored=False)
    t_in = case.stream[name].inlet_temperature
    density, mass_flow = float(fluid.density(t_in)), boundary.mass_flow(case, grid.layout, name)
    shape = developed.velocity(mesh, density, mass_flow)
    u_in = boundary.inlet_velocity(case, name, mass_flow, density, grid.rc[j0:j1], mesh.area, shape)
    cold = np.zeros((mesh.nz, mesh.nr))
    return Flow(
        mesh, density, u_in, properties.viscosity(fluid.viscosity, cold, None, None, mesh.gz, mesh.gr, t_in), consistent
    )


def timed(flow: Flow, iterate: Callable[[], object], cap: float, at_once: int = 1) -> Took:
    """Iterate until the residual is small, or for `cap` processor seconds; `at_once` iterations between two looks."""
    clock, processor, count = time.perf_counter(), time.process_time(), 0
    while True:
        for _ in range(at_once):
            iterate()
        count += at_once
        residual, spent = flow.residual(), time.process_time() - processor
        if not residual > STOP_BELOW or spent > cap:
            return Took(time.perf_counter() - clock, spent, count, residual)


def climb(case: Case) -> tuple[Took, Flow, list[int]]:
    """Multigrid from the coarsest of the nested meshes to the finest, each coarse one solved to 1e-5.

    Returns what all meshes took together with the iterations of the finest, its flow, and the cycles of every mesh.
    """
    grids = [family(case, layout(case)).grid(level) for level in range(LEVELS - 1, -1, -1)]
    clock, processor, counts = time.perf_counter(), time.process_time(), []
    old: Flow | None = None
    for grid in grids:
        flow = new_flow(case, grid)
        z, r = flow.mesh.z, flow.mesh.r
        zc, rc = 0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1])
        if old is not None:
            oz, orr = old.mesh.z, old.mesh.r
            ozc, orc = 0.5 * (oz[1:] + oz[:-1]), 0.5 * (orr[1:] + orr[:-1])
            flow.start_from(carry(old.u, oz, orc, z, rc), carry(old.v, ozc, orr, zc, r), carry(old.p, ozc, orc, zc, rc))
        cycle, count = FlowCycle(flow), 0
        while flow.residual() > (STOP_BELOW if grid is grids[-1] else 1e-5):
            cycle.cycle()
            count += 1
        counts.append(count)
        old = flow
    assert old is not None
    took = Took(time.perf_counter() - clock, time.process_time() - processor, counts[-1], old.residual())
    return took, old, counts


def multigrid(case: Case, grid: Grid, cap: float) -> Took:
    flow = new_flow(case, grid)
    clock, processor = time.perf_counter(), time.process_time()
    cycle = FlowCycle(flow)
    spent = time.perf_counter() - clock, time.process_time() - processor
    took = timed(flow, cycle.cycle, cap)
    return Took(took.seconds + spent[0], took.processor + spent[1], took.iterations, took.residual)


def simplec(case: Case, grid: Grid, cap: float) -> Took:
    flow = new_flow(case, grid)
    return timed(flow, flow.step, cap, at_once=5)


def simple(case: Case, grid: Grid, cap: float) -> Took:
    flow = new_flow(case, grid, consistent=False)
    return timed(flow, flow.step, cap, at_once=5)


def newton(case: Case, grid: Grid, cap: float) -> Took:
    """Newton's method on all unknowns at once, with a sparse LU of a Jacobian from coloured differences."""
    flow = new_flow(case, grid)
    fields = flow.u, flow.v, flow.p
    shapes = [f.shape for f in fields]
    sizes = np.cumsum([0, *(f.size for f in fields)])
    m = flow.mesh
    u_open, v_open = m.open_u.copy(), m.open_v.copy()
    u_open[0] = 0.0  # the inlet plane is given
    solved = np.concatenate([u_open.ravel(), v_open.ravel(), m.open_p.ravel()]) > 0.0
    unknown = np.flatnonzero(solved)

    def iterate() -> None:
        residual = np.concatenate([x.ravel().copy() for x in flow.residuals()])
        matrix = _jacobian(flow, shapes, sizes, [u_open, v_open, m.open_p])[unknown][:, unknown]
        change = np.zeros(len(solved))
        change[unknown] = splu(csc_matrix(matrix)).solve(-residual[unknown])
        for k, f in enumerate(fields):
            f += change[sizes[k] : sizes[k + 1]].reshape(shapes[k])
        flow.refresh_mass()

    return timed(flow, iterate, cap)


def _jacobian(flow: Flow, shapes, sizes, open_) -> csc_matrix:
    """Derivative of all residuals by all unknowns, rows and columns in the order u, v, p.

    Unknowns of one colour are ALONG stations and ACROSS rings apart, so that every equation sees one of them at most.
    """
    flow.refresh_mass()
    base = [x.copy() for x in flow.residuals()]
    rows, columns, values = [], [], []
    for k, f in enumerate((flow.u, flow.v, flow.p)):
        step = STEP * max(float(np.abs(f).max()), 1e-12)
        if k == 1:
            step = STEP * float(np.abs(flow.u).max())
        for a in range(ALONG):
            for b in range(ACROSS):
                kept = f.copy()
                here = np.zeros(f.shape)
                here[a::ALONG, b::ACROSS] = open_[k][a::ALONG, b::ACROSS]
                f += step * here
                flow.refresh_mass()
                for e, after in enumerate(flow.residuals()):
                    i, j = np.nonzero(after != base[e])
                    # the unknown of this colour within reach of equation (i, j)
                    ci = i + (a - i + ALONG // 2) % ALONG - ALONG // 2
                    cj = j + (b - j + ACROSS // 2) % ACROSS - ACROSS // 2
                    inside = (ci >= 0) & (ci < shapes[k][0]) & (cj >= 0) & (cj < shapes[k][1])
                    i, j, ci, cj = i[inside], j[inside], ci[inside], cj[inside]
                    rows.append(sizes[e] + i * shapes[e][1] + j)
                    columns.append(sizes[k] + ci * shapes[k][1] + cj)
                    values.append((after[i, j] - base[e][i, j]) / step)
                f[...] = kept
    flow.refresh_mass()
    row, column, value = (np.concatenate(x) for x in (rows, columns, values))
    return coo_matrix((value, (row, column)), shape=(sizes[-1], sizes[-1])).tocsc()
