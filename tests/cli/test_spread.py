"""`axicfd spread` as a user meets it."""

import json

import pytest

from axicfd.case.write import to_toml
from axicfd.cli.app import main
from tests.variants.test_spread import HEAT, case


@pytest.fixture
def file(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "line.toml").write_text(to_toml(case(heat=HEAT)), encoding="utf-8")
    return "line.toml"


@pytest.mark.parametrize(
    "words, said",
    [
        (["--set", "section.heater.outside.heat=80 W"], "no value of the case has a tolerance"),
        (["--count", "50"], "Add --full"),
        (["--full", "--count", "3"], "too few samples"),
        (["--workers", "0"], "at least 1"),
        (["--of", "stream.oil.colour"], "stream.oil.colour"),
        (["--set", "section.heater.outside.heat={ value = '80 W', std = '2 m' }"], "section.heater.outside.heat.std"),
    ],
)
def test_what_cannot_be_done_is_said_before_anything_is_solved(file, words, said, capsys):
    assert main(["spread", file, *words]) == 2
    assert said in capsys.readouterr().err


def test_an_existing_folder_is_kept(file, tmp_path, capsys):
    (tmp_path / "line-spread").mkdir()
    assert main(["spread", file]) == 2
    assert "--replace" in capsys.readouterr().err


@pytest.mark.slow
def test_the_answer_on_the_screen_and_as_json(file, tmp_path, capsys):
    assert main(["spread", file, "--of", "stream.oil.outlet_axis_temperature"]) == 0
    out = capsys.readouterr().out
    assert "heat (heater) 100 %" in out and "outlet temperature on the axis" in out and "ASME V&V 20-2009" in out
    assert main(["spread", file, "--replace", "--json"]) == 0
    tree = json.loads(capsys.readouterr().out)
    assert tree == json.loads((tmp_path / "line-spread" / "spread.json").read_text(encoding="utf-8"))
