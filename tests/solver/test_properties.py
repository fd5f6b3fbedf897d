"""Property arrays: conductivities between nodes and at faces, viscosities where stresses live."""

import numpy as np
import pytest

from axicfd.case.read import load
from axicfd.materials.laws import Constant, Exponential
from axicfd.pipeline import solve
from axicfd.solver import boundary, properties
from axicfd.solver.flow import stream_mesh
from axicfd.theory.duct_heat import wall_H
from tests.solver.tubes import grid_of, tube

T_IN = 293.15
WALLS = """\
[[layer]]
name = "tube"
solid = "varying"
thickness = "1 mm"
[[layer]]
name = "cover"
solid = "plain"
thickness = "2 mm"
contact_resistance = "1e-3 m^2 K/W"
"""
SOLIDS = """\
[solid.varying]
conductivity = { temperature = ["0 degC", "100 degC"], value = ["1 W/m/K", "3 W/m/K"] }
outside_range = "extend"
[solid.plain]
conductivity = { r = "0.5 W/m/K", z = "4 W/m/K" }
"""


def conductors(case, t):
    grid = grid_of(case, 1)
    exchange = boundary.outside(case, grid, T_IN)
    found = properties.Conductors(case, grid, T_IN, boundary.generation(grid))
    return grid, found, found.conduction(t(grid), exchange)


def varying_k(t):
    """1 W/(m K) at 0 degC, 3 at 100; t from the inlet temperature of 20 degC."""
    return 1.0 + 0.02 * (t + 20.0)


def test_conductance_between_nodes_of_one_solid():
    case = tube(layers=WALLS, tail=SOLIDS, outside='heat_flux = "1 kW/m^2"')
    rng = np.random.default_rng(1)
    values = {}

    def temperatures(grid):
        values["t"] = rng.uniform(0.0, 60.0, grid.shape)
        return values["t"]

    grid, _, c = conductors(case, temperatures)
    t = values["t"]
    tube_ = next(p for p in grid.pieces if p.layer.name == "tube")
    j = tube_.j0 + 1
    k = varying_k(0.5 * (t[:, j] + t[:, j + 1]))
    # nodes j, j + 1: ln(r_2/r_1) / (2 pi k dz), k at the mean temperature
    expected = 2 * np.pi * grid.dz * k / np.log(grid.rc[j + 1] / grid.rc[j])
    assert c.gr[:, j + 1] == pytest.approx(expected, rel=1e-12)
    k = varying_k(0.5 * (t[:-1, j] + t[1:, j]))
    expected = k * grid.area_z[j] / np.diff(grid.zc)
    assert c.gz[1:-1, j] == pytest.approx(expected, rel=1e-12)
    assert not c.gz[[0, -1]].any() and not c.gr[:, [0, -1]].any()


def test_conductance_across_and_along_a_directed_solid():
    case = tube(layers=WALLS, tail=SOLIDS, outside='heat_flux = "1 kW/m^2"')
    grid, _, c = conductors(case, lambda grid: np.zeros(grid.shape))
    cover = next(p for p in grid.pieces if p.layer.name == "cover")
    j = cover.j0 + 1
    assert c.gr[:, j + 1] == pytest.approx(2 * np.pi * grid.dz * 0.5 / np.log(grid.rc[j + 1] / grid.rc[j]))
    assert c.gz[1:-1, j] == pytest.approx(4.0 * grid.area_z[j] / np.diff(grid.zc), rel=1e-12)


def test_conductance_through_a_contact():
    case = tube(layers=WALLS, tail=SOLIDS, outside='heat_flux = "1 kW/m^2"')
    grid, _, c = conductors(case, lambda grid: np.zeros(grid.shape))
    f = next(p for p in grid.pieces if p.layer.name == "cover").j0
    r = grid.r[f]
    per_length = np.log(r / grid.rc[f - 1]) / varying_k(0.0) + 1e-3 / r + np.log(grid.rc[f] / r) / 0.5
    assert c.gr[:, f] == pytest.approx(2 * np.pi * grid.dz / per_length, rel=1e-12)


def test_faces_close_the_flux_through_a_contact():
    """The two sides of a contact differ by flux times resistance."""
    case = tube(layers=WALLS, tail=SOLIDS, outside='heat_flux = "1 kW/m^2"')

    def falling(grid):
        return np.broadcast_to(np.linspace(50.0, 0.0, grid.nr), grid.shape).copy()

    grid, found, c = conductors(case, falling)
    f = next(p for p in grid.pieces if p.layer.name == "cover").j0
    heat = c.gr[:, f] * (falling(grid)[:, f - 1] - falling(grid)[:, f])
    jump = found.face_minus[:, f] - found.face_plus[:, f]
    assert jump == pytest.approx(heat * 1e-3 / grid.area_r[:, f], rel=1e-10)
    inside = next(p for p in grid.pieces if p.layer.name == "tube").j0
    assert found.face_minus[:, inside] == pytest.approx(found.face_plus[:, inside], rel=1e-10)


def test_the_surface_lies_half_a_cell_of_flux_above_the_node():
    case = tube(layers=WALLS, tail=SOLIDS, outside='heat_flux = "1 kW/m^2"')
    grid, found, _ = conductors(case, lambda grid: np.zeros(grid.shape))
    # q r_o ln(r_o/r_P) / k
    rise = 1000.0 * grid.r[-1] * np.log(grid.r[-1] / grid.rc[-1]) / 0.5
    assert found.face_minus[:, -1] == pytest.approx(rise, rel=1e-10)


def test_nothing_conducts_across_the_axis_or_a_void():
    layers = '[[layer]]\nvoid = true\nname = "gap"\nthickness = "1 mm"\n' + WALLS
    case = tube(layers=layers, tail=SOLIDS, outside='film_coefficient = "5 W/m^2/K", ambient = "20 degC"')
    grid, _, c = conductors(case, lambda grid: np.zeros(grid.shape))
    gap = next(p for p in grid.pieces if p.layer.kind == "void")
    assert not c.gr[:, [0, gap.j0, gap.j1]].any()
    assert not c.gz[:, gap.j0].any()
    assert np.isinf(c.half_in[:, 0]).all()


def test_viscosity_is_taken_where_stresses_live():
    law = Exponential(T_IN, 0.5, 0.03)

    def mu(t):
        return 0.5 * np.exp(-0.03 * np.asarray(t))

    grid = grid_of(tube(), 1)
    mesh = stream_mesh(grid, "oil", False)
    rng = np.random.default_rng(2)
    t, wall = rng.uniform(0.0, 50.0, (mesh.nz, mesh.nr)), rng.uniform(40.0, 60.0, mesh.nz)
    found = properties.viscosity(law, t, wall, None, mesh.gz, mesh.gr, T_IN)
    assert found.cell == pytest.approx(mu(t), rel=1e-12)
    # walls at the wall's temperature, the axis at that of the first ring
    assert found.radial_face[:, -1] == pytest.approx(mu(wall), rel=1e-12)
    assert found.radial_face[:, 0] == pytest.approx(mu(t[:, 0]), rel=1e-12)
    at = np.array([np.interp(mesh.r[1:-1], grid.rc, row) for row in t])
    assert found.radial_face[:, 1:-1] == pytest.approx(mu(at), rel=1e-12)
    corners = np.array([np.interp(grid.z[1:-1], grid.zc, column) for column in at.T]).T
    assert found.corner[1:-1, 1:-1] == pytest.approx(mu(corners), rel=1e-12)
    assert found.corner[[0, -1]] == pytest.approx(found.radial_face[[0, -1]])


def test_a_constant_viscosity_is_the_same_everywhere():
    mesh = stream_mesh(grid_of(tube(), 2), "oil", False)
    found = properties.viscosity(Constant(0.01), np.zeros((mesh.nz, mesh.nr)), None, None, mesh.gz, mesh.gr, T_IN)
    for array in found:
        assert (np.asarray(array) == 0.01).all()
    assert found.corner.shape == (mesh.nz + 1, mesh.nr + 1)


def test_without_axial_conduction_in_streams_low_peclet_numbers_give_the_graetz_series():
    """The series has none of it: at Pe = 5 the wall of a stream that has it is colder near the start of the heat."""
    text = """
[stream.liquid]
fluid = "liquid"
inlet_temperature = "20 degC"
mean_velocity = "2.5 mm/s"
inlet_profile = "developed"
[fluid.liquid]
density = "1000 kg/m^3"
specific_heat = "1000 J/kg/K"
conductivity = "1 W/m/K"
viscosity = "50 mPa s"
[[layer]]
stream = "liquid"
diameter = "2 mm"
[[section]]
name = "heated"
length = "10 mm"
outside = { heat_flux = "1 kW/m^2" }
[mesh]
at_most = 8000
[physics]
viscous_heating = false
axial_conduction_in_streams = false
"""
    case = load(text)
    unit = 1000.0 * 2e-3 / 1.0  # q D / k
    for on, closest, furthest in ((False, 0.0, 0.004), (True, 0.05, 1.0)):
        found = solve(case.replace({"physics.axial_conduction_in_streams": on})).axial["liquid"]
        z = found["z_m"][1:]
        here = (z > 1e-3) & (z < 9e-3)
        want = wall_H(z[here] / (2e-3 * 5.0))
        deviation = np.abs((found["wetted_wall_temperature_K"][1:][here] - 293.15) / unit / want - 1.0).max()
        assert closest <= deviation < furthest
