"""Velocity and pressure of one stream: three iterations agree, closed forms, mirrored streams, steps."""

from itertools import pairwise

import numpy as np
import pytest

from axicfd.kernels.momentum import Viscosity
from axicfd.mesh.spacing import graded_map
from axicfd.solver import developed
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.flow import Flow, flow_mesh, stream_mesh
from axicfd.solver.solve import solve_on
from tests.reference.plain_flow import PlainFlow
from tests.solver.tubes import grid_of, tube

RHO, U, R = 1000.0, 0.1, 5e-3


def uniform(mesh, mu):
    return Viscosity(
        *(np.full(s, mu) for s in ((mesh.nz, mesh.nr), (mesh.nz + 1, mesh.nr + 1), (mesh.nz, mesh.nr + 1)))
    )


def pipe(cells=8, stations=32, diameters=5.0, reynolds=50.0, stretch=4.0, shape="flat", consistent=True, mu=None):
    r = R * graded_map(stretch, False, True)(np.arange(cells + 1) / cells)
    z = 2.0 * R * diameters * graded_map(stretch**2, True, False)(np.arange(stations + 1) / stations)
    mesh = flow_mesh(z, r, np.ones((stations, cells)))
    u_in = np.full(cells, U)
    if shape == "developed":
        u_in = developed.velocity(mesh, RHO, RHO * U * np.pi * R**2)
    viscosity = uniform(mesh, RHO * U * 2.0 * R / reynolds)
    if mu is not None:
        viscosity = Viscosity(*(mu(a) for a in viscosity))
    return Flow(mesh, RHO, u_in, viscosity, consistent)


def iterate(flow, below=1e-12, limit=4000):
    for _ in range(limit):
        flow.step()
        if flow.residual() < below:
            return flow
    raise AssertionError(f"residual {flow.residual():.1e} after {limit} steps")


def cycle(flow, below=1e-12, limit=80):
    cycles = FlowCycle(flow)
    for n in range(limit):
        if flow.residual() < below:
            return n
        cycles.cycle()
    raise AssertionError(f"residual {flow.residual():.1e} after {limit} cycles")


def assert_same_fields(a, b, within=1e-9):
    for name in ("u", "v", "p"):
        x, y = getattr(a, name), getattr(b, name)
        scale = np.abs(a.u).max() if name != "p" else np.abs(a.p).max()
        assert np.abs(x - y).max() < within * scale, name


# ---------------------------------------------------------------------- agreement


@pytest.mark.parametrize("reynolds", [0.1, 50.0, 1000.0])
def test_three_iterations_have_one_solution(reynolds):
    """SIMPLEC, SIMPLE and the multigrid cycle solve the same equations."""
    first = iterate(pipe(reynolds=reynolds))
    second = iterate(pipe(reynolds=reynolds, consistent=False), limit=20000)
    third = pipe(reynolds=reynolds)
    cycle(third)
    assert_same_fields(first, second)
    assert_same_fields(first, third)


@pytest.mark.parametrize("reynolds", [0.1, 50.0, 1000.0])
def test_cycles_needed_hardly_grow_with_the_mesh(reynolds):
    needed = [cycle(pipe(n, 4 * n, reynolds=reynolds), below=1e-9) for n in (8, 16, 32)]
    assert max(needed) <= 40, needed


def test_a_solution_meets_the_slow_equations():
    rng = np.random.default_rng(1)
    flow = pipe(mu=lambda a: a * 10.0 ** rng.uniform(-0.5, 0.5, a.shape))
    iterate(flow)
    m = flow.mesh
    ru, rv, rc = PlainFlow(m.z, m.r, m.open_p, RHO, flow.u, flow.v, flow.p, *flow.viscosity).residuals()
    assert np.abs(ru).sum() < 1e-11 * flow.momentum_scale()
    assert np.abs(rv).sum() < 1e-11 * flow.momentum_scale()
    assert np.abs(rc).sum() < 1e-11 * flow.mass_flow


def test_mass_is_closed_to_round_off():
    flow = pipe()
    for _ in range(20):
        flow.step()
    flow.close_continuity()
    _, _, rc = flow.residuals()
    assert np.abs(rc).sum() < 1e-12 * flow.mass_flow
    assert flow.mz.sum(axis=1) == pytest.approx(flow.mass_flow, rel=1e-13)


# ---------------------------------------------------------------------- developed flow


@pytest.mark.parametrize("reynolds", [0.1, 50.0, 1000.0])
def test_a_developed_inlet_stays_developed(reynolds):
    """The 1-D profile of the same mesh solves the 2-D equations: no development, f Re = 64 (closed form)."""
    flow = iterate(pipe(24, 16, shape="developed", reynolds=reynolds))
    assert np.abs(flow.u - flow.u[0]).max() < 1e-9 * flow.u.max()
    assert np.abs(flow.v).max() < 1e-9 * U
    gradient = -(flow.p[1:, 0] - flow.p[:-1, 0]) / flow.mesh.dzu[1:-1]
    assert np.ptp(gradient) < 1e-8 * gradient.max()
    found = gradient.mean() * 2.0 * (2.0 * R) ** 2 / (RHO * U**2) / (2.0 * R) * reynolds
    assert found == pytest.approx(64.0, rel=5e-3)
    assert found == pytest.approx(developed.friction_reynolds(flow.mesh, flow.u[0]), rel=1e-8)


def test_friction_is_of_second_order():
    errors = []
    for cells in (8, 16, 32):
        flow = pipe(cells, 8, shape="developed")
        errors.append(abs(developed.friction_reynolds(flow.mesh, flow.u[0]) / 64.0 - 1.0))
    for a, b in pairwise(errors):
        assert 1.85 < np.log2(a / b) < 2.2


def test_a_flat_inlet_develops():
    """Behind the entry length 2 (1 - r^2/R^2), within the mesh error; mass and sign on the way."""
    flow = iterate(pipe(16, 48, diameters=8.0, reynolds=50.0))
    rc = 0.5 * (flow.mesh.r[1:] + flow.mesh.r[:-1])
    assert flow.u[-1] / U == pytest.approx(2.0 * (1.0 - (rc / R) ** 2), abs=0.02)
    assert (flow.v[:4, 1:-1] < 0.0).any()  # fluid moves to the axis
    assert (flow.wall_friction()[1:] > 0.0).all()


def test_momentum_of_the_whole_stream_balances():
    """Developed flow: the pressure over the inlet plane carries the friction of the wall, nothing else."""
    flow = iterate(pipe(8, 24, shape="developed", diameters=2.0))
    m = flow.mesh
    inlet_pressure = flow.p[0] + (flow.p[0] - flow.p[1]) * m.dzu[0] / m.dzu[1]
    push = (inlet_pressure * m.area).sum()
    friction = flow.wall_friction().sum()
    assert friction == pytest.approx(push, rel=1e-8)


# ---------------------------------------------------------------------- direction


def test_a_stream_along_minus_z_is_the_mirror_image():
    kinds = {}
    for direction in ("+z", "-z"):
        case = tube(
            outside='heat_flux = "2 kW/m^2"',
            layers='[[layer]]\nname = "tube"\nsolid = "copper"\nthickness = "1 mm"',
            viscosity='{ at = "20 degC", value = "10 mPa s", exponent = "0.02 1/K" }',
            direction=direction,
            heating=True,
            mesh="stretch_to_ends = 1",
        )
        kinds[direction] = solve_on(case, grid_of(case), stop_below=1e-10)
    one, other = kinds["+z"], kinds["-z"]
    assert one.converged and one.iterations == other.iterations
    a, b = one.streams["oil"], other.streams["oil"]
    assert np.abs(a.u + b.u[::-1]).max() < 1e-11 * np.abs(a.u).max()
    assert np.abs(a.v - b.v[::-1]).max() < 1e-11 * np.abs(a.u).max()
    assert np.abs(a.p - b.p[::-1]).max() < 1e-11 * np.abs(a.p).max()
    assert np.abs(one.heat.t - other.heat.t[::-1]).max() < 1e-11 * np.abs(one.heat.t).max()
    assert b.u.min() < 0.0 and b.mz.sum() < 0.0


def test_the_mesh_of_a_turned_stream_is_turned():
    grid = grid_of(tube(mesh="stretch_to_ends = 9"), 1)
    forward, turned = stream_mesh(grid, "oil", False), stream_mesh(grid, "oil", True)
    assert turned.dz == pytest.approx(forward.dz[::-1], rel=1e-12)
    assert turned.r == pytest.approx(forward.r)


# ---------------------------------------------------------------------- blocked cells


def expansion(cells=12, stations=48, reynolds=30.0):
    """A stream that widens from R/2 to R after an eighth of the length."""
    r = np.linspace(0.0, R, cells + 1)
    z = np.linspace(0.0, 8.0 * R, stations + 1)
    fluid = np.ones((stations, cells))
    fluid[: stations // 8, cells // 2 :] = 0.0
    mesh = flow_mesh(z, r, fluid)
    rc = 0.5 * (r[1:] + r[:-1])
    u_in = np.where(rc < R / 2, 2.0 * U * (1.0 - (2.0 * rc / R) ** 2), 0.0)
    return Flow(mesh, RHO, u_in, uniform(mesh, RHO * U * R / reynolds))


def test_a_sudden_expansion():
    """1:2 in diameter at Re 30 of the small tube: fluid runs back behind the step, then Poiseuille's flow."""
    flow = iterate(expansion(), below=1e-11, limit=8000)
    m = flow.mesh
    blocked_u, blocked_v = m.open_u[1:] == 0.0, m.open_v == 0.0
    assert not flow.u[1:][blocked_u].any() and not flow.v[blocked_v].any()
    behind = flow.u[7:12, -1]
    assert (behind < 0.0).all(), "no recirculation behind the step"
    assert (flow.u[-1] > 0.0).all()
    rc = 0.5 * (m.r[1:] + m.r[:-1])
    mean = flow.mass_flow / RHO / m.area.sum()
    assert flow.u[-1] / mean == pytest.approx(2.0 * (1.0 - (rc / R) ** 2), abs=0.06)
    ru, rv, rc_ = PlainFlow(m.z, m.r, m.open_p, RHO, flow.u, flow.v, flow.p, *flow.viscosity).residuals()
    assert np.abs(ru).sum() + np.abs(rv).sum() < 1e-10 * flow.momentum_scale()
    assert np.abs(rc_).sum() < 1e-10 * flow.mass_flow


# ---------------------------------------------------------------------- viscosity that varies


def test_viscous_liquid_at_a_hot_wall_costs_less_pressure():
    drops = []
    for outside in ("insulated = true", 'heat_flux = "20 kW/m^2"'):
        case = tube(
            outside=outside,
            viscosity='{ at = "20 degC", value = "1 Pa s", exponent = "0.05 1/K" }',
            flow='mass_flow = "2 g/s"',
        )
        solution = solve_on(case, grid_of(case))
        assert solution.converged
        drops.append(solution.streams["oil"].p[0].mean())
    assert 0.1 * drops[0] < drops[1] < 0.95 * drops[0]


def test_a_start_from_a_coarse_mesh_gives_the_same_answer():
    case = tube(
        outside='heat_flux = "2 kW/m^2"',
        viscosity='{ at = "20 degC", value = "0.1 Pa s", exponent = "0.03 1/K" }',
    )
    coarse = solve_on(case, grid_of(case, 1))
    cold, warm = (solve_on(case, grid_of(case), start, stop_below=1e-11) for start in (None, coarse))
    assert cold.converged and warm.converged
    assert warm.iterations <= cold.iterations
    for name in ("u", "p"):
        a, b = getattr(cold.streams["oil"], name), getattr(warm.streams["oil"], name)
        assert np.abs(a - b).max() < 1e-8 * np.abs(a).max()
    assert np.abs(cold.heat.t - warm.heat.t).max() < 1e-7 * cold.heat.t.max()
