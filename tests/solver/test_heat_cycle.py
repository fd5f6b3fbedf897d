"""The heat cycle against the sparse LU on the same system, its work, and what happens where it fails."""

import numpy as np
import pytest

from axicfd.solver import energy as energy_module
from axicfd.solver.solve import _Run, solve_on
from tests.solver.tubes import grid_of, tube

STEPS = (
    '[[section]]\nname="a"\nlength="{a}"\noutside={{insulated=true}}\n'
    '[[section]]\nname="b"\nlength="{b}"\noutside={{{outside}}}'
)
WALL = '[solid.metal]\nconductivity = "{k} W/m/K"\n'


def wall(thickness, extra=""):
    return f'[[layer]]\nsolid = "metal"\nthickness = "{thickness}"\n{extra}'


def heated(k, thickness, a="30 mm", b="30 mm", flow="reynolds = 50", outside='heat_flux = "1 kW/m^2"', **more):
    more = {"radial": 16, "axial": 64} | more
    return tube(
        flow=flow,
        layers=wall(thickness),
        sections=STEPS.format(a=a, b=b, outside=outside),
        tail=WALL.format(k=k),
        **more,
    )


def linear_system(case, level=0):
    """The energy equation of a case after its flow is solved, linearised at T = T_in."""
    run = _Run(case, grid_of(case, level), None, 1e-8, None)
    while run.flow is not None and run.flow.residual() > 1e-9:
        run.cycle.cycle()
    run._hand_over_flow()
    run.energy.error()
    run.energy._linearise()
    return run.energy


# conductivity ratio wall / fluid (0.2 W/m/K), wall in radii (5 mm), cells, Peclet = 100 Re
CASES = {
    "plastic": heated(0.02, "1 mm"),
    "steel": heated(15.0, "0.5 mm"),
    "copper": heated(200.0, "1 mm"),
    "ratio 1e4": heated(2000.0, "2 mm"),
    "thin wall, 0.02 radii": heated(200.0, "0.1 mm"),
    "thick wall, two radii": heated(200.0, "10 mm"),
    "short tube: cells thin along z": heated(200.0, "5 mm", a="1 mm", b="1 mm"),
    "long tube: cells long along z": heated(15.0, "1 mm", a="5 m", b="5 m"),
    "Peclet 0.1": heated(200.0, "1 mm", flow="reynolds = 0.001"),
    "Peclet 1e6": heated(15.0, "1 mm", flow="reynolds = 1000", specific_heat='"20 kJ/kg/K"'),
    "film": heated(200.0, "1 mm", outside='film_coefficient = "500 W/m^2/K", ambient = "80 degC"'),
    "along -z": heated(15.0, "1 mm", direction="-z"),
    "at rest": heated(
        15.0, "1 mm", flow="reynolds = 0", outside='film_coefficient = "50 W/m^2/K", ambient = "80 degC"'
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_the_same_answer_as_the_sparse_lu_in_few_steps(name):
    e = linear_system(CASES[name])
    exact = energy_module.factorised(e._links).solve(e._r.ravel()).reshape(e.grid.shape)
    found = e.cycle.solve(e._r, 1e-9)
    assert np.abs(found - exact).max() < 1e-6 * np.abs(exact).max()
    e.cycle.solve(e._r, 1e-8)
    assert e.cycle.steps <= 22


def test_the_work_does_not_grow_with_the_mesh():
    case = heated(200.0, "1 mm")
    steps = []
    for level in (1, 0, -1):
        e = linear_system(case, level)
        e.cycle.solve(e._r, 1e-8)
        steps.append(e.cycle.steps)
    assert max(steps) - min(steps) <= 4


def test_nothing_to_correct_gives_no_correction():
    e = linear_system(CASES["steel"])
    assert (e.cycle.solve(np.zeros(e.grid.shape)) == 0.0).all()


def test_a_cycle_that_fails_hands_over_to_the_sparse_lu(monkeypatch):
    case = CASES["copper"]
    sure = solve_on(case, grid_of(case))
    monkeypatch.setattr("axicfd.solver.heat_cycle.HeatCycle.solve", lambda *_: None)
    again = solve_on(case, grid_of(case))
    assert again.converged
    assert np.abs(again.heat.t - sure.heat.t).max() < 1e-7 * sure.heat.t.max()


def test_a_void_inside_the_wall_stays_out_of_it():
    stack = (
        '[[layer]]\nvoid = true\nthickness = "1 mm"\n[[layer]]\nname = "jacket"\nsolid = "metal"\nthickness = "1 mm"\n'
    )
    case = tube(
        layers=wall("1 mm") + stack,
        sections=STEPS.format(a="30 mm", b="30 mm", outside='film_coefficient = "50 W/m^2/K", ambient = "80 degC"'),
        tail=WALL.format(k=15.0),
        radial=16,
        axial=64,
    )
    e = linear_system(case)
    exact = energy_module.factorised(e._links).solve(e._r.ravel()).reshape(e.grid.shape)
    assert np.abs(e.cycle.solve(e._r, 1e-9) - exact).max() < 1e-6 * np.abs(exact).max()
