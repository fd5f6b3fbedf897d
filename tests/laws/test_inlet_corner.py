"""Viscous heat behind a flat inlet: what sticks in the corner of inlet and wall has no limit and is not counted.

The field at the corner is the creeping flow of a quarter plane: the fluid enters through one edge at U and sticks to
the other; its stream function is s f(angle), the angle counted from the wall. With f = B sin - B a cos + D a sin,
f(pi/2) = U and f'(pi/2) = 0: B = -U / (pi^2/4 - 1), D = -B pi/2, and the dissipation per volume is
mu (f + f'')^2 / s^2. Independent computation, not published.
"""

import numpy as np
import pytest

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.kernels import momentum
from axicfd.mesh.build import family
from axicfd.results.axial import stream_views
from axicfd.results.summary import summary
from axicfd.solver.flow import stream_mesh
from axicfd.solver.solve import solve_on
from axicfd.solver.state import Solution
from tests.laws import tubes

MU, U, R = 10.0, 0.1, 1e-3
OIL = 'density = "1000 kg/m^3"\nspecific_heat = "1000 J/kg/K"\nconductivity = "1 W/m/K"\nviscosity = "10 Pa s"\n'
BARE = '[[layer]]\nstream = "water"\ndiameter = "2 mm"\n'
LEVELS = 3, 2, 1, 0, -1


def case(profile: str = "flat"):
    section = '[[section]]\nname = "all"\nlength = "10 mm"\noutside = { insulated = true }\n'
    flow = f'mean_velocity = "0.1 m/s"\ninlet_profile = "{profile}"'
    return load(tubes.text(flow, f"\n{OIL}", BARE, section, rest="[mesh]\nat_most = 20000", viscous=True))


@pytest.fixture(scope="module")
def climbed() -> list[tuple[Solution, dict]]:
    """(solution, headline tree) on meshes that halve their cells."""
    flat, found, solution = case(), [], None
    place = layout(flat)
    meshes = family(flat, place)
    for level in LEVELS:
        solution = solve_on(flat, meshes.grid(level), solution, 1e-10)
        found.append((solution, summary(flat, place, solution, stream_views(flat, solution))))
    return found


def set_free(solution: Solution) -> np.ndarray:
    """(nz, nr) [W] all of the viscous heat of the velocities of a solution."""
    f, grid = solution.streams["water"], solution.grid
    mesh, (nz, nr) = stream_mesh(grid, "water", mirrored=False), grid.shape
    viscosity = momentum.Viscosity(np.full((nz, nr), MU), np.full((nz + 1, nr + 1), MU), np.full((nz, nr + 1), MU))
    phi = np.zeros((nz, nr))
    momentum.dissipation(mesh, viscosity, f.u, f.v, phi)
    return phi


@pytest.mark.parametrize("quantity", ["heat_gain_W", "outlet_temperature_K", "hottest_wetted_wall_K"])
def test_quantities_behind_a_flat_inlet_have_a_limit_of_second_order(climbed, quantity):
    values = [tree["stream"]["water"][quantity] for _, tree in climbed]
    changes = np.diff(values)
    ratios = changes[:-1] / changes[1:]
    assert np.all((ratios[-2:] > 3.2) & (ratios[-2:] < 5.0)), (values, ratios)


def test_what_is_left_out_grows_with_every_halving_as_the_corner_does(climbed):
    b = -1.0 / (np.pi**2 / 4 - 1.0)
    d = -b * np.pi / 2
    angle = np.linspace(0.0, np.pi / 2, 2001)
    rate = np.trapezoid((2.0 * b * np.sin(angle) + 2.0 * d * np.cos(angle)) ** 2, angle)
    per_halving = 2 * np.pi * R * rate * np.log(2.0) * MU * U**2
    left_out = [set_free(s).sum() - s.heat.viscous.sum() for s, _ in climbed]
    assert per_halving == pytest.approx(9.33 * MU * U**2 * R, rel=1e-3)
    assert np.diff(left_out)[-1] == pytest.approx(per_halving, rel=0.04)


def test_the_balance_closes_with_what_is_counted(climbed):
    solution, tree = climbed[-1]
    assert solution.heat.viscous.sum() < 0.95 * set_free(solution).sum()
    assert tree["ledger"]["viscous"] == pytest.approx(tree["stream"]["water"]["heat_gain_W"], rel=1e-8)
    assert tree["balance"]["energy"] < 1e-9


def test_a_developed_inlet_counts_all():
    developed = case("developed")
    solution = solve_on(developed, family(developed, layout(developed)).grid(1), None, 1e-10)
    np.testing.assert_array_equal(solution.heat.viscous, set_free(solution))
