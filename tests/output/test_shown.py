import numpy as np
import pytest

from axicfd.case.read import load
from axicfd.output.shown import shown_units
from tests.output.made_up import TEXT


def test_units_are_those_the_user_wrote():
    shown = shown_units(load(TEXT.replace('"20 degC"', '"68 degF"').replace('"1.2 m"', '"120 cm"')))
    assert shown.unit("temperature") == "degF"
    assert shown.value("temperature", 293.15) == pytest.approx(68.0)
    assert shown.difference("temperature", 5.0) == pytest.approx(9.0)
    assert shown.unit("length") == "cm"
    assert shown.unit("diameter") == "mm"


def test_units_that_nobody_wrote_have_defaults():
    shown = shown_units(load(TEXT))
    assert (shown.unit("pressure"), shown.unit("heat")) == ("Pa", "W")
    assert shown.unit("heat_flux") == "W/m²"


def test_a_pressure_drop_is_not_shown_in_atmospheres():
    with_outlet = 'mass_flow = "6 g/s"\noutlet_pressure = "{}"'
    for given, unit in (("1 atm", "Pa"), ("2 bar", "bar")):
        case = load(TEXT.replace('mass_flow = "6 g/s"', with_outlet.format(given)))
        assert shown_units(case).unit("pressure") == unit


def test_arrays_are_converted_whole():
    shown = shown_units(load(TEXT))
    assert np.allclose(shown.value("temperature", np.array([273.15, 283.15])), [0, 10])
    assert shown.value("", 3.5) == 3.5


def test_differences_and_other_kinds():
    shown = shown_units(load(TEXT.replace('"20 degC"', '"68 degF"')))
    assert (shown.unit("temperature_difference"), shown.value("temperature_difference", 5.0)) == (
        "degF",
        pytest.approx(9),
    )
    assert shown_units(load(TEXT)).unit("temperature_difference") == "K"
    assert (shown.unit("time"), shown.value("time", 3.0)) == ("s", 3.0)
    assert (shown.unit("pressure_difference"), shown.difference("pressure_difference", 2.0)) == ("Pa", 2.0)
