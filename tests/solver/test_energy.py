"""The conjugate energy equation: against the slow balance, exact walls, and observed order."""

from itertools import pairwise

import numpy as np
import pytest

from axicfd.solver.boundary import mass_flow
from axicfd.solver.solve import solve_on
from axicfd.theory import conduction
from tests.reference.plain_energy import PlainEnergy
from tests.solver.tubes import grid_of, tube

NO_FLOW = 'mass_flow = "0 g/s"'
T_IN = 293.15
SOLIDS = """\
[solid.steel]
conductivity = "16 W/m/K"
[solid.plastic]
conductivity = "0.25 W/m/K"
[solid.lengthwise]
conductivity = { r = "0.25 W/m/K", z = "3 W/m/K" }
[solid.blocked]
conductivity = { r = "1 W/m/K", z = "0 W/m/K" }
"""
WALL = """\
[[layer]]
name = "heater"
solid = "steel"
thickness = "1 mm"
heat_per_volume = "3 MW/m^3"
[[layer]]
name = "liner"
solid = "plastic"
thickness = "2 mm"
contact_resistance = "2e-3 m^2 K/W"
heat_per_volume = "0.2 MW/m^3"
[[layer]]
name = "shell"
solid = "steel"
thickness = "0.5 mm"
contact_resistance = "1e-4 m^2 K/W"
"""
SHELLS = [
    conduction.Shell(0.0, 5e-3, 0.2),
    conduction.Shell(5e-3, 6e-3, 16.0, heat_per_volume=3e6),
    conduction.Shell(6e-3, 8e-3, 0.25, contact_resistance=2e-3, heat_per_volume=2e5),
    conduction.Shell(8e-3, 8.5e-3, 16.0, contact_resistance=1e-4),
]


def two_sections(first, second):
    """Two sections of 5 cm with these outsides."""
    section = '[[section]]\nname = "{}"\nlength = "0.05 m"\noutside = {{ {} }}\n'
    return section.format("a", first) + section.format("b", second)


def solved(case, level=0, **options):
    solution = solve_on(case, grid_of(case, level), **options)
    assert solution.converged, solution.stop_reason
    return solution


# ---------------------------------------------------------------------- exact walls


@pytest.mark.parametrize("level", [0, 2, 3])
@pytest.mark.parametrize(
    "outside, side",
    [
        ('temperature = "30 degC"', conduction.Side(303.15)),
        ('temperature = "30 degC", contact_resistance = "1e-3 m^2 K/W"', conduction.Side(303.15, 1e-3)),
        ('film_coefficient = "400 W/m^2/K", ambient = "10 degC"', conduction.Side(283.15, 1 / 400)),
    ],
)
def test_a_wall_of_layers_is_exact_on_any_mesh(outside, side, level):
    """Sources and contacts in four layers, no flow, insulated ends; one cell per layer at level 3."""
    case = tube(flow=NO_FLOW, layers=WALL, tail=SOLIDS, outside=outside)
    solution = solved(case, level, stop_below=1e-11)
    exact = conduction.solve_shells(SHELLS, conduction.Side(), side)
    grid = solution.grid
    span = exact.temperature(0, 0.0) - side.temperature
    assert span > 20.0
    for k, piece in enumerate(grid.pieces):
        expected = exact.temperature(k, grid.rc[piece.j0 : piece.j1])
        found = solution.heat.t[piece.cells] + T_IN
        assert np.abs(found - expected).max() < 1e-10 * span
    # both sides of a contact, and the outer surface
    contact = grid.pieces[2].j0
    assert solution.heat.minus[:, contact] + T_IN == pytest.approx(exact.outer_temperature(1), abs=1e-9 * span)
    assert solution.heat.plus[:, contact] + T_IN == pytest.approx(exact.inner_temperature[2], abs=1e-9 * span)
    assert solution.heat.minus[:, -1] + T_IN == pytest.approx(exact.outer_temperature(3), abs=1e-9 * span)
    # all heat leaves through the outside
    assert solution.heat.outside.sum() == pytest.approx(-exact.heat_outer(3) * 0.1, rel=1e-10)


def test_a_wall_between_two_end_temperatures():
    """A wall around resting oil between two given end temperatures, insulated outside.

    The wall's ends are held and the stream's are closed: not straight, but mirrored in the middle.
    """
    tail = '[ends]\nfirst = { temperature = "20 degC" }\nlast = { temperature = "60 degC" }\n' + SOLIDS
    wall = '[[layer]]\nname = "tube"\nsolid = "steel"\nthickness = "1 mm"'
    case = tube(flow=NO_FLOW, layers=wall, tail=tail, mesh="stretch_to_ends = 8", profile="developed")
    solution = solved(case, stop_below=1e-10)
    t = solution.heat.t
    assert t + t[::-1] == pytest.approx(40.0, abs=1e-8)
    assert solution.heat.first.sum() == pytest.approx(-solution.heat.last.sum(), rel=1e-9)
    # the steel carries nearly all: q = k A dT / L within the share k_fluid A_fluid / (k A) of the stream
    area = np.pi * (6e-3**2 - 5e-3**2)
    plain = 16.0 * area * 40.0 / 0.1
    assert plain < solution.heat.last.sum() < plain * (1.0 + 0.2 * 25.0 / (16.0 * 11.0))


def test_a_wall_that_conducts_nothing_along_passes_nothing_along():
    wall = '[[layer]]\nname = "tube"\nsolid = "blocked"\nthickness = "1 mm"'
    film = 'film_coefficient = "9 W/m^2/K", ambient'
    sections = two_sections(f'{film} = "20 degC"', f'{film} = "70 degC"')
    solution = solved(tube(layers=wall, tail=SOLIDS, sections=sections))
    j1 = solution.grid.streams["oil"][1]
    assert not solution.heat.qz[:, j1:].any()
    assert solution.heat.qz[:, :j1].any()


# ---------------------------------------------------------------------- conductivity of temperature


VARYING = """\
[solid.varying]
outside_range = "extend"
conductivity = {}
"""
COVERED = """\
[[layer]]
name = "heater"
solid = "steel"
thickness = "1 mm"
heat_per_volume = "12 MW/m^3"
[[layer]]
name = "cover"
solid = "varying"
thickness = "9 mm"
"""
COVER_HEAT = 12e6 * np.pi * (6e-3**2 - 5e-3**2)  # W/m, all of it crosses the cover


def covered(law, level):
    """A heater under a cover of varying conductivity: inner temperature of the cover [K], case, solution."""
    case = tube(
        flow=NO_FLOW,
        layers=COVERED,
        tail=SOLIDS + VARYING.format(law),
        outside='temperature = "30 degC"',
        radial=16,
    )
    solution = solved(case, level, stop_below=1e-11)
    return float(solution.heat.plus[0, solution.grid.pieces[2].j0]) + T_IN, case, solution


def test_conductivity_linear_in_temperature_is_exact():
    """k = k0 (1 + slope (T - T0)): k at the mean of two nodes is what Kirchhoff's transform wants."""
    law = '{ temperature = ["0 degC", "400 degC"], value = ["0.2 W/m/K", "1.4 W/m/K"] }'
    for level in (3, 0):
        inner, _, solution = covered(law, level)
        assert inner - 303.15 > 100.0
        through = conduction.linear_conductivity_heat(inner, 303.15, 6e-3, 15e-3, 0.2, 0.003 / 0.2, 273.15)
        assert through == pytest.approx(COVER_HEAT, rel=1e-9)
        grid = solution.grid
        cover = grid.pieces[2]
        exact = conduction.linear_conductivity_temperature(
            grid.rc[cover.j0 : cover.j1], inner, 303.15, 6e-3, 15e-3, 0.003 / 0.2, 273.15
        )
        assert solution.heat.t[cover.cells] + T_IN == pytest.approx(np.tile(exact, (grid.nz, 1)), abs=1e-7)


def test_conductivity_of_temperature_is_of_second_order():
    """Any law: Q' ln(r_o/r_i) / 2 pi = integral of k over T (Kirchhoff)."""
    law = '{ at = "30 degC", value = "0.2 W/m/K", exponent = "-0.01 1/K" }'
    errors = []
    for level in (1, 0, -1):
        inner, case, _ = covered(law, level)
        potential = case.solid_of("varying").conductivity_r.integral(303.15, inner)
        errors.append(abs(potential * 2.0 * np.pi / np.log(15.0 / 6.0) / COVER_HEAT - 1.0))
    assert inner - 303.15 > 100.0
    assert errors[-1] < 1e-3
    for a, b in pairwise(errors):
        assert 1.8 < np.log2(a / b) < 2.3, errors


def test_an_option_of_direction_acts():
    """A wall that conducts ten times better along than across is not the same as one that does not."""
    sections = two_sections("insulated = true", 'heat_flux = "2 kW/m^2"')
    warm = []
    for solid in ("plastic", "lengthwise"):
        wall = f'[[layer]]\nname = "tube"\nsolid = "{solid}"\nthickness = "2 mm"'
        solution = solved(tube(layers=wall, tail=SOLIDS, sections=sections))
        warm.append(solution.heat.t[:8, -1].mean())
    assert warm[1] > 1.5 * warm[0] > 0.0


# ---------------------------------------------------------------------- against the slow balance


def plain_of(case, solution):
    """The slow balance of a solved case of constant properties."""
    grid, heat, (stream,) = solution.grid, solution.heat, solution.streams.values()
    shape = grid.shape
    k_r, k_z = np.zeros(shape), np.zeros(shape)
    for piece in grid.pieces:
        if piece.layer.kind == "stream":
            k_r[piece.cells] = k_z[piece.cells] = case.fluid_of(piece.layer.material).conductivity(T_IN)
        elif piece.layer.kind == "solid":
            solid = case.solid_of(piece.layer.material)
            k_r[piece.cells], k_z[piece.cells] = solid.conductivity_r(T_IN), solid.conductivity_z(T_IN)
    contact = np.zeros((grid.nz, grid.nr + 1))
    for piece in grid.pieces:
        contact[piece.i0 : piece.i1, piece.j0] = piece.layer.contact_resistance
    j0, j1 = grid.streams["oil"]
    mz, mr = np.zeros((grid.nz + 1, grid.nr)), np.zeros((grid.nz, grid.nr + 1))
    mz[:, j0:j1], mr[:, j0 : j1 + 1] = stream.mz, stream.mr
    flux, surroundings, film = np.zeros(grid.nz), np.zeros(grid.nz), [None] * grid.nz
    for i in range(grid.nz):
        outside = grid.layout.sections[grid.section[i]].outside
        flux[i] = outside.heat_flux or 0.0
        if outside.film_coefficient is not None:
            film[i], surroundings[i] = 1.0 / outside.film_coefficient, outside.ambient - T_IN
        elif outside.temperature is not None:
            film[i], surroundings[i] = outside.contact_resistance or 0.0, outside.temperature - T_IN
    capacity = float(case.fluid_of("oil").specific_heat(T_IN))
    upwind = {f for joint in grid.joints for f in range(joint - 2, joint + 3)}
    return PlainEnergy(
        grid.z,
        grid.r,
        grid.kind,
        heat.t,
        lambda cell, other: k_r[cell],
        lambda cell, other: k_z[cell],
        contact,
        heat.generated / grid.volume,
        heat.viscous + heat.pressure_work,
        mz,
        mr,
        lambda t: capacity * t,
        np.zeros(grid.nr),
        np.zeros(grid.nr),
        upwind,
        flux,
        surroundings,
        film,
        grid.outer,
        capacity,
    )


STACKS = """\
[[section]]
name = "bare"
length = "0.05 m"
outside = { film_coefficient = "300 W/m^2/K", ambient = "5 degC" }
[[section.layer]]
stream = "oil"
diameter = "10 mm"
[[section.layer]]
name = "tube"
solid = "lengthwise"
thickness = "1 mm"
[[section]]
name = "clad"
length = "0.08 m"
outside = { heat_flux = "3 kW/m^2", film_coefficient = "20 W/m^2/K", ambient = "40 degC" }
generated = { tube = "3 W" }
[[section]]
name = "clamp"
length = "0.04 m"
outside = { temperature = "60 degC", contact_resistance = "1e-3 m^2 K/W" }
generated = { tube = "1 W" }
"""
CLAD = """\
[[layer]]
name = "tube"
solid = "lengthwise"
thickness = "1 mm"
[[layer]]
name = "gap"
void = true
thickness = "0.5 mm"
[[layer]]
name = "clad"
solid = "steel"
thickness = "1 mm"
contact_resistance = "1e-3 m^2 K/W"
[[layer]]
name = "skin"
solid = "plastic"
thickness = "0.2 mm"
contact_resistance = "1e-3 m^2 K/W"
"""


@pytest.mark.parametrize("direction", ["+z", "-z"])
@pytest.mark.parametrize("level", [0, 3])
def test_a_solved_case_meets_the_slow_balance(direction, level):
    """A void, layers of one cell (level 3), contacts, sources, a stack that changes, viscous heat."""
    case = tube(layers=CLAD, tail=SOLIDS, sections=STACKS, direction=direction, heating=True, axial=48)
    solution = solved(case, level, stop_below=1e-11)
    residual = plain_of(case, solution).residual()
    scale = np.abs(solution.heat.outside).sum() + solution.heat.generated.sum()
    assert scale > 1.0
    assert np.abs(residual).sum() < 1e-9 * scale


def test_the_slow_balance_notices_a_changed_temperature():
    """So the agreement above is not empty."""
    case = tube(layers=CLAD, tail=SOLIDS, sections=STACKS, axial=48)
    solution = solved(case, 3, stop_below=1e-11)
    plain = plain_of(case, solution)
    plain.t = plain.t.copy()
    plain.t[2, -4] += 1e-3
    assert np.abs(plain.residual()).sum() > 1e-6


# ---------------------------------------------------------------------- heat of the stream


def test_the_stream_takes_up_what_is_brought_in():
    """m cp (T_out - T_in) = Q, by the enthalpy that leaves (closed balance of a constant heat capacity)."""
    wall = '[[layer]]\nname = "tube"\nsolid = "steel"\nthickness = "1 mm"'
    case = tube(layers=wall, tail=SOLIDS, outside='heat = "50 W"')
    solution = solved(case, stop_below=1e-11)
    m = mass_flow(case, solution.grid.layout, "oil")
    assert solution.heat.hz[-1].sum() == pytest.approx(50.0, rel=1e-9)
    bulk = (solution.streams["oil"].mz[-1] * solution.heat.tz[-1, : solution.grid.streams["oil"][1]]).sum() / m
    assert bulk == pytest.approx(50.0 / (m * 2000.0), rel=1e-9)


def test_heat_capacity_of_temperature_closes_the_balance():
    values = '["1500 J/kg/K", "2500 J/kg/K", "4000 J/kg/K"]'
    law = f'{{ temperature = ["0 degC", "100 degC", "300 degC"], value = {values} }}'
    case = tube(specific_heat=law, outside='heat_flux = "30 kW/m^2"')
    solution = solved(case, stop_below=1e-11)
    assert solution.heat.hz[-1].sum() == pytest.approx(30e3 * np.pi * 0.01 * 0.1, rel=1e-9)


def test_a_hot_wall_downstream_does_not_cool_the_stream_before_it():
    """Fromm's scheme alone undershoots by 9 % of the step ahead of a heater edge."""
    plate = 'temperature = "90 degC", contact_resistance = "1e-5 m^2 K/W"'
    sections = two_sections("insulated = true", plate)
    for direction in ("+z", "-z"):
        t = solved(tube(flow="reynolds = 200", sections=sections, direction=direction, axial=64)).heat.t
        assert t.min() > -1e-4 * 70.0
        assert t.max() < 70.0 * (1.0 + 1e-4)


@pytest.mark.parametrize("reynolds", [0.02, 50])
def test_nothing_heats_an_insulated_tube(reynolds):
    solution = solved(tube(flow=f"reynolds = {reynolds}"))
    assert np.abs(solution.heat.t).max() < 1e-9


def test_viscous_heat_raises_the_bulk_by_the_pressure_drop():
    """Liquid of constant density, insulated: m cp dT = viscous heat, and that is the power of the pressure.

    Developed inlet, so that no kinetic energy changes: Q = dp V (first law).
    """
    case = tube(
        flow='mean_velocity = "1 m/s"',
        viscosity='"0.5 Pa s"',
        profile="developed",
        heating=True,
        radial=24,
        axial=32,
    )
    solution = solved(case, stop_below=1e-11)
    power = 32.0 * 0.5 * 1.0 * 0.1 / 0.01**2 * np.pi * 0.005**2 * 1.0  # 32 mu U L/D^2 times the volume flow
    assert solution.heat.viscous.sum() == pytest.approx(power, rel=2e-3)
    assert solution.heat.hz[-1].sum() == pytest.approx(solution.heat.viscous.sum(), rel=1e-9)


def test_a_gas_pays_for_its_expansion():
    """beta T = 1 of an ideal gas: pressure work takes back what friction gives, the bulk stays as warm."""
    table = '{ temperature = ["200 K", "250 K", "280 K", "293.15 K", "310 K", "400 K", "600 K"], value = [%s] }'
    density = table % ", ".join(f'"{351.78 / t} kg/m^3"' for t in (200, 250, 280, 293.15, 310, 400, 600))
    case = tube(
        flow='mean_velocity = "1 m/s"',
        viscosity='"0.5 Pa s"',
        density=density,
        profile="developed",
        heating=True,
        radial=24,
    )
    solution = solved(case, stop_below=1e-11)
    assert solution.heat.viscous.sum() > 1.0
    assert solution.heat.pressure_work.sum() == pytest.approx(-solution.heat.viscous.sum(), rel=5e-3)
    assert abs(solution.heat.hz[-1].sum()) < 5e-3 * solution.heat.viscous.sum()
