"""A written case is complete and reproduces itself."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from axicfd.case import starter
from axicfd.case.read import load
from axicfd.case.write import to_toml
from tests.case.samples import BASE, changed


@pytest.mark.parametrize("text", [BASE, starter.TEXT])
def test_read_after_write_is_the_same_case(text):
    case = load(text)
    written = to_toml(case)
    assert load(written) == case
    assert to_toml(load(written)) == written


def test_the_users_units_are_kept_and_defaults_are_written():
    written = to_toml(load(BASE))
    for text in (
        'diameter = "6 mm"',
        'inlet_temperature = "20 degC"',
        'value = ["0.4 Pa s", "40 mPa s", "4 cP"]',
    ):
        assert text in written
    bare = to_toml(load(BASE[: BASE.index("[mesh]")]))
    for text in ("stop_below = 1e-08", "viscous_heating = true", 'name = "liner"'):
        assert text in bare


def test_names_and_titles_with_odd_signs():
    text = changed(('"Oil line"', r'"Oil \"line\" \\ 5 µm"'), ("[sensor.case]", '[sensor."hot end"]'))
    case = load(text)
    assert case.title == 'Oil "line" \\ 5 µm' and load(to_toml(case)) == case


def test_a_profile_from_a_file_is_written_in_place(tmp_path):
    (tmp_path / "inlet.csv").write_text("velocity,r_m,temperature_K\n2,0,300.1\n0,0.003,301\n")
    (tmp_path / "oil.toml").write_text(changed(('"flat"', '{ file = "inlet.csv" }')))
    case = load(tmp_path / "oil.toml")
    (tmp_path / "inlet.csv").unlink()
    assert load(to_toml(case)) == case


positive = st.floats(1e-6, 1e3, allow_nan=False)


@settings(deadline=None, max_examples=60)
@given(positive, positive, positive, st.floats(274.0, 420.0), st.lists(positive, min_size=2, max_size=4))
def test_numbers_from_python_survive_to_the_last_digit(flow, thickness, conductance, temperature, heats):
    z = [0.5 * i / (len(heats) - 1) for i in range(len(heats))]
    case = load(BASE).replace(
        {
            "stream.oil.volume_flow": flow,
            "layer.tube.thickness": thickness,
            "layer.liner.thickness": 0.1,
            "stream.oil.inlet_temperature": temperature,
            "section.heater.outside.heat_flux": {"z": z, "value": heats},
            "solid.liner.conductivity": {"r": conductance, "z": 0.0},
        }
    )
    again = load(to_toml(case))
    assert again == case
    assert again.stream["oil"].volume_flow == flow and again.layer[1].thickness == thickness
    assert again.section[1].outside.heat_flux.value == tuple(heats)


def test_every_field_of_a_case_is_compared():
    """Otherwise the round trip above would prove little."""
    case = load(BASE)
    for path, value in (
        ("title", "x"), ("stream.oil.direction", "-z"), ("mesh.axial", 401), ("results.stations", [0.1]),
        ("section.hotter.joint_length", 0.02), ("ends.last", {"insulated": True}), ("sensor.case.at", "axis"),
        ("fluid.oil.viscosity", "1 Pa s"), ("solve.stop_below", 1e-7), ("layer.tube.cells_across", 9),
    ):  # fmt: skip
        assert case.replace({path: value}) != case, path
    assert case != 3
