"""Dotted paths: what they lead to, what setting one removes, and what a wrong one answers."""

import tomllib

import pytest

from axicfd.case import paths
from axicfd.case.read import load
from axicfd.errors import InputError
from tests.case.samples import BASE

TREE = tomllib.loads(BASE)


@pytest.mark.parametrize(
    "path, value",
    [
        ("title", "Oil line"),
        ("stream.oil.mass_flow", "4 g/s"),
        ("layer.oil.diameter", "6 mm"),  # a layer without a name goes by its stream or solid
        ("layer.tube.thickness", "1 mm"),
        ("layer.liner.outer_diameter", "12 mm"),
        ("section.heater.outside.ambient", "20 degC"),
        ('section."lead-in".length', "0.2 m"),
        ("section.hotter.outside.temperature.value", ["70 degC", "80 degC"]),
        ("section.nothing.length", None),
        ("stream.oil.reynolds", None),
    ],
)
def test_finding(path, value):
    assert paths.find(TREE, path) == value


def test_a_place_is_spelled_as_its_path():
    for path in ("layer.tube.thickness", "section.heater.outside.ambient", "stream.oil.mass_flow"):
        assert paths.spelled(TREE, paths.place_of(TREE, path)) == path


def test_setting_leaves_the_tree_before_alone():
    changed = paths.replaced(TREE, {"layer.tube.thickness": "2 mm", "section.heater.outside.heat_flux": 3.0})
    assert changed["layer"][1]["thickness"] == "2 mm" and changed["section"][1]["outside"]["heat_flux"] == 3.0
    assert tomllib.loads(BASE) == TREE


@pytest.mark.parametrize(
    "path, gone, left",
    [
        ("stream.oil.volume_flow", ["mass_flow"], ["fluid"]),
        ("stream.oil.reynolds", ["mass_flow"], ["inlet_temperature"]),
        ("layer.tube.outer_diameter", ["thickness"], ["solid"]),
        ("layer.liner.thickness", ["outer_diameter"], ["solid"]),
        ("section.heater.outside.temperature", ["heat_flux", "film_coefficient", "ambient"], []),
        ("section.heater.outside.heat", ["heat_flux"], ["film_coefficient", "ambient"]),
        ("section.heater.outside.film_coefficient", [], ["heat_flux", "ambient"]),
        ("section.heater.outside.insulated", ["heat_flux", "film_coefficient", "ambient"], []),
        ("section.plate.outside.heat", ["temperature", "contact_resistance"], []),
        ("section.lead-in.outside.heat_flux", ["insulated"], []),
    ],
)
def test_setting_one_of_several_alternatives_removes_the_others(path, gone, left):
    changed = paths.replaced(TREE, {path: True})
    table = paths.find(changed, path.rpartition(".")[0])
    assert not set(gone) & set(table) and set(left) <= set(table) and table[path.rpartition(".")[2]] is True


def test_alternatives_set_together_stay_and_are_found_out():
    with pytest.raises(InputError, match="stands beside"):
        load(BASE).replace({"stream.oil.volume_flow": 1e-6, "stream.oil.reynolds": 5.0})
    both = {
        "section.heater.outside.temperature": "50 degC",
        "section.heater.outside.contact_resistance": "1e-4 m^2 K/W",
    }
    assert load(BASE).replace(both).section[1].outside.contact_resistance == 1e-4
    assert load(BASE).replace(dict(reversed(both.items()))).section[1].outside.temperature == 323.15


def test_none_takes_a_key_out():
    assert load(BASE).replace({"section.heater.generated": None}).section[1].generated == {}
    assert load(BASE).replace({"solid.liner.density": None}).solid["liner"].density is None


def test_tables_that_do_not_stand_in_the_file_are_made():
    text = BASE[: BASE.index("[mesh]")]
    assert load(text, set={"mesh.axial": 300}).mesh.axial == 300
    assert load(text, set={"ends.first": {"temperature": "20 degC"}}).ends.of("first", "tube").temperature == 293.15


@pytest.mark.parametrize(
    "path, words",
    [
        ("stream.oil.mas_flow", ("`mass_flow`",)),
        ("steam.oil.mass_flow", ("`stream`",)),
        ("stream.oul.mass_flow", ("no stream", "oil")),
        ("section.heatr.length", ("no section", "heater")),
        ("layer.pipe.thickness", ("no layer", "tube, liner")),
        ("section.heater.layer.tube.thickness", ("no layer", "of its own")),
        ("section.heater", ("whole section",)),
        ("title.text", ("not a table",)),
        ("stream..mass_flow", ("not a path",)),
        ("", ("not a path",)),
        ('stream."oil.mass_flow', ("not a path",)),
        ("solve.accuracy", ("at most 100 %",)),
    ],
)
def test_wrong_paths(path, words):
    with pytest.raises(InputError) as caught:
        load(BASE).replace({path: 1.0 if path != "solve.accuracy" else 1.5})
    assert all(word in str(caught.value) for word in words), str(caught.value)


def test_every_value_of_a_case_has_a_path():
    case = load(BASE)
    listed = paths.values_in(case)
    assert "section.heater.outside.ambient" in listed and "layer.tube.thickness" in listed
    assert "section.hotter.outside.temperature" in listed
    assert all(paths.find(case._tree, path) is not None for path in listed)


def test_a_name_with_dots_stands_in_quotes_in_a_path():
    case = load(BASE).replace({"solve.accuracy": {"stream.oil.pressure_drop": "1 %"}})
    (path,) = [path for path in paths.values_in(case) if path.startswith("solve.accuracy")]
    assert path == 'solve.accuracy."stream.oil.pressure_drop"' and paths.find(case._tree, path) == "1 %"
