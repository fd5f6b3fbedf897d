"""How numbers and their mesh errors look."""

import pytest

from axicfd.output.headline import headline, with_bar
from axicfd.output.shown import shown_units
from tests.output.made_up import TEXT, made_up


@pytest.mark.parametrize(
    "value, half_width, text, bar",
    [
        (56.2, 0.05, "56.20", "0.05"),
        (27.12834, 0.0531, "27.128", "0.054"),  # rounded up, to two digits
        (4000.0, 12.0, "4000", "12"),
        (56789.0, 1234.0, "56800", "1300"),
        (297.49908, 1e-9, "297.499", "0.001"),  # no more than six digits of the value
        (1.546e-4, 5.2e-7, "1.5460e-04", "5.2e-07"),
        (7.962e7, 290e3, "7.962e+07", "290000"),
        (0.0003, 0.02, "0.00", "0.02"),
        (-1.98341, 3.1e-4, "-1.98341", "0.00031"),
        (0.0, 1e-9, "0", "1.0e-09"),
    ],
)
def test_value_and_bar_end_at_the_same_digit(value, half_width, text, bar):
    assert with_bar(value, half_width) == (text, bar)


def test_a_temperature_has_four_decimals_at_most():
    assert with_bar(27.128341, 3.4e-7, -4) == ("27.1283", "0.0001")


def lines(text: str = TEXT):
    case = made_up(text)
    return {line.name: line for line in headline(case.summary, shown_units(case.case), everything=True)}


def test_bars_stand_beside_their_values():
    found = lines()
    assert (found["stream.syrup.outlet_temperature"].text, found["stream.syrup.outlet_temperature"].bar) == (
        "56.20 degC",
        "±0.05 (mesh)",
    )
    assert found["stream.syrup.hydrostatic"].bar == "±0 (mesh)"
    assert found["stream.syrup.heat_gain"].bar == ""
    assert found["stream.syrup.thermal_entry_length"].bar == ""


def test_bars_are_differences_in_the_users_unit():
    """0.05 K is 0.09 degF, without the zero point of the scale."""
    assert lines(TEXT.replace('"20 degC"', '"68 degF"'))["stream.syrup.outlet_temperature"].bar == "±0.09 (mesh)"


def test_idle_sections_are_left_out_and_own_quantities_and_generated_heat_are_shown():
    result = made_up()
    own = {"signal": {"value_K": 3.5, "kind": "temperature_difference"}, "none": {"value_W": None, "kind": "heat"}}
    ledger = {**result.summary["ledger"], "generated": {"tube": 5.0, "syrup": 0.0}}
    summary = {**result.summary, "quantity": own, "ledger": ledger}
    names = {line.name: line for line in headline(summary, shown_units(result.case))}
    assert "section.lead-in.heat_in" not in names and "section.jacket.heat_in" in names
    assert names["quantity.signal"].text == "3.5 K" and names["quantity.signal"].owner == "quantity signal"
    assert "quantity.none" not in names and "ledger.generated.syrup" not in names
    assert names["ledger.generated.tube"].text == "5 W" and names["ledger.generated.tube"].owner == "tube"
    everything = {line.name for line in headline(summary, shown_units(result.case), everything=True)}
    assert {"section.lead-in.heat_in", "quantity.none"} <= everything
