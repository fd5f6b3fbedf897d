"""The coarse meshes of a multigrid cycle."""

import numpy as np
import pytest

from axicfd.kernels.momentum import Viscosity
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.flow import Flow, flow_mesh


def flow(nz=24, nr=8, seed=None):
    mesh = flow_mesh(np.linspace(0.0, 0.1, nz + 1), np.linspace(0.0, 5e-3, nr + 1), np.ones((nz, nr)))
    shapes = (nz, nr), (nz + 1, nr + 1), (nz, nr + 1)
    rng = np.random.default_rng(seed)
    mu = [np.full(s, 0.02) if seed is None else 0.01 + 0.02 * rng.random(s) for s in shapes]
    return Flow(mesh, 1000.0, np.full(nr, 0.1), Viscosity(*mu))


def test_coarse_meshes_are_nested_and_carry_the_same_flow():
    cycle = FlowCycle(flow())
    assert len(cycle.flows) > 2
    for fine, coarse in zip(cycle.flows[:-1], cycle.flows[1:], strict=True):
        assert coarse.mesh.nz == (fine.mesh.nz + 1) // 2
        assert set(coarse.mesh.z) <= set(fine.mesh.z)
        assert set(coarse.mesh.r) <= set(fine.mesh.r)
        assert coarse.mass_flow == pytest.approx(fine.mass_flow, rel=1e-12)


def test_coarse_viscosities_are_means_and_shared_values():
    cycle = FlowCycle(flow(seed=1))
    fine, coarse = cycle.flows[0].viscosity, cycle.flows[1].viscosity
    pair = cycle.links[0].pair_r
    assert coarse.cell.mean() == pytest.approx(fine.cell.mean(), rel=1e-12)
    assert (coarse.corner == fine.corner[::2, ::pair]).all()
    assert coarse.radial_face[0] == pytest.approx(fine.radial_face[:2, ::pair].mean(axis=0))
    cycle.flows[0].viscosity = Viscosity(*(2.0 * a for a in fine))
    cycle.refresh_viscosity()
    assert cycle.flows[-1].viscosity.cell.mean() == pytest.approx(2.0 * fine.cell.mean(), rel=1e-9)


def test_a_solved_flow_is_left_alone():
    """What solves the fine equations is a fixed point of the whole cycle."""
    f = flow()
    cycle = FlowCycle(f)
    for _ in range(60):
        cycle.cycle()
    u, p = f.u.copy(), f.p.copy()
    assert f.residual() < 1e-12
    cycle.cycle()
    assert np.abs(f.u - u).max() < 1e-11 * u.max()
    assert np.abs(f.p - p).max() < 1e-11 * p.max()
