"""Plans: the rows they make, and every way to refuse one with its line."""

from pathlib import Path

import numpy as np
import pytest

import axicfd
from axicfd.errors import InputError
from axicfd.variants.plan import read_plan

CASE = """\
[stream.oil]
fluid = "water"
inlet_temperature = "20 degC"
mass_flow = "2 g/s"

[[layer]]
stream = "oil"
diameter = "4 mm"

[[layer]]
name = "tube"
solid = "stainless steel 316"
thickness = "1 mm"

[[section]]
name = "heater"
length = "0.2 m"
outside = { heat_flux = "2 kW/m^2" }

[sensor.far]
z = "0.15 m"
at = "outside"
"""


@pytest.fixture
def write(tmp_path):
    """Writes a plan beside its case; gives its path."""
    (tmp_path / "oil.toml").write_text(CASE)

    def write(text: str, rows: str | None = None) -> Path:
        path = tmp_path / "plan.toml"
        path.write_text('case = "oil.toml"\n' + text)
        if rows is not None:
            (tmp_path / "variants.csv").write_text(rows)
        return path

    return write


def vary(key: str, rest: str) -> str:
    return f'\n[[vary]]\nkey = "{key}"\n{rest}\n'


FLOW = vary("stream.oil.mass_flow", 'values = ["1 g/s", "2 g/s", "4 g/s"]')


def changes(plan, key="stream.oil.mass_flow"):
    return [row.changes.get(key) for row in plan.rows]


def test_entries_make_a_grid_whose_first_key_changes_slowest(write):
    plan = read_plan(write(FLOW + vary("layer.tube.thickness", 'values = ["1 mm", "2 mm"]')))
    assert plan.keys == ("stream.oil.mass_flow", "layer.tube.thickness")
    assert [(row.number, *row.changes.values()) for row in plan.rows] == [
        (1, "1 g/s", "1 mm"),
        (2, "1 g/s", "2 mm"),
        (3, "2 g/s", "1 mm"),
        (4, "2 g/s", "2 mm"),
        (5, "4 g/s", "1 mm"),
        (6, "4 g/s", "2 mm"),
    ]
    assert plan.rows[5].case.stream["oil"].mass_flow == pytest.approx(0.004)
    assert plan.rows[5].case.layer[1].thickness == pytest.approx(0.002)
    assert plan.base == axicfd.load(CASE)


def test_ranges_step_evenly_or_by_a_factor_in_the_units_written(write):
    even = read_plan(write(vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "4 g/s"\ncount = 4')))
    assert changes(even) == ["1 g/s", "2 g/s", "3 g/s", "4 g/s"]
    log = read_plan(write(vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "100 g/s"\ncount = 3\nspacing = "log"')))
    assert changes(log) == ["1 g/s", "10 g/s", "100 g/s"]
    warm = read_plan(write(vary("stream.oil.inlet_temperature", 'from = "10 degC"\nto = "303.15 K"\ncount = 3')))
    assert changes(warm, "stream.oil.inlet_temperature") == ["10 degC", "20 degC", "303.15 K"]


def test_a_longer_range_meets_the_values_of_a_shorter_one(write):
    text = 'from = "0.7 g/s"\nto = "3.1 g/s"\ncount = '
    short = changes(read_plan(write(vary("stream.oil.mass_flow", text + "5"))))
    long = changes(read_plan(write(vary("stream.oil.mass_flow", text + "9"))))
    assert short == long[::2]


def test_entries_that_share_a_word_step_together(write):
    together = '\ntogether = "a"'
    plan = read_plan(
        write(
            vary("stream.oil.mass_flow", 'values = ["1 g/s", "2 g/s"]' + together)
            + vary("section.heater.outside.heat_flux", 'values = ["1 kW/m^2", "2 kW/m^2"]' + together)
            + vary("layer.tube.thickness", 'values = ["1 mm", "2 mm"]')
        )
    )
    assert [tuple(row.changes.values()) for row in plan.rows] == [
        ("1 g/s", "1 kW/m^2", "1 mm"),
        ("1 g/s", "1 kW/m^2", "2 mm"),
        ("2 g/s", "2 kW/m^2", "1 mm"),
        ("2 g/s", "2 kW/m^2", "2 mm"),
    ]


def test_a_sample_fills_the_ranges(write):
    text = 'sample = { kind = "latin hypercube", count = 20, seed = 3 }\n'
    text += vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "100 g/s"\nspacing = "log"')
    text += vary("layer.tube.thickness", 'from = "1 mm"\nto = "2 mm"')
    plan = read_plan(write(text))
    flows = np.sort([row.case.stream["oil"].mass_flow for row in plan.rows])
    assert np.floor(20 * np.log(flows / 1e-3) / np.log(100.0)).tolist() == list(range(20))  # one in each strip
    assert changes(read_plan(write(text))) == changes(plan)
    assert changes(read_plan(write(text.replace("seed = 3", "seed = 4")))) != changes(plan)


def test_rows_of_a_csv_file(write):
    rows = "stream.oil.mass_flow,layer.tube.thickness,mesh.radial\n1 g/s,2 mm,16\n4 g/s,,\n\n"
    plan = read_plan(write('rows = "variants.csv"\n', rows))
    assert plan.keys == ("stream.oil.mass_flow", "layer.tube.thickness", "mesh.radial")
    assert plan.rows[0].case.mesh.radial == 16
    assert dict(plan.rows[1].changes) == {"stream.oil.mass_flow": "4 g/s"}
    assert len(plan.rows) == 2


def test_a_programme_gives_tables_with_si_numbers():
    case = axicfd.load(CASE)
    plan = read_plan({"case": case, "vary": [{"key": "stream.oil.mass_flow", "from": 1e-3, "to": 3e-3, "count": 3}]})
    assert [row.case.stream["oil"].mass_flow for row in plan.rows] == pytest.approx([1e-3, 2e-3, 3e-3])
    plan = read_plan({"case": case, "rows": [{"layer.tube.thickness": "2 mm"}, {"layer.tube.thickness": 3e-3}]})
    assert [row.case.layer[1].thickness for row in plan.rows] == pytest.approx([2e-3, 3e-3])


def test_values_set_from_outside_change_the_base(write):
    plan = read_plan(write(FLOW), set={"layer.tube.thickness": "3 mm"})
    assert {row.case.layer[1].thickness for row in plan.rows} == {0.003}


BAD = [
    ("", 1, "varies nothing"),
    ("vari = 3\n" + FLOW, 2, "`vary`"),
    (vary("stream.oil.mas_flow", 'values = ["1 g/s"]'), 4, "`mass_flow`"),
    (vary("stream.oyl.mass_flow", 'values = ["1 g/s"]'), 4, "Write oil."),
    (vary("section.heeter.length", 'values = ["1 m"]'), 4, "Write heater."),
    (vary("section.heater", 'values = ["1 m"]'), 4, "whole section"),
    (vary("stream.oil.mass_flow", "values = []"), 5, "at least one value"),
    (vary("stream.oil.mass_flow", 'values = [\n"1 g/s",\n"2 m"]'), 7, "mass flow"),
    (vary("stream.oil.mass_flow", "values = [2]"), 5, "unit"),
    (vary("stream.oil.mass_flow", 'values = ["-1 g/s"]'), 5, "at least"),
    (vary("stream.oil.mass_flow", 'from = "1 g/s"\ncount = 3'), 3, "`vary.to`"),
    (vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "1000 mg/s"\ncount = 3'), 6, "range is empty"),
    (vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "2 g/s"'), 3, "count"),
    (vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "2 g/s"\ncount = 1'), 7, "from 2"),
    (vary("stream.oil.mass_flow", 'from = "0 g/s"\nto = "2 g/s"\ncount = 2\nspacing = "log"'), 5, "above zero"),
    (vary("stream.oil.mass_flow", 'from = "1 g/s"\nto = "2 g/s"\ncount = 2\nspacing = "logg"'), 8, '"log"'),
    (vary("stream.oil.mass_flow", 'values = ["1 g/s"]\nfrom = "1 g/s"'), 5, "beside"),
    (vary("stream.oil.fluid", 'from = "water"\nto = "air"\ncount = 2'), 5, "`values`"),
    (vary("stream.oil.mass_flow", 'values = ["1 g/s"]\ncuont = 3'), 6, "`count`"),
    (FLOW + FLOW, 8, "varied twice"),
    (
        vary("stream.oil.mass_flow", 'values = ["1 g/s", "2 g/s"]\ntogether = "a"')
        + vary("layer.tube.thickness", 'values = ["1 mm"]\ntogether = "a"'),
        11,
        "takes 1 values together with the 2 of",
    ),
    # rows that cannot be a case
    (vary("section.heater.length", 'values = ["0.2 m", "0.1 m"]'), 5, "in row 2"),
    (vary("stream.oil.mass_flow", 'values = ["1 g/s"]') + vary("stream.oil.reynolds", "values = [10]"), 9, "reynolds"),
    ('sample = { kind = "sobol", count = 3 }\n' + FLOW, 2, "latin hypercube"),
    ('sample = { kind = "latin hypercube", count = 0 }\n' + FLOW, 2, "from 1"),
    ('sample = { kind = "latin hypercube", count = 3 }\n' + FLOW, 6, "no meaning with `sample`"),
    ('rows = "variants.csv"\n' + FLOW, 4, "Keep one"),
    ('rows = "nowhere.csv"\n', 2, "cannot be read"),
    ("[[vary]\n", 2, "is not TOML"),
]


@pytest.mark.parametrize("text, line, words", BAD)
def test_a_bad_plan_is_refused_with_its_line(write, text, line, words):
    path = write(text)
    with pytest.raises(InputError) as found:
        read_plan(path)
    told = [mistake for mistake in found.value.mistakes if words in mistake.text]
    assert told, found.value
    assert all(mistake.file == str(path) for mistake in found.value.mistakes)
    assert (told[0].line or 1) == line, found.value


@pytest.mark.parametrize(
    "rows, line, words",
    [
        ("stream.oil.mas_flow\n1 g/s\n", 1, "`mass_flow`"),
        ("stream.oil.mass_flow,stream.oil.mass_flow\n1 g/s,1 g/s\n", 1, "twice"),
        ("stream.oil.mass_flow\n1 g/s\n2 m\n", 3, "mass flow"),
        ("stream.oil.mass_flow,layer.tube.thickness\n1 g/s\n", 2, "1 cells where the header has 2"),
        ("stream.oil.mass_flow;layer.tube.thickness\n1 g/s;1 mm\n", 1, "commas"),
        ("section.heater.length\n0.2 m\n0.1 m\n", 3, "sensor.far.z"),
        ("stream.oil.mass_flow\n", 2, "has no rows"),
    ],
)
def test_a_bad_row_is_refused_with_its_line(write, rows, line, words):
    path = write('rows = "variants.csv"\n', rows)
    with pytest.raises(InputError) as found:
        read_plan(path)
    (told,) = found.value.mistakes
    assert words in told.text and told.line == line
    assert told.file == str(path if "no rows" in words else path.parent / "variants.csv")


def test_a_case_given_as_a_plan_is_told(tmp_path):
    path = tmp_path / "oil.toml"
    path.write_text(CASE)
    with pytest.raises(InputError, match="is a case, not a plan"):
        read_plan(path)


def test_a_mistake_of_the_base_case_names_its_own_file(write):
    path = write(FLOW)
    (path.parent / "oil.toml").write_text(CASE.replace('"4 mm"', '"4"'))
    with pytest.raises(InputError, match=r"oil\.toml, line 8"):
        read_plan(path)


def test_the_same_mistake_of_many_rows_is_told_once(write):
    path = write(FLOW + vary("section.heater.length", 'values = ["0.1 m", "0.05 m"]'))
    with pytest.raises(InputError) as found:
        read_plan(path)
    assert len(found.value.mistakes) == 6  # each with the values of its row
    path = write(FLOW + vary("section.heater.length", 'values = ["0.2 m", "0 m"]'))
    with pytest.raises(InputError) as found:
        read_plan(path)
    assert [mistake.line for mistake in found.value.mistakes] == [9]
