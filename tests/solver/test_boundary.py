"""Outsides, ends, heat sources and inlets as arrays: means are exact, heats add up to what the case says."""

import numpy as np
import pytest

from axicfd.case.keys import ZTable
from axicfd.case.layout import layout
from axicfd.solver import boundary
from tests.solver.tubes import grid_of, tube

TUBE = '[[layer]]\nname = "tube"\nsolid = "copper"\nthickness = "1 mm"'
LINER = '[[layer]]\nname = "liner"\nsolid = "ptfe"\nthickness = "2 mm"'
TWO = """\
[[section]]
name = "first"
length = "0.1 m"
outside = {{ {0} }}
generated = {{ tube = "5 W" }}
[[section]]
name = "second"
length = "0.2 m"
outside = {{ {1} }}
"""
T_IN = 293.15


def test_means_of_a_table_are_exact():
    """Against the integral of the broken line, written as a sum of trapezia."""
    table = ZTable((0.0, 0.1, 0.15, 0.4), (300.0, 350.0, 310.0, 330.0))
    z = np.sort(np.concatenate([[1.0, 1.4], 1.0 + 0.4 * np.random.default_rng(1).random(20)]))
    knots = np.array(table.z) + 1.0
    expected = []
    for a, b in zip(z[:-1], z[1:], strict=True):
        x = np.concatenate([[a], knots[(knots > a) & (knots < b)], [b]])
        expected.append(np.trapezoid(np.interp(x, knots, table.value), x) / (b - a))
    assert boundary.cell_means(table, 1.0, z) == pytest.approx(expected, rel=1e-12)


def test_means_of_a_table_with_a_jump():
    table = ZTable((0.0, 0.5, 0.5, 1.0), (1.0, 1.0, 3.0, 3.0))
    assert boundary.cell_means(table, 0.0, np.array([0.0, 0.4, 0.6, 1.0])) == pytest.approx([1.0, 2.0, 3.0])


def test_a_value_is_the_same_in_every_cell():
    assert boundary.cell_means(4.0, 0.0, np.array([0.0, 0.1, 0.5])) == pytest.approx([4.0, 4.0])


@pytest.mark.parametrize(
    "outside, expected",
    [
        ('heat = "30 W"', 30.0),
        # q pi D L, D = 12 mm, L = 0.2 m
        ('heat_flux = "2 kW/m^2"', 2000.0 * np.pi * 0.012 * 0.2),
        ('heat_per_length = "100 W/m"', 20.0),
        # mean of the broken line: (1 + 3)/2 over the first half, 3 over the second
        (
            'heat_flux = { z = ["0 m", "0.1 m", "0.2 m"], value = ["1 kW/m^2", "3 kW/m^2", "3 kW/m^2"] }',
            2500.0 * np.pi * 0.012 * 0.2,
        ),
        ('heat_per_length = { z = ["0 m", "0.2 m"], value = ["0 W/m", "100 W/m"] }', 10.0),
    ],
)
def test_heat_brought_in_adds_up(outside, expected):
    case = tube(layers=TUBE, sections=TWO.format("insulated = true", outside))
    grid = grid_of(case)
    exchange = boundary.outside(case, grid, T_IN)
    second = grid.section == 1
    assert exchange.brought[second].sum() == pytest.approx(expected, rel=1e-12)
    assert not exchange.brought[~second].any()
    assert np.isinf(exchange.resistance).all()


def test_a_film_is_a_resistance_of_its_area():
    case = tube(
        layers=TUBE,
        sections=TWO.format("insulated = true", 'film_coefficient = "50 W/m^2/K", ambient = "80 degC"'),
    )
    grid = grid_of(case)
    exchange = boundary.outside(case, grid, T_IN)
    second = grid.section == 1
    # 1/(h A) of all cells in parallel; T from the inlet temperature
    assert 1.0 / (1.0 / exchange.resistance[second]).sum() == pytest.approx(
        1.0 / (50.0 * np.pi * 0.012 * 0.2), rel=1e-12
    )
    assert exchange.temperature[second] == pytest.approx(60.0)
    assert np.isinf(exchange.resistance[~second]).all()


def test_heat_and_film_together_are_a_sum():
    outside = 'heat_flux = "1 kW/m^2", film_coefficient = "50 W/m^2/K", ambient = "80 degC"'
    case = tube(layers=TUBE, outside=outside)
    grid = grid_of(case)
    exchange = boundary.outside(case, grid, T_IN)
    area = 2 * np.pi * 6e-3 * grid.dz
    half = np.full(grid.nz, 0.02)
    a, b = exchange.linear(half)
    # at any node temperature T*: face T* + half Q, and Q = q A + h A (T_ambient - face)
    node = np.linspace(-10.0, 90.0, grid.nz)
    heat = a - b * node
    face = node + half * heat
    assert heat == pytest.approx(1000.0 * area + 50.0 * area * (60.0 - face), rel=1e-12)


def test_a_temperature_behind_a_contact():
    case = tube(layers=TUBE, outside='temperature = "60 degC", contact_resistance = "1e-4 m^2 K/W"')
    grid = grid_of(case)
    exchange = boundary.outside(case, grid, T_IN)
    assert exchange.temperature == pytest.approx(40.0)
    assert exchange.resistance == pytest.approx(1e-4 / (2 * np.pi * 6e-3 * grid.dz), rel=1e-12)


def test_a_bare_temperature_has_no_resistance():
    case = tube(layers=TUBE, outside='temperature = "60 degC"')
    grid = grid_of(case)
    half = np.full(grid.nz, 0.5)
    a, b = boundary.outside(case, grid, T_IN).linear(half)
    assert a - b * 10.0 == pytest.approx((40.0 - 10.0) / 0.5)


def test_generation_adds_up_per_layer():
    layers = TUBE + '\nheat_per_volume = "2 MW/m^3"\n' + LINER
    case = tube(layers=layers, sections=TWO.format("insulated = true", "insulated = true"))
    grid = grid_of(case)
    heat = boundary.generation(grid)
    area = np.pi * (6e-3**2 - 5e-3**2)
    found = {(p.layer.name, p.section): heat[p.cells].sum() for p in grid.pieces}
    assert found["tube", 0] == pytest.approx(5.0 + 2e6 * area * 0.1, rel=1e-12)
    assert found["tube", 1] == pytest.approx(2e6 * area * 0.2, rel=1e-12)
    assert found["liner", 0] == found["oil", 0] == 0.0


def test_a_contact_sits_on_the_inner_face_of_its_layer():
    case = tube(layers=TUBE + "\n" + LINER + '\ncontact_resistance = "1e-4 m^2 K/W"')
    grid = grid_of(case)
    resistance = boundary.contact(grid)
    (liner,) = (p for p in grid.pieces if p.layer.name == "liner")
    assert grid.r[liner.j0] == pytest.approx(6e-3)
    assert resistance[:, liner.j0] == pytest.approx(1e-4 / (2 * np.pi * 6e-3 * grid.dz), rel=1e-12)
    assert np.count_nonzero(resistance) == grid.nz


def ends_of(tail, end="first"):
    case = tube(layers=TUBE + "\n" + LINER, tail=tail)
    grid = grid_of(case)
    return grid, boundary.end_faces(case, grid, end, T_IN)


def test_heat_of_one_end_face_adds_up():
    grid, exchange = ends_of('[ends]\nfirst.tube = { heat = "0.5 W" }')
    (copper,) = (slice(p.j0, p.j1) for p in grid.pieces if p.layer.name == "tube")
    assert exchange.brought[copper].sum() == pytest.approx(0.5, rel=1e-12)
    assert exchange.brought.sum() == pytest.approx(0.5, rel=1e-12)


def test_heat_of_a_whole_end_is_shared_by_area():
    """It used to be brought in once per layer: two layers took 1 W of a stated 0.5 W."""
    grid, exchange = ends_of('[ends]\nfirst = { heat = "0.5 W" }')
    assert exchange.brought.sum() == pytest.approx(0.5, rel=1e-12)
    solid = slice(grid.streams["oil"][1], None)
    flux = exchange.brought[solid] / grid.area_z[solid]
    assert np.ptp(flux) < 1e-12 * flux.max()


def test_end_conditions_leave_the_stream_alone():
    grid, exchange = ends_of('[ends]\nlast = { temperature = "50 degC" }', "last")
    j0, j1 = grid.streams["oil"]
    assert np.isinf(exchange.resistance[j0:j1]).all()
    assert exchange.temperature[j1:] == pytest.approx(30.0)
    assert not exchange.resistance[j1:].any()
    _, other = ends_of('[ends]\nlast = { temperature = "50 degC" }', "first")
    assert np.isinf(other.resistance).all()


def test_a_film_and_a_flux_on_an_end_face():
    condition = 'heat_flux = "1 kW/m^2", film_coefficient = "20 W/m^2/K", ambient = "10 degC"'
    grid, exchange = ends_of(f"[ends]\nfirst.liner = {{ {condition} }}")
    (liner,) = (slice(p.j0, p.j1) for p in grid.pieces if p.layer.name == "liner")
    # pi (r_o^2 - r_i^2)
    area = np.pi * (8e-3**2 - 6e-3**2)
    assert exchange.brought.sum() == pytest.approx(1000.0 * area, rel=1e-12)
    assert (1.0 / exchange.resistance[liner]).sum() == pytest.approx(20.0 * area, rel=1e-12)
    assert exchange.temperature[liner] == pytest.approx(-10.0)


@pytest.mark.parametrize(
    "flow, expected",
    [
        ('mass_flow = "3 g/s"', 3e-3),
        ('volume_flow = "2 mL/s"', 2e-3),
        # rho U pi D^2/4
        ('mean_velocity = "0.1 m/s"', 1000.0 * 0.1 * np.pi * 0.01**2 / 4),
        # Re mu pi D/4
        ("reynolds = 50", 50 * 0.01 * np.pi * 0.01 / 4),
        ('mass_flow = "0 g/s"', 0.0),
    ],
)
def test_mass_flow_from_each_key(flow, expected):
    case = tube(flow=flow, layers=TUBE, outside='film_coefficient = "5 W/m^2/K", ambient = "20 degC"')
    assert boundary.mass_flow(case, layout(case), "oil") == pytest.approx(expected, rel=1e-12)


def test_inlet_profiles_carry_the_mass_flow():
    r = np.linspace(0.0, 5e-3, 9)
    rc, area = 0.5 * (r[1:] + r[:-1]), np.pi * np.diff(r**2)
    developed = 1.0 - (rc / 5e-3) ** 2
    flat = boundary.inlet_velocity(tube(), "oil", 0.01, 1000.0, rc, area, developed)
    shaped = boundary.inlet_velocity(tube(profile="developed"), "oil", 0.01, 1000.0, rc, area, developed)
    assert np.ptp(flat) == 0.0
    assert shaped / shaped[0] == pytest.approx(developed / developed[0], rel=1e-12)
    for u in (flat, shaped):
        assert 1000.0 * (u * area).sum() == pytest.approx(0.01, rel=1e-13)
    assert not boundary.inlet_temperature(tube(), "oil", rc).any()


def test_an_inlet_profile_from_a_file(tmp_path):
    rows = ["r_m,velocity,temperature_K", "0,2,300", "0.005,1,310"]
    (tmp_path / "inlet.csv").write_text("\n".join(rows) + "\n")
    case = tube().replace({"stream.oil.inlet_profile": {"file": str(tmp_path / "inlet.csv")}})
    r = np.linspace(0.0, 5e-3, 5)
    rc, area = 0.5 * (r[1:] + r[:-1]), np.pi * np.diff(r**2)
    u = boundary.inlet_velocity(case, "oil", 0.01, 1000.0, rc, area, np.ones(4))
    assert u / u[0] == pytest.approx((2.0 - rc / 5e-3) / (2.0 - rc[0] / 5e-3), rel=1e-12)
    assert 1000.0 * (u * area).sum() == pytest.approx(0.01, rel=1e-13)
    assert boundary.inlet_temperature(case, "oil", rc) == pytest.approx(300.0 + 10.0 * rc / 5e-3 - T_IN)


def test_friction_at_the_inlet_corner_counts_to_a_finite_sum():
    """Integral of share / s^2 over a quarter disc of radius S: pi/4 (ln(1 + (S/e)^2) + 1/(1 + (S/e)^2) - 1), exact."""
    n, radius = 1000, 1.0
    x = (np.arange(n) + 0.5) / n
    square = x[:, None] ** 2 + (radius - x[None, :]) ** 2
    inside = boundary.counted_near_corner(x, x, radius) / square
    found = inside[square < 1.0].sum() / n**2
    ratio = 1.0 + 1.0 / boundary.CORNER**2
    assert found == pytest.approx(np.pi / 4 * (np.log(ratio) + 1.0 / ratio - 1.0), rel=2e-3)


def test_friction_far_from_the_inlet_corner_counts_in_full():
    share = boundary.counted_near_corner(np.array([0.01, 100.0]), np.array([0.0, 0.99]), 1.0)
    assert share[1] == pytest.approx(1.0, abs=1e-5) and share[0, 0] > 0.98 and share[0, 1] < 1e-3
