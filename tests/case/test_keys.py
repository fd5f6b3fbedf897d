"""Every declared key is fed bad values made from its declaration; each answer names the key and its line."""

from __future__ import annotations

import re
import tomllib

import pytest

from axicfd.case import keys
from axicfd.case.limits import Limits
from axicfd.case.model import Case, EndFace, Layer, Outside, Part, Section
from axicfd.case.read import declared, load
from axicfd.errors import InputError
from axicfd.units import KINDS
from tests.case.samples import BASE

# A table of the sample: its model, its header in the text, its path.
TABLES: list[tuple[type[Part], str, str]] = [
    (Case, "", ""),
    (Layer, '[[layer]]\nname               = "tube"', "layer.tube"),
    (Section, '[[section]]\nname      = "heater"', "section.heater"),
]
for _kind, _name in (
    ("stream", "oil"), ("fluid", "oil"), ("solid", "liner"), ("sensor", "case"), ("quantity", "warmth"),
    ("mesh", ""), ("physics", ""), ("solve", ""), ("results", ""),
):  # fmt: skip
    _path = f"{_kind}.{_name}" if _name else _kind
    _model = Case.model_fields[_kind].annotation
    TABLES.append(((_model if not _name else _model.__args__[1]), f"[{_path}]", _path))


def all_declared():
    for model, header, path in TABLES:
        for name in model.model_fields:
            key = declared(model, name)
            if key is not None:
                yield pytest.param(header, path, name, key, id=f"{path}.{name}".lstrip("."))
    for model, path in ((Outside, "section.heater.outside"), (EndFace, "ends.first")):
        for name in model.model_fields:
            key = declared(model, name)
            if key is not None:
                yield pytest.param("inline", path, name, key, id=f"{path}.{name}")


ALL = list(all_declared())


def with_line(header: str, path: str, name: str, value: str) -> str:
    """The sample with `name = value` in a table, in place of what the table says about it now."""
    if header == "inline":
        start = "outside   = {" if path.startswith("section") else "first = {"
        lines = [
            f"{start.split(' =')[0]} = {{ {name} = {value} }}" if line.startswith(start) else line
            for line in BASE.splitlines()
        ]
        return "\n".join(lines) + "\n"
    text = BASE if header else re.sub(rf"^\[{name}\]\n(.+\n)+", "", BASE, flags=re.MULTILINE)
    before, after = text.split(header, 1) if header else ("", text)
    if header.count("\n"):
        name_line = header.split("\n")[1]
        if name == "name":
            name_line = ""
        header = header.split("\n")[0]
        after = f"\n{name_line}{after}"
    table, mark, rest = re.match(r"(.*?)((?:^\[)|\Z)(.*)", after, re.DOTALL | re.MULTILINE).groups()
    kept = "\n".join(line for line in table.splitlines() if not re.match(rf"{name}\s*=", line))
    return f"{before}{header}\n{name} = {value}\n{kept}\n{mark}{rest}"


def bad_values(key: keys.Key) -> list[str]:
    """TOML values that the declaration does not allow."""
    if isinstance(key, keys.ListOf):
        return ["3", '"3 m"', *(f"[{value}]" for value in bad_values(key.entry))]
    if isinstance(key, keys.PerName):
        return ["3", '"3 W"', *(f"{{ tube = {value} }}" for value in bad_values(key.entry))]
    if isinstance(key, keys.Quantity):
        unit = KINDS[key.kind].si
        other = "3 m" if key.kind != "length" else "3 kg"
        bad = [
            "true",
            "3",
            "3.5",
            "nan",
            "[]",
            '"3"',
            f'"{other}"',
            '""',
            '"warm"',
            f'"nan {unit}"',
            f'"1e999 {unit}"',
        ]
        bad += ["{}", "{ a = 1 }"]
        bad += ['{ plus_minus = "5 %" }', f'{{ value = "3 {unit}", std = "0 {unit}" }}', '{ value = 3, std = "1 %" }']
        bad += [f'{{ value = "3 {unit}", std = "1 {unit}", plus_minus = "1 {unit}" }}']
        if key.kind == "temperature":
            bad += ['"0 K"', '"-300 degC"', '"20 C"']
        if key.at_least is not None:
            bad.append(f'"{key.at_least - 1} {unit}"')
        if key.above is not None:
            bad += [f'"{key.above} {unit}"', f'"-1 {unit}"']
        if isinstance(key, keys.Along):
            good = f"3 {unit}"
            bad += [
                "{ z = 1, value = 2 }",
                f'{{ z = ["0 m", "0.5 m"], value = ["{good}"] }}',
                f'{{ value = ["{good}"] }}',
            ]
            bad += [f'{{ z = ["0 m", "0.5 m"], value = ["{good}", "{other}"] }}', "{ z = [], value = [] }"]
            bad += [
                f'{{ z = ["0 m", "0.5 m"], valeu = ["{good}", "{good}"] }}',
                f'{{ z = ["0", "1"], value = ["{good}", 3] }}',
            ]
        if isinstance(key, keys.Property):
            good = f"3 {unit}"
            bad += ['{ at = "20 degC" }', f'{{ at = "20 C", value = "{good}", exponent = "1 1/K" }}']
            bad += [f'{{ temperature = ["50 degC", "20 degC"], value = ["{good}", "{good}"] }}']
            bad += [
                f'{{ temperature = ["20 degC"], value = ["{good}"] }}',
                f'{{ temperature = "20 degC", value = "{good}" }}',
            ]
            bad += [
                f'{{ temperature = ["20 degC", "50 degC"], value = ["{good}", "-{good}"] }}',
                "{ exponent = 1 }",
            ]
        return bad
    if isinstance(key, keys.Number):
        bad = ["true", '"3"', "nan", "inf", "[]", "{}"]
        if key.at_least is not None:
            bad.append(str(key.at_least - 1))
        if key.at_most is not None:
            bad.append(str(key.at_most * 10))
        if key.whole:
            bad.append("12.5")
        return bad
    if isinstance(key, keys.Choice):
        return ["3", "true", '""', f'"{key.words[0]}x"', "[]"]
    if isinstance(key, keys.Switch):
        return ["1", '"true"', "[]"]
    if isinstance(key, keys.Material):
        return ["3", '""', "[]", '"no such stuff"']
    if isinstance(key, keys.Text):
        return ["3", "true", "[]"] + (['"a/b"', '""', '"ä"', '"a.b"'] if key.name else ['"a\\nb"'])
    if isinstance(key, Limits):
        path = '"stream.oil.outlet_temperature"'
        inner = ["3", '"90 degC"', "{}", "{ below = 90 }", '{ belw = "90 degC" }', '{ below = "1 Pa" }', "true"]
        inner += ['{ below = "1 degC", above = "2 degC" }', '{ above = "0 K" }', "[]"]
        return [
            "3",
            "true",
            "[]",
            '{ pressure_drop = { below = "1 Pa" } }',
            *(f"{{ {path} = {bad} }}" for bad in inner),
        ]
    return ["3", "true", '"flatt"', "{}", "{ file = 3 }", '{ file = "no such file.csv" }']  # an inlet profile


@pytest.mark.parametrize("header, path, name, key", ALL)
def test_every_key_answers_bad_values_with_its_name_and_line(header, path, name, key):
    for value in bad_values(key):
        text = with_line(header, path, name, value)
        tomllib.loads(text)
        with pytest.raises(InputError) as caught:
            load(text)
        full = f"{path}.{name}".lstrip(".")
        if name == "name":
            assert any(mistake.key.endswith(".name") for mistake in caught.value.mistakes), (
                value,
                str(caught.value),
            )
            continue
        about = [
            mistake
            for mistake in caught.value.mistakes
            if mistake.key.split(".")[-len(full.split(".")) :] == full.split(".") or mistake.key.startswith(full)
        ]
        assert about, (value, str(caught.value))
        line = text.splitlines()[about[0].line - 1]
        assert name in line, (value, line, str(caught.value))
        assert about[0].allowed


@pytest.mark.parametrize("header, path, name, key", [entry for entry in ALL if len(entry.values[2]) > 2])
def test_a_misspelt_key_is_led_to_the_right_one(header, path, name, key):
    wrong = name[:-2] + name[-1] + name[-2] if name[-1] != name[-2] else name + "x"
    text = with_line(header, path, wrong, key.example)
    with pytest.raises(InputError) as caught:
        load(text)
    (mistake,) = [mistake for mistake in caught.value.mistakes if mistake.key.endswith(wrong)]
    assert wrong in text.splitlines()[mistake.line - 1]
    assert f"`{name}`" in mistake.text


@pytest.mark.parametrize("header, path, name, key", ALL)
def test_the_example_of_a_key_is_accepted_by_its_own_reading(header, path, name, key):
    if name == "heat_per_length" and path.startswith("ends"):
        return
    value = tomllib.loads(f"value = {key.example}")["value"]
    read = key.read(value, in_file=True)
    again = tomllib.loads(f"value = {key.write(read, value)}")["value"]
    assert key.read(again, in_file=True) == read
    assert key.read(tomllib.loads(f"value = {key.write(read)}")["value"], in_file=True) == read


@pytest.mark.parametrize("header, path, name, key", ALL)
def test_every_key_says_what_it_means_and_allows(header, path, name, key):
    assert key.meaning and key.allowed.startswith("must be")


def test_bare_numbers_are_si_in_python_only():
    length = keys.Quantity("length", "length", above=0)
    assert length.read(0.5, in_file=False) == 0.5 and length.read(2, in_file=False) == 2.0
    with pytest.raises(keys.BadValue, match="unit is missing"):
        length.read(0.5, in_file=True)
    with pytest.raises(keys.BadValue):
        length.read(float("nan"), in_file=False)
    with pytest.raises(keys.BadValue):
        length.read(True, in_file=False)


def test_toml_text_is_escaped():
    for text in ('a "b"', "back\\slash", "tab\t", "bell\x07", "ä µ °"):
        assert tomllib.loads(f"t = {keys.toml_text(text)}")["t"] == text
    assert keys.toml_key("a b") == '"a b"' and keys.toml_key("lead-in") == "lead-in"


def test_a_table_along_z_is_straight_between_its_points():
    table = keys.ZTable((0.0, 1.0, 3.0), (10.0, 20.0, 0.0))
    assert [table.at(z) for z in (-1.0, 0.0, 0.5, 1.0, 2.0, 3.0, 9.0)] == [
        10.0,
        10.0,
        15.0,
        20.0,
        10.0,
        0.0,
        0.0,
    ]
