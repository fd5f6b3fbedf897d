"""The outer loop: what a solution holds, how it says why it stopped, and that switches act."""

import numpy as np
import pytest

from axicfd.solver.solve import solve_on
from tests.solver.tubes import grid_of, tube

COPPER = '[[layer]]\nname = "tube"\nsolid = "copper"\nthickness = "1 mm"'
THINNING = '{ at = "20 degC", value = "1 Pa s", exponent = "0.05 1/K" }'


def test_a_solution_holds_the_shapes_it_promises():
    case = tube(layers=COPPER, outside='heat = "5 W"')
    solution = solve_on(case, grid_of(case))
    nz, nr = solution.grid.shape
    j0, j1 = solution.grid.streams["oil"]
    stream, heat = solution.streams["oil"], solution.heat
    assert stream.u.shape == stream.mz.shape == (nz + 1, j1 - j0)
    assert stream.v.shape == stream.mr.shape == (nz, j1 - j0 + 1)
    assert stream.p.shape == (nz, j1 - j0)
    assert heat.t.shape == (nz, nr) and heat.tz.shape == (nz + 1, nr)
    assert heat.minus.shape == heat.plus.shape == heat.qr.shape == (nz, nr + 1)
    assert all(np.isfinite(a).all() for a in (stream.u, stream.v, stream.p, heat.t, heat.qz, heat.qr))
    assert solution.converged and solution.residual < case.solve.stop_below
    assert solution.history[-1][0] == solution.iterations
    assert solution.seconds > 0.0


def test_a_goal_below_round_off_is_a_stop_reason_not_an_error():
    case = tube()
    solution = solve_on(case, grid_of(case, 1), stop_below=1e-30)
    assert solution.stop_reason == "no further progress"
    assert not solution.converged
    assert np.isfinite(solution.streams["oil"].u).all()


def test_progress_is_told():
    seen = []
    case = tube(viscosity=THINNING, outside='heat = "5 W"')
    solution = solve_on(case, grid_of(case, 1), on_check=lambda *what: seen.append(what))
    assert len(seen) >= 2
    assert seen[-1][1] == pytest.approx(solution.residual)
    iterations = [n for n, _ in seen]
    assert iterations == sorted(iterations)


def test_stop_below_of_the_case_is_used():
    case = tube(tail="[solve]\nstop_below = 1e-3")
    assert 1e-6 < solve_on(case, grid_of(case)).residual < 1e-3


def test_no_flow_has_no_stream_fields():
    """A tube at rest in a bath exchanges nothing; it used to count as not converged: no heat to compare with."""
    case = tube(flow='mass_flow = "0 g/s"', layers=COPPER, outside='temperature = "40 degC"')
    solution = solve_on(case, grid_of(case))
    assert solution.converged and solution.streams == {}
    assert solution.heat.t == pytest.approx(20.0, abs=1e-6)


def test_viscous_heating_acts_and_can_be_switched_off():
    warm = []
    for heating in (True, False):
        case = tube(flow='mean_velocity = "1 m/s"', viscosity='"0.5 Pa s"', heating=heating)
        solution = solve_on(case, grid_of(case))
        warm.append(solution.heat.t.max())
        assert bool(solution.heat.viscous.sum() > 0.0) is heating
    assert warm[0] > 0.1 and abs(warm[1]) < 1e-9


def test_the_conductivity_of_temperature_acts():
    """And a property law is evaluated at absolute temperatures: the same law shifted gives another answer."""
    hottest = []
    for values in ('["0.2 W/m/K", "0.2 W/m/K"]', '["0.2 W/m/K", "0.6 W/m/K"]'):
        law = f'{{ temperature = ["20 degC", "100 degC"], value = {values} }}'
        case = tube(conductivity=law, outside='heat_flux = "10 kW/m^2"')
        solution = solve_on(case, grid_of(case))
        assert solution.converged
        hottest.append(solution.heat.minus[:, -1].max())
    assert hottest[1] < 0.9 * hottest[0]


def test_a_thin_liquid_after_a_thick_one():
    """Viscosity a hundred times lower at the wall than at the inlet: flow and heat settle together."""
    case = tube(viscosity=THINNING, outside='temperature = "110 degC"', flow='mass_flow = "5 g/s"', radial=16)
    solution = solve_on(case, grid_of(case))
    assert solution.converged, solution.stop_reason
    wall = solution.streams["oil"].viscosity_wall
    assert wall[16:] == pytest.approx(np.exp(-0.05 * 90.0), rel=1e-3)
    t = solution.heat.t
    assert t.min() > -1e-4 * 90.0 and t.max() < 90.0 * (1.0 + 1e-4)


def test_a_diverged_solve_leaves_finite_fields(monkeypatch):
    """It used to leave what the iteration had blown up to."""
    case = tube(viscosity=THINNING, outside='heat = "5 W"')

    def blow_up(run):
        run.flow.u[...] = np.nan
        run.energy.t[...] = 1e300
        return "diverged"

    monkeypatch.setattr("axicfd.solver.solve._Run._attempt", blow_up)
    solution = solve_on(case, grid_of(case, 1))
    assert solution.stop_reason == "diverged" and not solution.converged
    stream, heat = solution.streams["oil"], solution.heat
    for array in (stream.u, stream.v, stream.p, stream.mz, heat.t, heat.tz, heat.qz, heat.outside, heat.viscous):
        assert np.isfinite(array).all()
