"""The hand estimate against values worked from its own closed forms."""

import math

import pytest

from axicfd.theory import conduction, duct_heat
from axicfd.theory.hand import HandStream, Stretch, hand_estimate

# water at 20 degC (IAPWS), 1 g/s in a 2 mm bore
WATER = HandStream(
    mass_flow=1e-3,
    inlet_temperature=293.15,
    bore=2e-3,
    density=998.2,
    specific_heat=4184.0,
    conductivity=0.598,
    viscosity=1.0016e-3,
    flat_inlet=False,
)
PECLET = 4 * 1e-3 * 4184.0 / (math.pi * 2e-3 * 0.598)


def test_heater_between_insulated_ends():
    tube = [Stretch(0.2), Stretch(0.3, heat_per_length=200.0, wall_resistance=0.01), Stretch(0.5)]
    found = hand_estimate(WATER, tube)
    rise = 60.0 / (1e-3 * 4184.0)
    assert found.peclet == pytest.approx(PECLET)
    assert found.outlet_temperature == pytest.approx(293.15 + rise)
    assert found.heat_gain == pytest.approx(60.0)
    x = 0.3 / (2e-3 * PECLET)
    wall = 293.15 + rise + 200.0 / (math.pi * 0.598 * duct_heat.nusselt_H(x))
    assert found.hottest_wetted_wall == pytest.approx(wall)
    assert found.hottest_wetted_wall_z == pytest.approx(0.5)
    assert found.hottest_outside == pytest.approx(wall + 2.0)
    assert [s.end_z for s in found.stretches] == pytest.approx([0.2, 0.5, 1.0])
    assert found.stretches[0].mean_nusselt is None


def test_given_wall_temperature_is_graetz():
    found = hand_estimate(WATER, [Stretch(1.0, ambient=343.15)])
    x = 1.0 / (2e-3 * PECLET)
    assert found.outlet_temperature == pytest.approx(343.15 - 50.0 * duct_heat.bulk_T(x))
    assert found.stretches[0].mean_nusselt == pytest.approx(duct_heat.mean_nusselt_T(x))
    assert found.hottest_wetted_wall == pytest.approx(343.15)


def test_film_and_wall_in_series():
    wall = conduction.layer_resistance(1e-3, 1.5e-3, 15.0)
    whole = wall + conduction.film_resistance(500.0, 1.5e-3)
    found = hand_estimate(WATER, [Stretch(1.0, ambient=343.15, wall_resistance=wall, resistance=whole)])
    biot = 1 / (math.pi * 0.598 * whole)
    x = 1.0 / (2e-3 * PECLET)
    assert found.outlet_temperature == pytest.approx(343.15 - 50.0 * duct_heat.bulk_film(x, biot))
    inner = 343.15 - 50.0 * duct_heat.wall_film(x, biot)
    assert found.hottest_wetted_wall == pytest.approx(inner)
    assert found.hottest_outside == pytest.approx(inner + (343.15 - inner) * wall / whole)
    # a vanishing resistance is a given temperature, a huge one insulates
    thin = hand_estimate(WATER, [Stretch(1.0, ambient=343.15, resistance=1e-9)])
    assert thin.outlet_temperature == pytest.approx(343.15 - 50.0 * duct_heat.bulk_T(x))
    thick = hand_estimate(WATER, [Stretch(1.0, ambient=343.15, resistance=1e5)])
    assert thick.outlet_temperature == pytest.approx(293.15, abs=1e-3)


def test_cooled_wall_is_hottest_where_it_starts():
    found = hand_estimate(WATER, [Stretch(0.1), Stretch(1.0, ambient=273.15, resistance=0.2)])
    assert found.hottest_wetted_wall == pytest.approx(293.15)
    assert found.hottest_wetted_wall_z == pytest.approx(0.1)
    assert found.outlet_temperature < 293.15


def test_heat_and_film_together_balance():
    # far downstream the stream reaches the temperature at which all heat leaves through the film
    tube = [Stretch(500.0, heat_per_length=20.0, ambient=293.15, wall_resistance=0.05, resistance=0.25)]
    found = hand_estimate(WATER, tube)
    assert found.outlet_temperature == pytest.approx(293.15 + 20.0 * 0.20)


def test_pressure_drop():
    # Hagen-Poiseuille by hand; a flat inlet adds up to 1.25 of the dynamic pressure
    flow = 1e-3 / 998.2
    developed = 128 * 1.0016e-3 * flow * 1.0 / (math.pi * 2e-3**4)
    assert hand_estimate(WATER, [Stretch(1.0)]).pressure_drop == pytest.approx(developed)
    flat = HandStream(**{**vars(WATER), "flat_inlet": True})
    dynamic = 0.5 * 998.2 * (flow / (math.pi * 1e-6)) ** 2
    extra = hand_estimate(flat, [Stretch(1.0)]).pressure_drop - developed
    assert extra == pytest.approx(1.25 * dynamic, rel=0.02)
    assert hand_estimate(WATER, [Stretch(1.0)]).viscous_rise == pytest.approx(developed / (998.2 * 4184.0))


def test_no_flow_no_estimate():
    assert hand_estimate(HandStream(**{**vars(WATER), "mass_flow": 0.0}), [Stretch(1.0)]) is None


def test_extreme_lengths_are_answered():
    for length in (1e-7, 1e5):
        for stretch in (
            Stretch(length, 10.0),
            Stretch(length, ambient=350.0),
            Stretch(length, 0.0, 350.0, 0.1, 0.3),
        ):
            found = hand_estimate(WATER, [stretch])
            assert math.isfinite(found.outlet_temperature) and math.isfinite(found.hottest_wetted_wall)
