"""The coupled sweep: a solved flow is its fixed point, it keeps every section's flow, and few cycles of it solve
any tube.
"""

import numpy as np
import pytest

from axicfd.kernels.momentum import Viscosity
from axicfd.solver import solve as solve_module
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.flow import Flow, flow_mesh
from axicfd.solver.solve import solve_on
from tests.solver.tubes import grid_of, tube


def flow(reynolds, length, nz=64, nr=16, fluid=None):
    """Flat inlet into a tube of diameter 1; mean velocity 1."""
    stretch = np.linspace(0.0, 1.0, nz + 1)
    r = 0.5 * np.tanh(1.3 * np.linspace(0.0, 1.0, nr + 1)) / np.tanh(1.3)
    r[-1] = 0.5
    mesh = flow_mesh(length * stretch**1.5, r, np.ones((nz, nr)) if fluid is None else fluid)
    shapes = (nz, nr), (nz + 1, nr + 1), (nz, nr + 1)
    return Flow(mesh, 1.0, np.ones(nr), Viscosity(*(np.full(s, 1.0 / reynolds) for s in shapes)))


@pytest.mark.parametrize("reynolds", [1.0, 30.0, 500.0, 2000.0])
@pytest.mark.parametrize("length", [5.0, 50.0, 1000.0])
def test_few_cycles_for_any_tube(reynolds, length):
    f = flow(reynolds, length)
    cycle = FlowCycle(f)
    cycles = 0
    while f.residual() > 1e-8:
        cycle.cycle()
        cycles += 1
        assert cycles <= 14


def test_a_solved_flow_stays():
    f = flow(100.0, 20.0)
    cycle = FlowCycle(f)
    for _ in range(25):
        cycle.cycle()
    assert f.residual() < 1e-13
    u, v, p = f.u.copy(), f.v.copy(), f.p.copy()
    f.smooth()
    assert np.abs(f.u - u).max() < 1e-11
    assert np.abs(f.v - v).max() < 1e-11
    assert np.abs(f.p - p).max() < 1e-11 * np.abs(p).max()


def test_every_section_carries_the_inlet_flow_after_one_sweep():
    f = flow(100.0, 20.0)
    f.u[1:] *= 1.0 + 0.3 * np.random.default_rng(1).random(f.u[1:].shape)
    f.refresh_mass()
    for _ in range(12):  # damping takes in 0.7 of each
        f.smooth()
    assert f.mz.sum(axis=1) == pytest.approx(np.full(65, f.mass_flow), rel=1e-5)


def test_where_the_cycle_fails_the_plain_iteration_solves_it(monkeypatch):
    case = tube(flow="reynolds = 40", profile="flat", radial=8, axial=32)
    sure = solve_on(case, grid_of(case))
    spoiled = FlowCycle.cycle

    def spoil(self):
        spoiled(self)
        self.flows[0].u[1:] *= 1.01  # a smoother that never settles

    monkeypatch.setattr(solve_module.FlowCycle, "cycle", spoil)
    monkeypatch.setattr("axicfd.solver.convergence.PATIENCE", 5)
    again = solve_on(case, grid_of(case))
    assert again.converged
    (a,), (b,) = sure.streams.values(), again.streams.values()
    assert np.abs(a.u - b.u).max() < 1e-6 * a.u.max()
    assert np.abs(a.p - b.p).max() < 1e-6 * a.p.max()
