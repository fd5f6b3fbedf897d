"""Values with a tolerance: what is read, kept, written, and refused."""

from __future__ import annotations

import math

import pytest

import axicfd
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.case.write import to_toml
from axicfd.errors import InputError
from tests.case.samples import BASE

TOLERANCES = {
    "stream.oil.inlet_temperature": ('"20 degC"', '{ value = "20 degC", plus_minus = "2 degC" }'),
    "stream.oil.mass_flow": ('"4 g/s"', '{ value = "4 g/s", std = "3 %" }'),
    "fluid.oil.density": ('"880 kg/m^3"', '{ value = "880 kg/m^3", std = "10 kg/m^3" }'),
    "solid.liner.conductivity.r": ('"0.25 W/m/K"', '{ value = "0.25 W/m/K", plus_minus = "10 %" }'),
    "layer.tube.thickness": ('"1 mm"', '{ value = "1 mm", plus_minus = "0.1 mm" }'),
    "section.heater.outside.film_coefficient": ('"10 W/m^2/K"', '{ value = "10 W/m^2/K", plus_minus = "20 %" }'),
    "section.heater.generated.tube": ('"5 W"', '{ value = "5 W", std = "0.1 W" }'),
}
TEXT = BASE
for _old, _new in TOLERANCES.values():
    assert TEXT.count(_old) >= 1
    TEXT = TEXT.replace(_old, _new, 1)
ENDS = '\n[ends]\nfirst = { temperature = { value = "20 degC", plus_minus = "1 K" } }\n'


@pytest.fixture(scope="module")
def case() -> Case:
    return load(TEXT)


def test_the_case_uses_the_values_and_keeps_the_tolerances(case):
    plain = load(BASE)
    assert all(getattr(case, name) == getattr(plain, name) for name in Case.model_fields)
    assert set(case.tolerances) == set(TOLERANCES) and not plain.tolerances
    assert case != plain


@pytest.mark.parametrize(
    "path, std, reach",
    [
        ("stream.oil.inlet_temperature", 2.0 / math.sqrt(3.0), (291.15, 295.15)),  # a difference has no zero point
        ("stream.oil.mass_flow", 1.2e-4, (4e-3 - 4.8e-4, 4e-3 + 4.8e-4)),
        ("solid.liner.conductivity.r", 0.025 / math.sqrt(3.0), (0.225, 0.275)),
        ("layer.tube.thickness", 1e-4 / math.sqrt(3.0), (0.9e-3, 1.1e-3)),
    ],
)
def test_standard_deviation_and_reach(case, path, std, reach):
    """Standard deviation of a uniform distribution: half-width / sqrt(3), JCGM 100:2008 (GUM), 4.3.7."""
    found = case.tolerances[path]
    assert found.std == pytest.approx(std) and found.reach == pytest.approx(reach)


def test_a_written_case_keeps_its_tolerances(case):
    assert load(to_toml(case)) == case
    assert '{ value = "4 g/s", std = "3 %" }' in to_toml(case)
    in_python = case.replace({"layer.tube.thickness": {"value": 2e-3, "plus_minus": 1e-4}})
    assert load(to_toml(in_python)) == in_python


def test_the_unit_of_a_value_with_tolerance_is_that_of_its_value(case):
    assert case.unit_of("stream.oil.mass_flow") == "g/s"


@pytest.mark.parametrize("path", TOLERANCES)
def test_a_plain_value_put_in_its_place_has_no_tolerance(case, path):
    value = case.tolerances[path].value
    other = case.replace({path: 1.01 * value})
    assert set(other.tolerances) == set(TOLERANCES) - {path}


def test_an_end_with_a_tolerance_is_one_condition_for_all_layers():
    case = load(BASE.split("[ends]")[0] + ENDS)
    assert case.ends.of("first", "tube").temperature == 293.15
    assert case.tolerances["ends.first.temperature"].half_width == 1.0


@pytest.mark.parametrize(
    "path, text, words",
    [
        ("layer.tube.thickness", '{ value = "1 mm", plus_minus = "1.5 mm" }', "reaches -0.5 mm"),
        ("layer.tube.thickness", '{ value = "1 mm", std = "0.3 mm" }', "4 standard deviations"),
        ("layer.tube.thickness", '{ value = "1 mm", plus_minus = "-1 %" }', "greater than 0"),
        ("layer.tube.thickness", '{ value = "1 mm", plus_minus = "1 W" }', "a length"),
        ("layer.tube.thickness", '{ value = "1 mm", plus_minus = "much" }', "a number with a unit"),
        ("layer.tube.thickness", '{ value = "1 mm", std = 0.1 }', "unit is missing"),
        ("layer.tube.thickness", '{ plus_minus = "1 mm" }', "needs `value`"),
        ("layer.tube.thickness", '{ value = "1 mm", std = "1 %", plus_minus = "1 %" }', "Keep one"),
        ("layer.tube.thickness", '{ value = "1 mm", std = "1 %", sure = true }', "sure"),
        ("stream.oil.inlet_temperature", '{ value = "20 degC", plus_minus = "2 %" }', 'Write "2 K"'),
        ("stream.oil.inlet_temperature", '{ value = "20 degC", plus_minus = "300 K" }', "absolute zero"),
        (
            "section.heater.outside.ambient",
            '{ z = ["0 m", "0.5 m"], value = ["20 degC", "30 degC"], std = "1 K" }',
            "table or law",
        ),
        (
            "section.heater.outside.ambient",
            '{ z = ["0 m", "0.5 m"], value = ["20 degC", { value = "30 degC", std = "1 K" }] }',
            "inside a list or law",
        ),
        (
            "fluid.oil.viscosity",
            '{ at = "20 degC", value = { value = "1 Pa s", std = "5 %" }, exponent = "0.03 1/K" }',
            "inside a list or law",
        ),
        (
            "limits",
            '{ "stream.oil.outlet_temperature" = { below = { value = "90 degC", std = "1 K" } } }',
            "takes no tolerance",
        ),
        ("fluid.oil.viscosity", '{ at = "20 degC", value = "1 Pa s", exponent = "0.03 1/K", std = "5 %" }', "law"),
    ],
)
def test_what_cannot_be_a_tolerance_is_refused_by_name(path, text, words):
    import tomllib

    with pytest.raises(InputError) as caught:
        load(BASE, set={path: tomllib.loads(f"value = {text}")["value"]})
    assert words in str(caught.value) and path in str(caught.value)


def test_numbers_in_python_are_si():
    case = load(BASE).replace({"stream.oil.inlet_temperature": {"value": 300.0, "std": 1.5}})
    assert isinstance(case, axicfd.Case)
    assert case.tolerances["stream.oil.inlet_temperature"].std == 1.5
