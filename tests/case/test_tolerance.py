"""The key `accuracy`: what it accepts, how it is refused, how it is written."""

import pytest

from axicfd.case.read import load
from axicfd.case.tolerance import Tolerance, kind_asked
from axicfd.case.write import to_toml
from axicfd.errors import InputError
from tests.case.samples import BASE, changed, mistakes_in


def with_accuracy(value: str) -> str:
    return changed(("stop_below = 1e-9", f"accuracy = {value}"))


def accuracy(value: str):
    return load(with_accuracy(value)).solve.accuracy


def test_per_cent_for_all_headline_quantities():
    assert accuracy('"0.5 %"') == accuracy('"0.5%"') == Tolerance(per_cent=0.5)
    assert load(BASE).solve.accuracy is None


def test_a_table_of_names_and_paths():
    assert accuracy('{ outlet_temperature = "0.1 K", "section.heater.heat_in" = "20 mW", hottest = "1 %" }') == {
        "outlet_temperature": Tolerance(amount=0.1),
        "section.heater.heat_in": Tolerance(amount=0.02),
        "hottest": Tolerance(per_cent=1.0),
    }


def test_plain_numbers_from_python_are_si():
    case = load(BASE).replace({"solve.accuracy": 0.005})
    assert case.solve.accuracy == Tolerance(per_cent=0.5)
    table = load(BASE).replace({"solve.accuracy": {"pressure_drop": 12.0}})
    assert table.solve.accuracy == {"pressure_drop": Tolerance(amount=12.0)}


@pytest.mark.parametrize(
    "value", ['"0.30 %"', '{ pressure_drop = "1 mbar", "sensor.case.temperature" = "0.3 %", heat_gain = "1 W" }']
)
def test_it_is_written_as_given(value):
    case = load(with_accuracy(value))
    assert f"accuracy = {value}" in to_toml(case)
    assert load(to_toml(case)) == case
    again = case.replace({"solve.accuracy": case.solve.accuracy})
    assert load(to_toml(again)) == case


@pytest.mark.parametrize(
    "value, key, words",
    [
        ("0.5", "solve.accuracy", '"0.5 %"'),
        ('"0.5"', "solve.accuracy", '"0.5 %"'),
        ('"0.1 K"', "solve.accuracy", "per cent"),
        ('"0 %"', "solve.accuracy", "greater than 0"),
        ('"101 %"', "solve.accuracy", "at most 100 %"),
        ("{}", "solve.accuracy", "pressure_drop"),
        ('{ outlet_temp = "1 %" }', "solve.accuracy.outlet_temp", "stream.NAME.outlet_temperature"),
        ('{ prandtl = "1 %" }', "solve.accuracy.prandtl", "follows from the inputs alone. There are: outlet"),
        ('{ reynolds = "1 %" }', "solve.accuracy.reynolds", "follows from the inputs alone"),
        ('{ "layer.oil.pressure_drop" = "1 %" }', 'solve.accuracy."layer.oil.pressure_drop"', "stream.NAME"),
        ('{ pressure_drop = "1 K" }', "solve.accuracy.pressure_drop", "Pa"),
        ('{ pressure_drop = "-1 Pa" }', "solve.accuracy.pressure_drop", "greater than 0"),
        ('{ outlet_temperature = "1 mm" }', "solve.accuracy.outlet_temperature", '"0.1 K"'),
        ('{ "stream.oli.pressure_drop" = "1 %" }', 'solve.accuracy."stream.oli.pressure_drop"', "stream.oil.pres"),
        ('{ "layer.oil.hottest" = "1 %" }', 'solve.accuracy."layer.oil.hottest"', "layer.liner.hottest"),
        ('{ "section.oven.heat_in" = "1 %" }', 'solve.accuracy."section.oven.heat_in"', "section.hotter.heat_in"),
    ],
)
def test_bad_values_name_the_key_and_what_to_write(value, key, words):
    (mistake,) = mistakes_in(with_accuracy(value))
    assert mistake.key == key and words in mistake.text, mistake.text
    assert "accuracy" in with_accuracy(value).splitlines()[mistake.line - 1]


def test_all_mistakes_of_a_table_at_once():
    assert len(mistakes_in(with_accuracy('{ outlet = "1 %", pressure_drop = 3, hottest = "1 %" }'))) == 2


def test_a_sensor_that_is_not_there():
    text = with_accuracy('{ temperature = "0.1 K" }')
    start, end = text.index("[sensor.case]"), text.index("[mesh]")
    with pytest.raises(InputError, match="needs a sensor, and the case has none"):
        load(text[:start] + text[end:])


def test_the_kind_of_what_is_asked_for():
    named = {"signal": "temperature_difference", "heat": "heat"}
    assert kind_asked("stream.a b.heat_gain", named) == kind_asked("heat_gain", named) == "heat"
    assert kind_asked("coldest", named) == kind_asked("sensor.far", named) == "temperature_difference"
    assert kind_asked("quantity.heat", named) == "heat" and kind_asked("largest_reynolds", named) == ""
    for wrong in ("oil.heat_gain", "stream.oil.x.heat_gain", "quantity.other", "quantity.heat.x", "prandtl", "a..b"):
        assert kind_asked(wrong, named) is None, wrong


def test_a_flow_that_is_found_has_a_mesh_error():
    found = load(
        with_accuracy('{ mass_flow = "1 %" }').replace('mass_flow         = "4 g/s"', 'pressure_drop = "1 bar"')
    )
    assert found.solve.accuracy == {"mass_flow": Tolerance(per_cent=1.0)}


def test_a_named_combination():
    wanted = '{ "quantity.warmth" = "20 mK", "sensor.case" = "1 %" }'
    case = load(with_accuracy(wanted))
    assert case.solve.accuracy["quantity.warmth"] == Tolerance(amount=0.02)
    assert load(to_toml(case)) == case and f"accuracy = {wanted}" in to_toml(case)
    (mistake,) = mistakes_in(with_accuracy('{ "quantity.warmht" = "1 K" }'))
    assert 'Write "quantity.warmth".' in mistake.text
