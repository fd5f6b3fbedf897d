"""Joints of a prescribed temperature with a surface without one: second order all the same."""

import numpy as np
import pytest

from axicfd.case.layout import layout
from axicfd.mesh.build import family
from axicfd.solver.edges import edge_factors
from axicfd.solver.solve import solve_on
from tests.solver.tubes import grid_of, tube

T_IN = 293.15
JOINT = """\
[[section]]
name = "before"
length = "20 mm"
outside = { insulated = true }
[[section]]
name = "held"
length = "20 mm"
outside = { temperature = "50 degC"%s }
"""
WALL = '[[layer]]\nname = "wall"\nsolid = "stainless steel 316"\nthickness = "2 mm"\n'


MESH = "stretch_to_walls = 4\nstretch_to_ends = 40"


def joint(between: str = "", sections: str = JOINT, **changes):
    case = {
        "flow": "reynolds = 0.2",
        "radial": 16,
        "axial": 96,
        "profile": "developed",
        "mesh": MESH,
    } | changes
    return tube(sections=sections % between, **case)


def factors(case):
    return edge_factors(case, grid_of(case), T_IN)


@pytest.mark.parametrize("layers", ["", WALL])
def test_heat_of_the_section_converges_at_second_order(layers):
    """Without the factors the changes fall by about two from mesh to mesh."""
    case = joint(layers=layers)
    place = layout(case)
    meshes, solution, bulk = family(case, place), None, []
    for level in (2, 1, 0, -1):
        solution = solve_on(case, meshes.grid(level), solution, 1e-9)
        # what the stream has taken up 5 mm behind the joint
        bulk.append(np.interp(0.025, solution.grid.z, solution.heat.hz.sum(axis=1)))
    change = np.abs(np.diff(bulk))
    assert change[0] / change[1] > 3.0
    assert change[1] / change[2] > 3.0


def test_factors_are_exact_for_the_square_root_field():
    """Sum of factor x difference quotient over the held surface is the exact heat C sqrt(d)."""
    case = joint()
    grid, f = grid_of(case), factors(case)
    i = int(np.argmin(np.abs(grid.z - 0.02)))
    s, n = grid.zc - 0.02, grid.r[-1] - grid.rc[-1]
    for k in range(i, i + 3):
        quotient = np.sqrt(complex(s[k], n)).imag / n * grid.dz[k]
        exact = np.sqrt(grid.z[k + 1] - 0.02) - np.sqrt(max(grid.z[k] - 0.02, 0.0))
        assert f.r[k, -1] * quotient == pytest.approx(exact, rel=1e-12)


def test_factors_are_positive_and_tend_to_one():
    f = factors(joint())
    assert f.z.min() > 0.5 and f.r.min() > 0.5
    away = np.abs(f.r - 1.0) < 0.05
    assert away.mean() > 0.9
    assert np.all(f.z[0] == 1.0) and np.all(f.z[-1] == 1.0)


def test_mirrored_sections_give_mirrored_factors():
    turned = JOINT.replace("insulated = true", "X").replace('temperature = "50 degC"%s', "insulated = true")
    turned = turned.replace("X", 'temperature = "50 degC"%s')
    one, other = joint(), joint(sections=turned, direction="-z")
    a, b = factors(one), factors(other)
    assert np.allclose(a.r, b.r[::-1]) and np.allclose(a.z, b.z[::-1])


def test_nothing_changes_where_the_field_is_not_singular():
    assert factors(joint(', contact_resistance = "1e-4 m^2 K/W"')) is None
    slow = '[solid.slow]\nconductivity = { r = "1 W/m/K", z = "0 W/m/K" }'
    assert factors(joint(layers=WALL.replace("stainless steel 316", "slow"), tail=slow)) is None
    both = JOINT.replace("insulated = true", 'heat = "1 W"').replace('temperature = "50 degC"%s', 'heat = "2 W"')
    assert factors(tube(sections=both)) is None


def test_nothing_changes_where_the_flow_leaves_no_room_for_the_square_root():
    """At high Peclet number the boundary layer is thinner than the cells beside the joint."""
    assert factors(joint(flow="reynolds = 500")) is None
