"""Quantities of a solved case by name."""

import pytest

from axicfd import units
from axicfd.case.quantities import quantities, quantity
from axicfd.case.read import load
from axicfd.errors import InputError
from tests.results.made_up import TEXT


@pytest.fixture(scope="module")
def case():
    return load(TEXT)


def test_a_name_is_the_path_in_the_summary_without_its_unit(case):
    assert quantity(case, "stream.water.outlet_temperature").keys == ("stream", "water", "outlet_temperature_K")
    assert quantity(case, "stream.water.outlet_temperature_K").path == "stream.water.outlet_temperature"
    assert quantity(case, "sensor.on").path == "sensor.on.temperature"
    per_stream = quantity(case, "section.heater.heat_to_stream.water")
    assert per_stream.keys == ("section", "heater", "heat_to_stream_W", "water") and per_stream.kind == "heat"


def test_every_quantity_has_a_kind_and_comes_once(case):
    every = [q.path for q in quantities(case)]
    assert len(every) == len(set(every)) and {q.kind for q in quantities(case)} <= {*units.KINDS, ""}
    assert every[: len(list(quantities(case, headline_only=True)))] == [
        q.path for q in quantities(case, headline_only=True)
    ]


@pytest.mark.parametrize(
    "wrong, near",
    [
        ("stream.water.outlet_temprature", "Write stream.water.outlet_temperature."),
        ("outlet_temperature", "Write stream.water.outlet_temperature."),
        ("layer.water.hottest", "Write layer.tube.hottest."),
        ("stream.water.outlet", "Write stream.water.outlet_temperature or stream.water.outlet_axis_temperature"),
        ("x", "Write a path such as stream.water.outlet_temperature."),
    ],
)
def test_a_wrong_name_is_told_what_is_near(case, wrong, near):
    with pytest.raises(InputError, match="names no quantity of this case") as error:
        quantity(case, wrong)
    assert near in str(error.value)


def test_values_are_read_with_their_units(case):
    outlet = quantity(case, "stream.water.outlet_temperature")
    assert outlet.read("41 degC") == 314.15 and outlet.read("0.5 K", difference=True) == 0.5
    assert quantity(case, "stream.water.reynolds").read("2000") == 2000.0
    for text in ("41", "41 Pa", 41.0):
        with pytest.raises(units.UnitError):
            outlet.read(text)
    with pytest.raises(units.UnitError):
        quantity(case, "stream.water.reynolds").read("2000 m")


def test_a_value_is_found_in_a_tree_or_is_none(case):
    outlet = quantity(case, "stream.water.outlet_temperature")
    assert outlet.of({"stream": {"water": {"outlet_temperature_K": 300.0}}}) == 300.0
    for tree in ({}, None, {"stream": {"water": {"outlet_temperature_K": None}}}, {"stream": {"water": 3}}):
        assert outlet.of(tree) is None
