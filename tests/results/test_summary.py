"""The headline tree of a solution whose values are known."""

import math
from dataclasses import replace

import numpy as np
import pytest

from axicfd.results.axial import stream_views
from axicfd.results.summary import summary
from tests.results.made_up import BACKWARDS, CP, FLUX, MEAN, MU, RHO, K, MadeUp, R, made_up

MASS = RHO * MEAN * math.pi * R**2


def tree(run: MadeUp) -> dict:
    return summary(run.case, run.layout, run.solution, stream_views(run.case, run.solution))


@pytest.fixture(scope="module")
def plain() -> MadeUp:
    return made_up()


@pytest.fixture(scope="module")
def stream(plain) -> dict:
    return tree(plain)["stream"]["water"]


def test_groups_at_the_inlet(stream):
    reynolds, prandtl = RHO * MEAN * 2 * R / MU, MU * CP / K
    assert stream["mass_flow_kg_s"] == pytest.approx(MASS)
    assert stream["mean_velocity_m_s"] == pytest.approx(MEAN)
    assert stream["reynolds"] == pytest.approx(reynolds)
    assert stream["prandtl"] == pytest.approx(prandtl)
    assert stream["peclet"] == pytest.approx(reynolds * prandtl)
    assert stream["heated_length_m"] == pytest.approx(0.06)
    assert stream["graetz"] == pytest.approx(reynolds * prandtl * 2 * R / 0.06)
    assert stream["largest_reynolds"] == pytest.approx(reynolds)


def test_largest_reynolds_is_at_the_thinnest_fluid():
    """Viscosity halves from 20 to 30 degC: the outlet's bulk of 11.67 K above the inlet has 2^1.167 times the
    number."""
    thin = made_up(
        (
            'viscosity     = "2 mPa s"',
            f'viscosity     = {{ at = "20 degC", value = "2 mPa s", exponent = "{math.log(2) / 10:.17g} 1/K" }}',
        )
    )
    found = tree(thin)["stream"]["water"]
    assert found["largest_reynolds"] / found["reynolds"] == pytest.approx(2.0 ** ((10.0 + 5 / 3) / 10), rel=2e-3)
    assert found["why"]["hydrodynamic_entry_length_m"] == "properties vary"


def test_outlet_and_heat(stream):
    assert stream["outlet_temperature_K"] == pytest.approx(293.15 + 10.0 + 5 / 3, abs=0.01)
    assert stream["outlet_axis_temperature_K"] == pytest.approx(303.15, abs=0.01)
    assert stream["outlet_wall_temperature_K"] == pytest.approx(308.15, abs=1e-6)
    assert stream["heat_gain_W"] == pytest.approx(MASS * CP * 10.0, rel=1e-9)
    assert stream["mean_residence_s"] == pytest.approx(0.1 / MEAN)


def test_pressure_drop_is_on_the_axis_in_the_inlet_plane(plain):
    p = plain.solution.streams["water"].p.copy()
    p[0] += 30.0 * (plain.grid.rc[: p.shape[1]] / R) ** 2  # higher towards a flat inlet's corner
    gradient = 8.0 * MU * MEAN / R**2
    drop = tree(plain.with_flow(p=p))["stream"]["water"]["pressure_drop_Pa"]
    assert drop == pytest.approx(gradient * 0.1, rel=1e-9)
    assert tree(plain)["stream"]["water"]["pressure_drop_Pa"] == pytest.approx(gradient * 0.1, rel=1e-9)


@pytest.mark.parametrize(
    "axis, back, sign", [("up", False, 1), ("down", False, -1), ("horizontal", False, 0), ("up", True, -1)]
)
def test_weight_of_the_column(axis, back, sign):
    """A stream that rises by 0.1 m has 981 Pa more at its inlet than at its outlet."""
    run = made_up(('z_axis = "up"', f'z_axis = "{axis}"'), *(BACKWARDS if back else ()))
    found = tree(run)["stream"]["water"]
    assert found["hydrostatic_Pa"] == pytest.approx(sign * 1000.0 * 9.80665 * 0.1)
    assert found["pressure_drop_Pa"] == pytest.approx(8.0 * MU * MEAN / R**2 * 0.1, rel=1e-9)


def test_hottest_wetted_wall_between_stations(plain):
    """A hump with its top between two stations is found there."""
    zc = plain.grid.zc
    minus = plain.solution.heat.minus.copy()
    top = 0.0703
    minus[:, plain.grid.streams["water"][1]] = 40.0 - 3e4 * (zc - top) ** 2
    found = tree(plain.with_heat(minus=minus))["stream"]["water"]
    assert found["hottest_wetted_wall_K"] == pytest.approx(293.15 + 40.0, abs=1e-6)
    assert found["hottest_wetted_wall_z_m"] == pytest.approx(top, abs=1e-6)
    assert found["coldest_wetted_wall_K"] == pytest.approx(293.15 + 40.0 - 3e4 * top**2, abs=1e-6)
    assert found["coldest_wetted_wall_z_m"] == 0.0


def test_hottest_wetted_wall_at_a_joint_from_the_hot_side(plain):
    zc, j1 = plain.grid.zc, plain.grid.streams["water"][1]
    minus = plain.solution.heat.minus.copy()
    minus[:, j1] = np.where(zc < 0.04, 1.0, 30.0 - 100.0 * (zc - 0.04))
    found = tree(plain.with_heat(minus=minus))["stream"]["water"]
    assert found["hottest_wetted_wall_K"] == pytest.approx(293.15 + 30.0, abs=1e-6)
    assert found["hottest_wetted_wall_z_m"] == pytest.approx(0.04, abs=1e-9)


def test_layers(plain):
    layer = tree(plain)["layer"]["tube"]
    assert layer["hottest_K"] == pytest.approx(293.15 + 61.0, abs=1e-6)
    assert layer["hottest_z_m"] == pytest.approx(0.1)
    assert layer["coldest_K"] == pytest.approx(293.15 + 50.0, abs=1e-6)


def test_sections(plain):
    found = tree(plain)["section"]
    area = 2 * math.pi * 0.06
    assert found["lead-in"]["heat_in_W"] == 0.0
    assert found["heater"]["heat_in_W"] == pytest.approx(FLUX * area * 3e-3)
    assert found["heater"]["heat_to_stream_W"]["water"] == pytest.approx(FLUX * area * R)
    assert found["lead-in"]["end_bulk_temperature_K"]["water"] == pytest.approx(293.15 + 4.0 + 5 / 3, abs=0.01)
    gradient = 8.0 * MU * MEAN / R**2
    assert found["lead-in"]["end_pressure_Pa"]["water"] == pytest.approx(101325.0 + gradient * 0.06)


def test_section_ends_are_where_the_stream_leaves():
    found = tree(made_up(*BACKWARDS))["section"]
    assert found["lead-in"]["end_bulk_temperature_K"]["water"] == pytest.approx(293.15 + 4.0 + 5 / 3, abs=0.01)
    assert found["heater"]["end_bulk_temperature_K"]["water"] == pytest.approx(293.15 + 10.0 + 5 / 3, abs=0.01)
    assert found["heater"]["end_pressure_Pa"]["water"] == pytest.approx(101325.0)


def test_sensors(plain):
    found = {name: s["temperature_K"] for name, s in tree(plain)["sensor"].items()}
    assert found["on"] == pytest.approx(293.15 + 51.0 + 5.5, abs=1e-6)
    assert found["axis"] == pytest.approx(293.15 + 5.5, abs=1e-3)
    assert found["bulk"] == pytest.approx(293.15 + 5.5 + 5 / 3, abs=0.01)
    assert found["bore"] == pytest.approx(293.15 + 50.0 + 5.5, abs=1e-6)


def test_thermal_resistance_is_hottest_solid_minus_inlet_over_the_heat_brought_in(plain):
    found = tree(plain)
    hottest = 51.0 + 100.0 * plain.grid.zc[-1]  # of cells and surfaces
    heats = [s["heat_in_W"] for s in found["section"].values()] + list(found["ledger"]["generated"].values())
    brought = sum(heat for heat in heats if heat > 0.0)
    assert found["stream"]["water"]["thermal_resistance_K_W"] == pytest.approx(hottest / brought, rel=5e-3)


class TestEntryLengths:
    def test_peak_velocity_comes_back_last(self):
        """1.5 % above the developed peak until 31 mm, after an exact value at 10 mm: the last crossing
        counts."""
        run = made_up(('inlet_profile     = "developed"', 'inlet_profile     = "flat"'))
        u, z = run.solution.streams["water"].u.copy(), run.grid.z
        u[(z < 0.031) & (np.abs(z - 0.01) > 2e-4)] *= 1.015
        found = tree(run.with_flow(u=u))["stream"]["water"]["hydrodynamic_entry_length_m"]
        assert found == pytest.approx(0.031, abs=1e-3)

    def test_reasons_for_none(self, plain):
        found = tree(plain)["stream"]["water"]
        assert found["hydrodynamic_entry_length_m"] is None
        assert found["why"]["hydrodynamic_entry_length_m"] == "already developed"
        run = made_up(('inlet_profile     = "developed"', 'inlet_profile     = "flat"'))
        still = run.with_flow(u=run.solution.streams["water"].u * 1.5)
        assert tree(still)["stream"]["water"]["why"]["hydrodynamic_entry_length_m"] == "too short"

    def test_nusselt_from_the_start_of_the_heated_section(self, plain):
        """Wall minus bulk as in developed flow with uniform flux, but 10 % off until 25 mm behind the
        heater's start."""
        grid = plain.grid
        zc, j1 = grid.zc, grid.streams["water"][1]
        developed = FLUX * 2 * R / K * 11 / 48
        minus = plain.solution.heat.minus.copy()
        bulk = 100.0 * zc + 5 / 3
        minus[:, j1] = bulk + developed * np.where(zc < 0.04 + 0.025, 0.9, 1.0)
        found = tree(plain.with_heat(minus=minus))["stream"]["water"]
        assert found["thermal_entry_length_m"] == pytest.approx(0.025, abs=1.5e-3)
        assert found["section_thermal_entry_length_m"]["heater"] == found["thermal_entry_length_m"]
        short = tree(plain)["stream"]["water"]
        assert short["thermal_entry_length_m"] is None
        assert short["why"]["thermal_entry_length_m"] == "too short"


def test_ledger_and_balance_are_sums_of_their_own_cells(plain):
    grid = plain.grid
    qz, first, last = np.zeros((grid.nz + 1, grid.nr)), np.zeros(grid.nr), np.zeros(grid.nr)
    qz[-1, 0], first[-1], last[-2] = 0.25, 0.5, -0.125
    generated, viscous, work = (np.full(grid.shape, x / grid.cells) for x in (2.0, 0.5, -0.0625))
    run = plain.with_heat(qz=qz, first=first, last=last, generated=generated, viscous=viscous, pressure_work=work)
    found = tree(run)
    ledger = found["ledger"]
    assert ledger["ends"] == {"first": pytest.approx(0.5), "last": pytest.approx(-0.125)}
    assert sum(ledger["generated"].values()) == pytest.approx(2.0)
    assert ledger["viscous"] == pytest.approx(0.5) and ledger["pressure_work"] == pytest.approx(-0.0625)
    heat = FLUX * 2 * math.pi * 0.06 * 3e-3
    assert ledger["section"] == {"lead-in": 0.0, "heater": pytest.approx(heat)}
    assert ledger["stream"]["water"] == pytest.approx(-MASS * CP * 10.0)
    assert ledger["outlet_conduction"]["water"] == pytest.approx(-0.25)
    total = 0.5 - 0.125 + 2.0 + 0.5 - 0.0625 + heat - MASS * CP * 10.0 - 0.25
    assert found["balance"]["energy"] == pytest.approx(abs(total) / (MASS * CP * 10.0), rel=1e-6)
    assert found["balance"]["mass"] == pytest.approx(0.0, abs=1e-12)


def test_nothing_flows():
    film = '{ film_coefficient = "10 W/m^2/K", ambient = "30 degC" }'
    rest = made_up(
        ('mean_velocity     = "0.05 m/s"', 'mean_velocity     = "0 m/s"'), ('{ heat_flux = "1 kW/m^2" }', film)
    )
    solution = rest.solution
    still = MadeUp(rest.case, rest.layout, replace(solution, streams={}))
    still = still.with_heat(hz=solution.heat.hz * 0.0)
    found = tree(still)
    stream = found["stream"]["water"]
    assert stream["mass_flow_kg_s"] == 0.0 and "outlet_temperature_K" not in stream
    assert stream["why"] == {"outlet_temperature_K": "nothing flows"}
    assert found["sensor"]["bulk"]["temperature_K"] is None
    assert found["balance"]["mass"] is None
