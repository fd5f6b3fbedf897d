"""The commands `wall` and `matters` as a user meets them."""

import json

import pytest

from axicfd.cli import app, exits
from tests.variants.tubes import TEXT, effect


@pytest.fixture
def here(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "tube.toml").write_text(TEXT, encoding="utf-8")
    return tmp_path


def test_wall_prints_verdicts_and_writes_its_folder(here, capsys):
    assert app.main(["wall", "tube.toml", "--care", "1 %"]) == exits.SOLVED
    out = " ".join(capsys.readouterr().out.split())
    assert "Radial resistance of the wall may be left out" in out
    assert "Axial conduction in the wall" in out and "keep it" in out
    assert "axial conduction number" in out and "Maranzana" in out
    assert (here / "tube-wall" / "wall.csv").exists()
    # an existing folder is refused before anything is solved, and replaced when asked
    assert app.main(["wall", "tube.toml"]) == exits.UNUSABLE
    assert "--replace" in capsys.readouterr().err
    assert app.main(["wall", "tube.toml", "--replace", "--layer", "tube", "--json"]) == exits.SOLVED
    assert json.loads(capsys.readouterr().out)["layer"] == "tube"


def test_only_a_folder_of_the_same_kind_is_replaced(here, capsys):
    (here / "mine").mkdir()
    (here / "mine" / "letter.txt").write_text("mine")
    assert app.main(["wall", "tube.toml", "--out", "mine", "--replace"]) == exits.UNUSABLE
    assert "wall.json" in capsys.readouterr().err and (here / "mine" / "letter.txt").exists()


@pytest.mark.parametrize(
    "words, said",
    [
        (["--care", "much"], "Write an amount"),
        (["--layer", "liner"], "There are: tube"),
        (["--set", "stream.liquid.mean_velocity=0 m/s", "--set", 'ends.first.temperature="20 degC"'], "Nothing flows"),
    ],
)
def test_what_has_no_answer_is_refused_in_a_sentence(here, capsys, words, said):
    assert app.main(["wall", "tube.toml", *words]) == exits.UNUSABLE
    err = capsys.readouterr().err
    assert said in err and "Traceback" not in err
    assert not (here / "tube-wall").exists()


def test_matters_prints_what_is_absent_too(here, capsys):
    assert app.main(["matters", "tube.toml"]) == exits.SOLVED
    out = " ".join(capsys.readouterr().out.split())
    assert "Axial conduction in the fluid" in out
    assert "Buoyancy: it is not in the model yet." in out and "Property variation: all properties are constants." in out
    tree = json.loads((here / "tube-matters" / "matters.json").read_text(encoding="utf-8"))
    assert tree["left_out"]["viscous heating"] == "it is switched off in the case"


def test_progress_names_the_variant(here, capsys):
    app.main(["wall", "tube.toml"])
    lines = capsys.readouterr().err.splitlines()
    assert [line.split("   ")[0] for line in lines] == ["in full", "radial resistance only", "no wall"]


def test_without_convergence_there_is_no_verdict(here, capsys, monkeypatch):
    from dataclasses import replace

    from axicfd.variants import wall

    def broken(case, on_progress=None, **more):
        result = solve(case, on_progress, **more)
        return replace(result, summary=result.summary | {"converged": False})

    solve = wall.solve
    monkeypatch.setattr(wall, "solve", broken)
    assert app.main(["wall", "tube.toml"]) == exits.NOT_CONVERGED
    out = " ".join(capsys.readouterr().out.split())
    assert "cannot tell, since the solve of" in out and "keep it" not in out


def test_a_variant_beyond_its_properties_is_said_and_a_case_beyond_them_is_unusable(here, capsys):
    """A table of viscosity to 26 degC: the wall in full stays below it, with radial resistance only it does not."""
    hot = [layer["hottest_K"] for layer in (r.summary["layer"]["tube"] for r in list(effect().results.values())[:2])]
    assert hot[1] > hot[0] + 0.2
    for limit, status, words in (
        ((hot[0] + hot[1]) / 2, exits.SOLVED, "Mind, radial resistance only:"),
        (hot[0] - 0.5, exits.UNUSABLE, "Mind, in full:"),
    ):
        law = f'viscosity = {{ temperature = ["280 K", "{limit} K"], value = ["50 mPa s", "50 mPa s"] }}'
        (here / "tube.toml").write_text(TEXT.replace('viscosity     = "50 mPa s"', law), encoding="utf-8")
        assert app.main(["wall", "tube.toml", "--replace"]) == status
        assert words in " ".join(capsys.readouterr().out.split())
