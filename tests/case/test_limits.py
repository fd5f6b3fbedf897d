"""Limits, accepted cautions and named combinations: what is read, refused and written."""

import ast
from pathlib import Path

import pytest

from axicfd.case.limits import CAUTIONS, Limit
from axicfd.case.quantities import kind_of_sum, quantity
from axicfd.case.read import load
from axicfd.case.write import to_toml
from axicfd.results import cautions
from tests.case.samples import BASE, mistakes_in

MORE = """
[sensor.b]
z = "0.7 m"
at = "axis"
[quantity.signal]
plus = ["sensor.case"]
minus = ["sensor.b"]
[quantity.mean]
plus = ["quantity.signal", "sensor.b"]
"""


def with_lines(lines: str) -> str:
    return BASE.replace("[accept]", lines + "\n" + MORE + "\n[accept]")


def test_bounds_are_si_and_kept_as_written():
    case = load(BASE)
    assert case.limits["stream.oil.hottest_wetted_wall"] == Limit(below=363.15, kind="temperature")
    assert case.limits["quantity.warmth"] == Limit(below=60.0, above=0.5, kind="temperature_difference")
    assert '"quantity.warmth" = { below = "60 K", above = "0.5 K" }' in to_toml(case)
    assert case.accept == {"free-convection": "seen on the rig"}


def test_a_combination_says_in_what_unit_its_limit_is():
    case = load(with_lines('"quantity.signal" = { below = "5 K" }\n"quantity.mean" = { below = "45 degC" }'))
    assert (case.limits["quantity.signal"].below, case.limits["quantity.mean"].below) == (5.0, 318.15)
    assert quantity(case, "quantity.signal").kind == "temperature_difference"
    assert quantity(case, "quantity.mean").keys == ("quantity", "mean", "value_K")
    assert load(to_toml(case)) == case


def test_plain_numbers_from_python_are_si():
    case = load(BASE).replace({"limits": {"stream.oil.pressure_drop": {"below": 2.5e4}}})
    assert case.limits == {"stream.oil.pressure_drop": Limit(below=2.5e4, kind="pressure_difference")}
    assert load(to_toml(case)) == case
    again = load(BASE).replace({'limits."stream.oil.hottest_wetted_wall".below': "80 degC"})
    assert again.limits["stream.oil.hottest_wetted_wall"].below == 353.15


@pytest.mark.parametrize(
    "plus, minus, kind",
    [
        (["temperature"], ["temperature"], "temperature_difference"),
        (["temperature"] * 2, ["temperature"], "temperature"),
        (["temperature", "temperature_difference"], [], "temperature"),
        (["temperature_difference"], ["temperature_difference"] * 2, "temperature_difference"),
        (["heat"] * 3, [], "heat"),
        (["pressure"], ["pressure"], "pressure_difference"),
        (["pressure", "pressure_difference"], [], "pressure"),
        (["pressure_difference"] * 2, [], "pressure_difference"),
        ([""], [""], ""),
    ],
)
def test_kinds_of_sums(plus, minus, kind):
    assert kind_of_sum(plus, minus) == kind


@pytest.mark.parametrize("plus, minus", [(2, 0), (0, 1), (3, 1), (1, 2)])
def test_other_sums_of_temperatures_would_depend_on_the_zero_point(plus, minus):
    with pytest.raises(ValueError, match="zero point"):
        kind_of_sum(["temperature"] * plus, ["temperature"] * minus)


BAD_COMBINATIONS = [
    ('plus = ["sensor.cse"]', "quantity.signal.plus", ("sensor.case",)),
    ('plus = ["stream.oil.pressure_drop"]', "quantity.signal", ("one unit", "a temperature")),
    ('plus = ["sensor.case", "sensor.b", "sensor.case"]', "quantity.signal", ("3 temperatures", "takes 1")),
    ('plus = ["quantity.signal"]', "quantity.signal.plus", ("signal -> signal",)),
    ('plus = ["quantity.mean"]', "quantity.signal.plus", ("signal -> mean -> signal",)),
    ('plus = ["quantity.maen"]', "quantity.signal.plus", ("quantity.mean",)),
    ('plus = ["layer.tube.hottest_z"]', "quantity.signal.plus", ("is a place",)),
    ("plus = []", "quantity.signal.plus", ("is empty",)),
    ('plus = ["a..b"]', "quantity.signal.plus", ("is not a path",)),
]


@pytest.mark.parametrize("plus, key, words", BAD_COMBINATIONS)
def test_combinations_that_cannot_be(plus, key, words):
    """What builds on them is not complained about as well."""
    text = with_lines('"quantity.signal" = { below = "5 K" }').replace('plus = ["sensor.case"]', plus)
    text = text.replace("stop_below = 1e-9", 'accuracy = { "quantity.signal" = "1 K" }')
    found = mistakes_in(text)
    assert found[0].key == key and all(word in found[0].text for word in words), found[0].text
    assert all(mistake.key.startswith("quantity.") for mistake in found)
    assert text.splitlines()[found[0].line - 1] in (plus, "[quantity.signal]")


def test_a_combination_needs_something_to_add():
    (mistake,) = mistakes_in(BASE + '[quantity.x]\nminus = ["sensor.case"]\n')
    assert "quantity.x.plus` is missing" in mistake.text


BAD_LIMITS = [
    ('"stream.oil.hotest_wetted_wall" = { below = "1 degC" }', 'Write "stream.oil.hottest_wetted_wall".'),
    ('"stream.oli.outlet_temperature" = { below = "1 degC" }', "stream.oil.outlet_temperature"),
    ('"section.heater.heat_to_stream.oil" = { below = "1 Pa" }', "W"),
    ('"stream.oil.outlet_temperature" = "50 degC"', 'Write { below = "50 degC" }, or `above`.'),
    ('"stream.oil.outlet_temperature" = { belw = "50 degC" }', "Write `below`."),
    ('"stream.oil.outlet_temperature" = {}', "needs `below` or `above`"),
    ('"stream.oil.outlet_temperature" = { below = "1 degC", above = "2 degC" }', "lets nothing pass"),
    ('"stream.oil.hottest_wetted_wall_K" = { above = "2 degC" }', "same quantity as stream.oil.hottest_wetted_wall"),
    ('"quantity.sgnal" = { below = "1 K" }', 'Write "quantity.signal".'),
    ('"quantity.signal" = { below = "1 degC/W" }', "K"),
    ('"stream.oil.reynolds" = { below = "2000" }', "without a unit"),
    ('"stream.oil.pressure_drop" = { below = "1 bar g" }', "pressure difference"),
    ('"stream.oil.outlet_temperature" = { below = { value = "1 degC", std = "1 K" } }', "takes no tolerance"),
    ('pressure_drop = { below = "1 bar" }', 'Write "stream.NAME.pressure_drop".'),
]


@pytest.mark.parametrize("line, words", BAD_LIMITS)
def test_limits_that_cannot_be(line, words):
    text = with_lines(line)
    (mistake,) = mistakes_in(text)
    assert mistake.key.startswith("limits.") and words in mistake.text, mistake.text
    assert text.splitlines()[mistake.line - 1] == line


@pytest.mark.parametrize(
    "line, words",
    [
        ('reynold = "x"', ("Write reynolds.", "free-convection", "phase-change")),
        ('colour = "x"', ("There are: balance, mesh-error, reynolds",)),
        ('reynolds = ""', ("reason",)),
        ('reynolds = "  "', ("reason",)),
        ("reynolds = true", ("text",)),
        ('not-converged = "x"', ("cannot be accepted",)),
    ],
)
def test_cautions_that_cannot_be_accepted(line, words):
    text = BASE + line + "\n"
    (mistake,) = mistakes_in(text)
    assert all(word in mistake.text for word in words), mistake.text
    assert text.splitlines()[mistake.line - 1] == line


def test_the_codes_are_those_of_the_rules():
    calls = [node for node in ast.walk(ast.parse(Path(cautions.__file__).read_text())) if isinstance(node, ast.Call)]
    codes = {call.args[0].value for call in calls if getattr(call.func, "id", "") == "Caution"}
    assert codes == set(CAUTIONS)
    with pytest.raises(ValueError):
        cautions.Caution("warm", "text")
