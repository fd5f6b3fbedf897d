"""Cases that each leave one effect out."""

import math

import pytest

from axicfd.case.read import load
from axicfd.case.write import to_toml
from axicfd.errors import AxicfdError
from axicfd.variants.contrast import NO, YES
from axicfd.variants.matters import ALONG, BUOYANCY, FRICTION, INLET, PROPERTIES, constant_properties, what_matters
from tests.variants.tubes import tube


def of(found, name, path):
    effect = next(e for e in found.effects if e.name == name)
    return next(d for d in effect.differences if d.of.path == path)


@pytest.fixture(scope="module")
def oil():
    """An oil whose viscosity falls with the temperature, enough of it to be warmed by friction."""
    return tube().replace(
        {
            "fluid.liquid.viscosity": {"at": 293.15, "value": 0.5, "exponent": 0.05},
            "stream.liquid.mean_velocity": 0.5,
            "stream.liquid.inlet_profile": "flat",
            "section.heated.outside.heat_flux": 20e3,
            "physics.viscous_heating": True,
        }
    )


@pytest.fixture(scope="module")
def found(oil):
    return what_matters(oil)


def test_largest_effect_first(found):
    weights = [effect.weight for effect in found.effects]
    assert weights == sorted(weights, reverse=True)
    assert {e.name for e in found.effects} == {PROPERTIES, FRICTION, INLET, ALONG}
    assert found.left_out == {BUOYANCY: "it is not in the model yet"}
    assert "matters" in repr(found) and found.as_dict()["effect"][PROPERTIES]["verdict"] == YES


@pytest.fixture(scope="module")
def developed(oil):
    return what_matters(oil.replace({"stream.liquid.inlet_profile": "developed"}))


def test_friction_warms_the_stream_by_the_pressure_drop(developed):
    """m cp dT = V dp of an incompressible stream that leaves as fast as it came."""
    drop = developed.results["in full"]["stream.liquid.pressure_drop_Pa"]
    rise = of(developed, FRICTION, "stream.liquid.outlet_temperature").change.value
    assert rise == pytest.approx(drop / (1000.0 * 1000.0), rel=0.02)


def test_constant_viscosity_gives_the_drop_of_developed_flow(developed):
    """32 mu L U / D2 (Hagen and Poiseuille)."""
    drop = developed.results[PROPERTIES]["stream.liquid.pressure_drop_Pa"]
    assert drop == pytest.approx(32 * 0.5 * 0.04 * 0.5 / 4e-6, rel=1e-3)


def test_effects_that_are_not_there_are_said_to_be_so():
    found = what_matters(tube().replace({"physics.axial_conduction_in_streams": False}))
    assert found.effects == ()
    assert found.left_out[PROPERTIES] == "all properties are constants"
    assert found.left_out[FRICTION] == found.left_out[ALONG] == "it is switched off in the case"
    assert found.left_out[INLET] == "the inlet is developed"


def test_at_low_peclet_number_the_fluid_itself_carries_heat_upstream():
    slow = tube().replace({"stream.liquid.mean_velocity": 1e-3, "solid.metal.conductivity": 0.01})  # Pe = 2
    found = what_matters(slow)
    assert of(found, ALONG, "sensor.skin.temperature").verdict == YES
    fast = tube().replace({"stream.liquid.mean_velocity": 0.2, "solid.metal.conductivity": 0.01})  # Pe = 400
    assert of(what_matters(fast), ALONG, "sensor.skin.temperature").verdict == NO


def test_constant_properties_are_those_of_the_inlet():
    case = constant_properties(
        load(to_toml(tube().replace({"stream.liquid.fluid": "water", "layer.tube.solid": "copper"})))
    )
    used, water = case.fluid_of("liquid"), tube().replace({"stream.liquid.fluid": "water"}).fluid_of("liquid")
    for law in ("viscosity", "conductivity", "specific_heat"):
        assert getattr(used, law).is_constant and getattr(used, law)(350.0) == getattr(water, law)(293.15)
    # the pressure work keeps the expansion coefficient of the inlet state
    slope = [float(f.density.derivative(293.15) / f.density(293.15)) for f in (used, water)]
    assert slope[0] == pytest.approx(slope[1]) and math.isfinite(slope[0])
    assert case.solid_of(case.layer[1].solid).conductivity_r.is_constant
    assert load(to_toml(case)) == case


def test_without_flow_there_is_nothing_to_leave_out():
    still = tube().replace({"stream.liquid.mean_velocity": 0.0, "ends.first": {"temperature": 290.0}})
    with pytest.raises(AxicfdError, match="Nothing flows"):
        what_matters(still)
