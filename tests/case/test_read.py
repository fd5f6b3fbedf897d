"""From text to a case: what is accepted, and how the words of a bad case are found."""

from pathlib import Path

import pytest

from axicfd.case.model import AlongAcross, FileProfile
from axicfd.case.read import load
from axicfd.errors import InputError
from axicfd.materials.laws import Constant, Exponential, Table
from tests.case.samples import BASE, changed, mistakes_in, without


def test_the_sample_becomes_si():
    case = load(BASE)
    assert case.title == "Oil line"
    assert case.stream["oil"].inlet_temperature == 293.15
    assert case.stream["oil"].mass_flow == 0.004
    assert case.stream["oil"].outlet_pressure == 101325.0
    assert case.fluid["oil"].density == Constant(880.0)
    assert case.fluid["oil"].viscosity == Table((273.15, 323.15, 423.15), (0.4, 0.04, 0.004), logarithmic=True)
    assert case.solid["liner"].conductivity == AlongAcross(Constant(0.25), Constant(1.0))
    assert [layer.name for layer in case.layer] == ["oil", "tube", "liner"]
    assert case.section[1].outside.heat_flux == 2000.0
    assert case.section[1].generated == {"tube": 5.0}
    assert case.section[3].outside.temperature.value == (343.15, 353.15)
    assert case.ends.of("first", "tube").insulated and case.ends.of("last", "tube").heat == 0.1
    assert case.ends.of("last", "liner").film_coefficient == 5.0
    assert case.mesh.axial == 400 and case.physics.viscous_heating is False
    assert case.results.stations == (0.2, 0.7)


def test_defaults():
    case = load(
        """
        [stream.water]
        fluid = "water"
        inlet_temperature = "20 degC"
        reynolds = 500
        [[layer]]
        stream = "water"
        diameter = "4 mm"
        [[section]]
        length = "1 m"
        outside = { heat = "5 W" }
        """
    )
    assert case.z_axis == "horizontal" and case.stream["water"].inlet_profile == "flat"
    assert case.stream["water"].direction == "+z" and case.stream["water"].outlet_pressure == 101325.0
    assert case.section[0].name == "section 1" and case.layer[0].name == "water"
    assert case.ends.of("first", "anything").insulated
    assert case.mesh.at_most is None and case.mesh.radial is None
    assert case.physics.viscous_heating and case.solve.stop_below == 1e-8 and case.results.stations == ()


def test_an_exponential_law_and_a_constant_table():
    law = '{ at = "20 degC", value = "2 Pa s", exponent = "0.05 1/K" }'
    text = "\n".join(f"viscosity = {law}" if line.startswith("viscosity") else line for line in BASE.splitlines())
    assert load(text).fluid["oil"].viscosity == Exponential(293.15, 2.0, 0.05)


def test_a_bom_and_line_ends_of_other_systems_are_read(tmp_path):
    path = tmp_path / "oil.toml"
    path.write_bytes(b"\xef\xbb\xbf" + BASE.replace("\n", "\r\n").encode())
    assert load(path) == load(BASE)
    path.write_bytes(b"\xef\xbb\xbf" + BASE.replace("4 g/s", "4 gg/s").replace("\n", "\r\n").encode())
    with pytest.raises(InputError) as caught:
        load(path)
    assert caught.value.mistakes[0].line == 7 and caught.value.mistakes[0].file == str(path)


def test_a_results_folder_is_a_case(tmp_path):
    (tmp_path / "case.toml").write_text(BASE)
    assert load(tmp_path) == load(BASE)


@pytest.mark.parametrize(
    "prepare, words",
    [
        (lambda folder: folder / "heaterr.toml", ("does not exist", "heater.toml")),
        (lambda folder: folder / "nothing" / "x.toml", ("does not exist", "axicfd new")),
        (lambda folder: folder, ("without a case.toml",)),
        (lambda folder: folder / "binary.toml", ("UTF-8",)),
    ],
)
def test_unreadable_files(tmp_path, prepare, words):
    (tmp_path / "heater.toml").write_text(BASE)
    (tmp_path / "binary.toml").write_bytes(b"\xff\xfe\x00")
    with pytest.raises(InputError) as caught:
        load(prepare(tmp_path))
    assert all(word in str(caught.value) for word in words)


@pytest.mark.parametrize(
    "old, new, line, words",
    [
        ('"4 g/s"', "4 g/s", 7, ("not TOML", '"4 g/s"')),
        ("[stream.oil]", "[stream.oil", 4, ("not TOML",)),
        ("[[layer]]\nstream", "[layer]\nstream", 26, ("not TOML", "[[layer]]")),
        ('title  = "Oil line"', 'title  = "Oil line', 1, ("not TOML",)),
        ('direction         = "+z"', 'direction = "+z"\ndirection = "-z"', 10, ("not TOML", "twice")),
    ],
)
def test_text_that_is_no_toml(old, new, line, words):
    text = changed((old, new))
    (mistake,) = mistakes_in(text)
    assert mistake.line in (line, line + 1, line + 3, line + 4) and all(word in mistake.text for word in words)


def test_all_mistakes_come_at_once_with_their_lines():
    text = changed(
        ('"4 g/s"', '"-4 g/s"'),
        ('"6 mm"', "6"),
        ("cells_across       = 8", "cell_across = 8"),
        ('"copper"', '"coper"'),
        ("heat_flux =", "emissivity = 0.9, heat_flux ="),
        ('at = "outside"', 'at = "outside"\nz_axis = "up"'),
        ("viscous_heating = false", 'viscous_heating = "no"'),
        ('"0.7 m"]', '"0.7 mm mm"]'),
    )
    found = {mistake.key: mistake for mistake in mistakes_in(text)}
    lines = {key: text.splitlines()[mistake.line - 1] for key, mistake in found.items()}
    assert "-4 g/s" in lines["stream.oil.mass_flow"]
    assert "diameter = 6" in lines["layer.oil.diameter"]
    assert "cell_across" in lines["layer.tube.cell_across"] and "`cells_across`" in found["layer.tube.cell_across"].text
    assert "coper" in lines["layer.tube.solid"] and '"copper"' in found["layer.tube.solid"].text
    assert "not available yet" in found["section.heater.outside.emissivity"].text
    assert "stands inside [sensor.case]" in found["sensor.case.z_axis"].text
    assert "viscous_heating" in lines["physics.viscous_heating"]
    assert "stations" in lines["results.stations"]
    assert len(found) == 8


def test_the_line_inside_a_long_list_is_found():
    text = changed(('value = ["70 degC", "80 degC"]', 'value = [ # first\n  "70 degC",\n\n  "80 C"]'))
    (mistake,) = mistakes_in(text)
    assert text.splitlines()[mistake.line - 1] == '  "80 C"] } }'
    assert '"80 C"' in mistake.text and '"80 degC"' in mistake.text
    assert mistake.key == "section.hotter.outside.temperature.value"


NOT_YET = [
    ("stream.oil", 'standard_volume_flow = "1 L/min"'),
    ("fluid.oil", 'shear_law = { law = "power", consistency = "1 Pa s", index = 0.6 }'),
    ("fluid.oil", 'boiling_point = "200 degC"'),
    ("fluid.oil", 'thermal_expansion = "7e-4 1/K"'),
    ("fluid.oil", 'molar_mass = "0.3 kg/mol"'),
]


@pytest.mark.parametrize("table, line", NOT_YET)
def test_keys_that_are_not_open_are_refused_by_name(table, line):
    text = BASE.replace(f"[{table}]", f"[{table}]\n{line}", 1)
    found = [mistake for mistake in mistakes_in(text) if "not available yet" in mistake.text]
    assert found and line.split(" =")[0] in found[0].key
    assert found[0].line == text.splitlines().index(line) + 1


@pytest.mark.parametrize(
    "addition, key",
    [
        ('[time]\nuntil = "1 s"', "time"),
    ],
)
def test_tables_that_are_not_open_are_refused_by_name(addition, key):
    (mistake,) = mistakes_in(BASE + addition + "\n")
    assert mistake.key == key and "not available yet" in mistake.text
    assert mistake.line == len(BASE.splitlines()) + 1


@pytest.mark.parametrize(
    "old, new, words",
    [
        ('film_coefficient = "10 W/m^2/K"', 'film_coefficient = "still air"', ("not available yet",)),
        (
            "{ insulated = true }\n\n[[",
            '{ emissivity = 0.9, surroundings = "20 degC" }\n\n[[',
            ("not available yet",),
        ),
        ('solid          = "liner"', 'gas_gap = "air"', ("not available yet",)),
    ],
)
def test_later_forms_of_open_keys_are_refused_by_name(old, new, words):
    found = mistakes_in(changed((old, new)) if BASE.count(old) == 1 else BASE.replace(old, new, 1))
    assert all(any(word in mistake.text for mistake in found) for word in words)


def test_a_key_above_the_first_table_is_led_home():
    (mistake,) = [m for m in mistakes_in('mass_flow = "4 g/s"\n' + BASE) if m.line == 1]
    assert "[stream.NAME]" in mistake.text


def test_a_key_in_the_wrong_table_is_led_home():
    text = changed(("stop_below = 1e-9", 'stop_below = 1e-9\nfilm_coefficient = "3 W/m^2/K"'))
    (mistake,) = mistakes_in(text)
    assert "`outside` of a [[section]]" in mistake.text


def test_settings_from_outside_the_file():
    case = load(BASE, set={"stream.oil.volume_flow": "1 L/h", "section.heater.outside.ambient": "25 degC"})
    assert case.stream["oil"].mass_flow is None and case.stream["oil"].volume_flow == pytest.approx(1e-3 / 3600)
    assert case.section[1].outside.ambient == 298.15 and case.section[1].outside.heat_flux == 2000.0
    with pytest.raises(InputError) as caught:
        load(BASE, set={"stream.oil.mass_flow": 4})
    (mistake,) = caught.value.mistakes
    assert mistake.line is None and "set from outside the file" in mistake.text and '"4 kg/s"' not in BASE


def test_an_inlet_file_is_read_relative_to_the_case(tmp_path):
    (tmp_path / "inlet.csv").write_text("r_m,velocity,temperature_K\n0,2,300\n0.0015,1.5,300\n0.003,0,301\n")
    path = tmp_path / "oil.toml"
    path.write_text(changed(('"flat"', '{ file = "inlet.csv" }')))
    expected = FileProfile((0.0, 0.0015, 0.003), (2.0, 1.5, 0.0), (300.0, 300.0, 301.0))
    assert load(path).stream["oil"].inlet_profile == expected
    assert load(str(path)) == load(Path(path))


@pytest.mark.parametrize(
    "content, words",
    [
        (None, ("cannot be read",)),
        ("r_m;velocity;temperature_K\n0;1;300\n", ("columns",)),
        ("r_m,velocity,temperature_K\n0,1,300\n", ("fewer than two",)),
        ("r_m,velocity,temperature_K\n0,1,300\n0.003,x,300\n", ("line 3",)),
        ("r_m,velocity,temperature_K\n0,1,300\n0.003,nan,300\n", ("line 3",)),
        ("r_m,velocity,temperature_K\n0.003,1,300\n0,0,300\n", ("increasing",)),
        ("r_m,velocity,temperature_K\n0,1,20\n0.003,0,-20\n", ("negative", "0 K")),
        ("r_m,velocity,temperature_K\n0,0,300\n0.003,0,300\n", ("no velocity",)),
        ("r_m,velocity,temperature_K\n0,1,300\n3,0,300\n", ("bore", "metres")),
    ],
)
def test_inlet_files_that_cannot_be_used(tmp_path, content, words):
    if content is not None:
        (tmp_path / "inlet.csv").write_text(content)
    path = tmp_path / "oil.toml"
    path.write_text(changed(('"flat"', '{ file = "inlet.csv" }')))
    with pytest.raises(InputError) as caught:
        load(path)
    (mistake,) = caught.value.mistakes
    assert mistake.line == 8 and mistake.key.startswith("stream.oil.inlet_profile")
    assert all(word in mistake.text for word in words)


@pytest.mark.parametrize("start", ["length", "inlet_temperature", 'density       = "880', "outside ", "at ", "fluid  "])
def test_a_missing_key_is_named_with_the_table_it_is_missing_from(start):
    found = mistakes_in(without(start))
    assert any("missing" in mistake.text and mistake.line for mistake in found)


def test_a_case_without_sections_or_streams():
    keys = {mistake.key for mistake in mistakes_in('title = "nothing"\n')}
    assert {"stream", "section"} <= keys


@pytest.mark.parametrize(
    "text", ["\n", "title = 1\n", "stream = 3\nsection = 4\n", "layer = [1, 2]\nsection = [3]\nends = 5\n"]
)
def test_wrong_shapes_are_mistakes_and_no_crash(text):
    mistakes_in(text)


def test_a_plan_given_for_a_case_is_led_to_its_command(tmp_path):
    plan = tmp_path / "plan.toml"
    plan.write_text('case = "tube.toml"\nrows = "rows.csv"\n')
    with pytest.raises(InputError, match=r"is a plan of variants, not a case\. `axicfd sweep .*plan\.toml` solves"):
        load(plan)


def test_a_missing_closing_quote_is_said():
    text = BASE.replace('mass_flow         = "4 g/s"', 'mass_flow = "4 g/s  # what the pump gives')
    wanted = 'line 7: is not TOML: a text has no closing quote .* Write mass_flow = "4 g/s"'
    with pytest.raises(InputError, match=wanted):
        load(text)
