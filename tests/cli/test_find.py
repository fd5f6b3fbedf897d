"""The commands `find` and `compare` as a user meets them."""

import json

import pytest

from axicfd.case.read import load
from axicfd.cli import app, exits
from axicfd.output import csv
from tests.variants.tubes import TEXT

FIND = ["find", "tube.toml", "--change", "section.heated.outside.heat_flux", "--until"]
OUTLET = "stream.liquid.outlet_temperature"


@pytest.fixture
def here(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "tube.toml").write_text(TEXT, encoding="utf-8")
    return tmp_path


def test_find_prints_the_answer_and_writes_its_folder(here, capsys):
    assert app.main([*FIND, f"{OUTLET} = 25 degC"]) == exits.SOLVED
    said = capsys.readouterr()
    out = " ".join(said.out.split())
    assert "section.heated.outside.heat_flux = " in out and f"gives {OUTLET} = 25" in out
    assert "on a coarse mesh" in out and '--set "section.heated.outside.heat_flux=' in out
    assert "solve 1   section.heated.outside.heat_flux" in said.err
    tree = json.loads((here / "tube-find" / "find.json").read_text())
    assert len(csv.read_columns(here / "tube-find" / "looks.csv")["why"]) == len(tree["looks"])
    found = load(here / "tube-find" / "found" / "case.toml")
    value = tree["answers"][0]["inputs"]["section.heated.outside.heat_flux"]["value"]
    assert found.section[1].outside.heat_flux == pytest.approx(value, rel=1e-8)
    # an existing folder is refused before anything is solved
    assert app.main([*FIND, f"{OUTLET} = 25 degC"]) == exits.UNUSABLE
    assert "--replace" in capsys.readouterr().err


def test_no_answer_has_its_exit_status_and_keeps_the_looks(here, capsys):
    words = [*FIND, f"{OUTLET} = 15 degC", "--between", "1 W/m^2", "1 kW/m^2", "--json"]
    assert app.main(words) == exits.NOT_CONVERGED
    assert "goes no lower than" in json.loads(capsys.readouterr().out)["why"]
    assert (here / "tube-find" / "looks.csv").exists()


@pytest.mark.parametrize(
    "words, said",
    [
        ([*FIND, "outlet = 25 degC"], "names no quantity"),
        ([*FIND, f"{OUTLET} = 25"], 'Write "25 degC"'),
        ([*FIND, f"{OUTLET} = 25 degC", "--between", "1", "2"], "heat flux"),
        (["find", "tube.toml", "--until", "x = 1"], "--change"),
        (["compare", "tube.toml", "tube.toml"], "is not a folder"),
    ],
)
def test_bad_words_are_refused(here, capsys, words, said):
    assert app.main(words) == exits.UNUSABLE
    assert said in capsys.readouterr().err
    assert not (here / "tube-find").exists()


def test_compare_shows_two_folders(here, capsys):
    app.main(["solve", "tube.toml", "--out", "a"])
    app.main(["solve", "tube.toml", "--out", "b", "--set", "section.heated.outside.heat_flux=2 kW/m^2"])
    capsys.readouterr()
    assert app.main(["compare", "a", "b", "--out", "c"]) == exits.SOLVED
    out = " ".join(capsys.readouterr().out.split())
    assert "section.heated.outside.heat_flux 1 kW/m^2 2 kW/m^2" in out
    assert "not told apart" in out  # the pressure drop does not know of the heat
    assert (here / "c" / "compare.csv").exists()
    assert app.main(["compare", "a", "a", "--json"]) == exits.SOLVED
    assert json.loads(capsys.readouterr().out)["inputs"] == []
