"""The case object: immutable, in SI, and what it says about its materials and units."""

import pickle

import pytest
from pydantic import ValidationError

from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.errors import InputError
from axicfd.materials.library import FLUIDS
from tests.case.samples import BASE, changed


def python_case(**more) -> Case:
    tables = {
        "stream": {"water": {"fluid": "water", "inlet_temperature": 293.15, "mass_flow": 0.001}},
        "layer": [{"stream": "water", "diameter": 0.004}, {"solid": "copper", "thickness": "1 mm"}],
        "section": [{"length": 1, "outside": {"heat": 5.0}}],
    }
    return Case(**(tables | more))


def test_a_case_from_python_takes_si_numbers_and_text():
    case = python_case()
    assert case.layer[0].diameter == 0.004 and case.layer[1].thickness == 0.001 and case.section[0].length == 1.0
    assert case.section[0].name == "section 1"
    again = python_case(solve={"stop_below": 1e-6}, section=list(case.section))
    assert again.section == case.section and again.solve.stop_below == 1e-6


def test_a_case_cannot_be_changed():
    case = load(BASE)
    with pytest.raises(ValidationError):
        case.title = "other"
    with pytest.raises(ValidationError):
        case.stream["oil"].mass_flow = 1.0
    with pytest.raises(TypeError):
        hash(case)


def test_replace_gives_another_case():
    case = load(BASE)
    other = case.replace({"stream.oil.mass_flow": 0.002, "layer.tube.thickness": "2 mm"})
    assert (other.stream["oil"].mass_flow, other.layer[1].thickness) == (0.002, 0.002)
    assert (case.stream["oil"].mass_flow, case.layer[1].thickness) == (0.004, 0.001)
    assert case.replace({}) == case
    with pytest.raises(InputError, match="greater than 0 m"):
        case.replace({"layer.tube.thickness": -1.0})


def test_cases_travel_between_processes():
    case = load(BASE)
    again = pickle.loads(pickle.dumps(case))
    assert again == case and again.unit_of("layer.tube.thickness") == "mm"


@pytest.mark.parametrize(
    "path, unit",
    [
        ("stream.oil.inlet_temperature", "degC"),
        ("layer.tube.thickness", "mm"),
        ("section.heater.outside.heat_flux", "kW/m^2"),
        ("section.hotter.outside.temperature", "degC"),
        ("fluid.oil.viscosity", "Pa s"),
        ("stream.oil.volume_flow", None),
        ("mesh.axial", None),
        ("stream.nothing.mass_flow", None),
        ("title", None),
    ],
)
def test_the_unit_the_user_wrote(path, unit):
    assert load(BASE).unit_of(path) == unit


def test_an_own_fluid():
    fluid = load(BASE).fluid_of("oil")
    assert fluid.viscosity(293.15) > fluid.viscosity(323.15) == pytest.approx(0.04)
    assert fluid.span == (273.15, 423.15) and fluid.outside_range == "refuse" and not fluid.is_gas


def test_outside_range():
    hold = load(BASE.replace('outside_range = "refuse"', 'outside_range = "hold"')).fluid_of("oil")
    extend = load(BASE.replace('outside_range = "refuse"', 'outside_range = "extend"')).fluid_of("oil")
    assert hold.viscosity(500.0) == pytest.approx(0.004) and extend.viscosity(500.0) < 0.004
    assert (hold.outside_range, extend.outside_range) == ("hold", "extend")


def test_a_built_in_fluid_is_taken_at_the_outlet_pressure():
    text = """
    [stream.gas]
    fluid = "air"
    inlet_temperature = "20 degC"
    reynolds = 100
    outlet_pressure = "2 atm"
    [[layer]]
    stream = "gas"
    diameter = "4 mm"
    [[section]]
    length = "1 m"
    outside = { insulated = true }
    """
    gas = load(text).fluid_of("gas")
    assert gas.is_gas and gas.source == FLUIDS["air"].source
    # an ideal gas: twice the pressure, twice the density
    assert gas.density(293.15) == pytest.approx(2 * FLUIDS["air"].density(293.15), rel=1e-12)


def test_solids():
    case = load(BASE)
    liner, copper = case.solid_of("liner"), case.solid_of("copper")
    assert (liner.conductivity_r(300.0), liner.conductivity_z(300.0)) == (0.25, 1.0)
    assert liner.density(300.0) == 2200.0
    assert copper.conductivity_r is copper.conductivity_z and copper.source


def test_a_built_in_steel_covers_room_temperature():
    """Its table begins at 300 K; a tube at 20 degC would else have left it."""
    steel = load(BASE).solid_of("stainless steel 316")
    assert steel.span[0] < 273.15
    # 13.4 W/(m K) at 300 K and a slope of 1.8e-2 W/(m K2) to 400 K, as in the table
    assert steel.conductivity_r(290.0) == pytest.approx(13.4 - 0.18, abs=0.02)
    assert steel.conductivity_r(300.0) == pytest.approx(13.4)


def test_zero_flow_is_still():
    assert load(changed(('"4 g/s"', '"0 g/s"'))).stream["oil"].is_still
    assert not load(BASE).stream["oil"].is_still
