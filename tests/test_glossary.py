import pytest

from axicfd import glossary


@pytest.mark.parametrize(
    "key, name",
    [
        ("outlet_temperature_K", "outlet_temperature"),
        ("hottest_wetted_wall_K", "hottest_wetted_wall"),
        ("hottest_wetted_wall_z_m", "hottest_wetted_wall_z"),
        ("thermal_resistance_K_W", "thermal_resistance"),
        ("heat_transfer_coefficient_W_m2K", "heat_transfer_coefficient"),
        ("mean_velocity_m_s", "mean_velocity"),
        ("reynolds", "reynolds"),
    ],
)
def test_a_quantity_is_named_without_its_unit(key, name):
    assert glossary.quantity_name(key) == name


@pytest.mark.parametrize("table", [glossary.SUMMARY, glossary.CURVES, glossary.OUTSIDE, glossary.RADIAL])
def test_keys_are_unique_and_carry_the_unit_they_say(table):
    keys = [row.key for row in table]
    assert len(keys) == len(set(keys))
    plain = str.maketrans({"/": "_", "²": "2", " ": "", "(": "", ")": ""})
    for row in table:
        if row.unit and row.key not in ("seconds",):
            assert row.key.endswith("_" + row.unit.translate(plain)), row.key


def test_annulus_columns_share_the_row_of_the_plain_ones():
    assert glossary.curve_row("inner_nusselt").label == "inner Nusselt number"
    assert glossary.curve_row("wetted_outer_wall_temperature_K").unit == "K"


def test_an_unknown_key_speaks_for_itself():
    assert glossary.summary_row("something_new_Pa").label == "something new"
