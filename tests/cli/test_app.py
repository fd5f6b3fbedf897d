"""The command line as a user meets it, with the solve replaced by a made-up result."""

import json
import sys
from dataclasses import replace
from types import ModuleType

import pytest

from axicfd.cli import app, exits
from axicfd.errors import RefusedModel
from tests.output.made_up import TEXT, made_up


@pytest.fixture
def here(tmp_path, monkeypatch):
    """An empty folder to work in, with the made-up case in it."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "syrup.toml").write_text(TEXT)
    return tmp_path


@pytest.fixture
def solver(monkeypatch):
    """Stands in for the solve; what it does can be changed by a test."""
    pipeline = ModuleType("axicfd.pipeline")
    pipeline.cases = []

    def solve(case, on_progress=None):
        pipeline.cases.append(case)
        return pipeline.answer()

    pipeline.solve = solve
    pipeline.answer = made_up
    monkeypatch.setitem(sys.modules, "axicfd.pipeline", pipeline)
    return pipeline


def test_solve_writes_the_folder_and_prints_the_headline(here, solver, capsys):
    assert app.main(["solve", "syrup.toml"]) == exits.SOLVED
    assert (here / "syrup-results" / "summary.json").exists()
    out = capsys.readouterr().out
    assert "outlet temperature (bulk)" in out
    assert "56.20 degC" in out
    assert "at 1.4 m" in out
    assert "by hand" in out
    assert "Errors of properties and film coefficients are usually larger" in out
    assert "licensed practice" in " ".join(out.split())  # the wall is at 74 degC
    assert "Caution (outlet-not-developed)" in out


def test_the_folder_goes_where_it_is_asked(here, solver):
    assert app.main(["solve", "syrup.toml", "--out", "deep/er/place"]) == exits.SOLVED
    assert (here / "deep" / "er" / "place" / "fields.vtr").exists()


def test_an_existing_folder_is_said_before_the_solve(here, solver, capsys):
    app.main(["solve", "syrup.toml"])
    solver.cases.clear()
    assert app.main(["solve", "syrup.toml"]) == exits.UNUSABLE
    assert solver.cases == []
    assert "--replace" in capsys.readouterr().err
    assert app.main(["solve", "syrup.toml", "--replace"]) == exits.SOLVED


def test_json_prints_the_summary_alone(here, solver, capsys):
    app.main(["solve", "syrup.toml", "--json"])
    out = capsys.readouterr().out
    assert json.loads(out) == json.loads((here / "syrup-results" / "summary.json").read_text())


def test_set_changes_the_case(here, solver):
    assert app.main(["solve", "syrup.toml", "--set", "stream.syrup.mean_velocity=2 cm/s"]) == exits.SOLVED
    assert solver.cases[0].stream["syrup"].mean_velocity == pytest.approx(0.02)
    assert solver.cases[0].stream["syrup"].mass_flow is None


@pytest.mark.parametrize(
    "words, told",
    [
        (["--set", "stream.syrup.mass_flow"], "KEY=VALUE"),
        (["--set", "stream.syrup.mas_flow=3 g/s"], "mass_flow"),
        (["--set", "stream.syrup.mass_flow=3"], "unit"),
        (["--set", "title=a", "--set", "title=b"], "twice"),
        (["--nonsense"], "--help"),
    ],
)
def test_bad_options_are_told(here, solver, capsys, words, told):
    assert app.main(["solve", "syrup.toml", *words]) == exits.UNUSABLE
    captured = capsys.readouterr()
    assert told in captured.err
    assert "Traceback" not in captured.err
    assert not (here / "syrup-results").exists()


def test_set_values_are_toml_where_they_read_as_such(here, solver):
    words = ["--set", "mesh.radial=24", "--set", "physics.viscous_heating=false", "--set", "title=a = b"]
    assert app.main(["solve", "syrup.toml", *words]) == exits.SOLVED
    case = solver.cases[0]
    assert (case.mesh.radial, case.physics.viscous_heating, case.title) == (24, False, "a = b")


def test_what_did_not_converge_is_kept_and_marked(here, solver, capsys):
    solver.answer = lambda: made_up(converged=False)
    assert app.main(["solve", "syrup.toml"]) == exits.NOT_CONVERGED
    captured = capsys.readouterr()
    assert "NOT CONVERGED" in captured.out
    assert "not converged: residual 1.0e-02" in captured.err
    assert json.loads((here / "syrup-results" / "summary.json").read_text())["converged"] is False


def decided(limits=None, cautions=()):
    """A made-up result with other limits and cautions."""
    result = made_up()
    return replace(result, summary={**result.summary, "limits": limits or {}, "cautions": list(cautions)})


def limit(verdict, value=347.65, below=363.15, half=0.5):
    return {
        "stream.syrup.hottest_wetted_wall": {
            "value_K": value, "below_K": below, "margin_K": below - value, "half_width_K": half, "verdict": verdict,
        }
    }  # fmt: skip


CAUTION = {"code": "warm-end", "text": "the wall is warm", "checked": True}


@pytest.mark.parametrize(
    "answer, plain, strict, told",
    [
        (decided(), 0, 0, ""),
        (decided(limit("pass")), 0, 0, ""),
        (decided(limit("fail", below=340.0)), 3, 3, "1 limit failed: stream.syrup.hottest_wetted_wall"),
        (decided(limit("too close to call", below=347.5)), 0, 3, "1 limit not settled"),
        (decided(limit("not judged") | {}), 0, 3, "1 limit not settled"),
        (decided(cautions=[CAUTION]), 0, 3, "1 caution not accepted: warm-end"),
        (decided(cautions=[{**CAUTION, "checked": False}]), 0, 3, "1 caution not accepted: warm-end"),
        (decided(cautions=[{**CAUTION, "accepted": "seen on the rig"}]), 0, 0, ""),
    ],
)
def test_exit_statuses_of_limits_and_cautions(here, solver, capsys, answer, plain, strict, told):
    if "limits" in answer.summary:
        for entry in answer.summary["limits"].values():
            entry.setdefault("why", "there is no answer")
    solver.answer = lambda: answer
    assert app.main(["solve", "syrup.toml"]) == plain
    assert app.main(["solve", "syrup.toml", "--replace", "--strict"]) == strict
    assert told in capsys.readouterr().err


def test_no_convergence_and_refusal_come_before_limits(here, solver):
    failing = decided(limit("fail", below=340.0))
    solver.answer = lambda: replace(failing, summary={**failing.summary, "converged": False})
    assert app.main(["solve", "syrup.toml", "--strict"]) == exits.NOT_CONVERGED
    solver.answer = lambda: replace(failing, summary={**failing.summary, "refused": "Too fast."})
    assert app.main(["solve", "syrup.toml", "--strict", "--replace"]) == exits.UNUSABLE


def test_limits_and_accepted_cautions_are_printed(here, solver, capsys):
    accepted = {**CAUTION, "code": "copper-kind", "accepted": "checked with the mill"}
    solver.answer = lambda: decided(limit("pass"), [CAUTION, accepted])
    app.main(["solve", "syrup.toml"])
    out = capsys.readouterr().out
    assert "limit: hottest wetted wall below 90 degC: pass, margin 15.5 K (mesh ±0.5 K)" in out
    assert "Accepted (copper-kind): checked with the mill" in out and "Caution (warm-end)" in out


def test_an_interruption_leaves_nothing(here, solver, capsys):
    def interrupted():
        raise KeyboardInterrupt

    solver.answer = interrupted
    assert app.main(["solve", "syrup.toml"]) == exits.INTERRUPTED
    assert [path.name for path in here.iterdir()] == ["syrup.toml"]


def test_a_refused_model_is_told(here, solver, capsys):
    def refused():
        raise RefusedModel("Reynolds 5000 is not laminar.")

    solver.answer = refused
    assert app.main(["solve", "syrup.toml"]) == exits.UNUSABLE
    assert "error: Reynolds 5000 is not laminar." in capsys.readouterr().err


def test_a_fault_of_ours_shows_no_traceback(here, solver, capsys, monkeypatch):
    monkeypatch.delenv("AXICFD_TRACEBACK", raising=False)

    def broken():
        raise ZeroDivisionError("division by zero")

    solver.answer = broken
    assert app.main(["solve", "syrup.toml"]) == exits.UNUSABLE
    captured = capsys.readouterr()
    assert "a fault in axicfd itself" in captured.err
    assert "Traceback" not in captured.err


def test_all_cautions_only_when_verbose(here, solver, capsys):
    def many():
        result = made_up()
        cautions = [{**result.summary["cautions"][0], "code": f"caution-{i}"} for i in range(4)]
        return replace(result, summary={**result.summary, "cautions": cautions})

    solver.answer = many
    app.main(["solve", "syrup.toml"])
    out = capsys.readouterr().out
    assert "caution-1" in out and "caution-2" not in out
    assert "2 more with --verbose" in out
    app.main(["solve", "syrup.toml", "--replace", "--verbose"])
    out = capsys.readouterr().out
    assert "caution-3" in out
    assert "none (no uniform condition)" in out


def test_mesh_errors_are_shown_where_they_are_known(here, solver, capsys):
    app.main(["solve", "syrup.toml"])
    out = capsys.readouterr().out
    assert "±0.05 (mesh)" in out and "±12 (mesh)" in out
    assert "No mesh error is known" not in out
    solver.answer = lambda: made_up(converged=False)
    app.main(["solve", "syrup.toml", "--replace"])
    out = capsys.readouterr().out
    assert "(mesh)" not in out
    assert "No mesh error is known" in out


def test_draw_writes_pictures_into_the_folder(here, solver, capsys):
    app.main(["solve", "syrup.toml"])
    assert app.main(["draw", "syrup-results"]) == exits.SOLVED
    assert (here / "syrup-results" / "temperature.png").exists()
    assert (here / "syrup-results" / "axial-syrup.png").exists()
    assert app.main(["draw", "syrup-results", "--format", "svg"]) == exits.SOLVED
    assert app.main(["draw", "nowhere"]) == exits.UNUSABLE


@pytest.mark.parametrize("command", app.LATER)
def test_later_commands_are_refused_by_name(capsys, command):
    assert app.main([command, "x.toml"]) == exits.UNUSABLE
    assert "not available yet" in capsys.readouterr().err


def test_a_misspelt_command_is_mended(capsys):
    assert app.main(["slove", "x.toml"]) == exits.UNUSABLE
    assert "axicfd solve" in capsys.readouterr().err


@pytest.mark.parametrize("words", [["solve"], ["draw"], ["solve", "a.toml", "b.toml"], []])
def test_usage_errors_end_with_2(capsys, words):
    assert app.main(words) == exits.UNUSABLE


def test_a_missing_case_is_named(here, capsys):
    assert app.main(["solve", "hetaer.toml"]) == exits.UNUSABLE
    assert "hetaer.toml" in capsys.readouterr().err


def test_every_mistake_of_a_case_has_its_line(here, capsys):
    (here / "bad.toml").write_text(TEXT.replace('"12 mm"', '"12"').replace('"1.2 m"', '"-1.2 m"'))
    assert app.main(["check", "bad.toml"]) == exits.UNUSABLE
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 2
    assert all(line.startswith("error: bad.toml, line ") for line in lines)


def test_keys_and_materials_are_listed(capsys):
    assert app.main(["keys"]) == exits.SOLVED
    out = capsys.readouterr().out
    assert "section.NAME.outside.film_coefficient" in out
    assert "not available yet" in out
    assert app.main(["keys", "stream.oil.mass_flow"]) == exits.SOLVED
    assert "4 g/s" in capsys.readouterr().out
    assert app.main(["keys", "stream.oil.mass_flw"]) == exits.UNUSABLE
    assert app.main(["materials"]) == exits.SOLVED
    assert "stainless steel 316" in capsys.readouterr().out
    assert app.main(["materials", "water"]) == exits.SOLVED
    assert "source: " in capsys.readouterr().out
    assert app.main(["materials", "watre"]) == exits.UNUSABLE
    assert '"water"' in capsys.readouterr().err
