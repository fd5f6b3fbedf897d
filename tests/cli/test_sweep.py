"""`axicfd sweep` and `axicfd draw` of its folder, as a user meets them; nothing is solved."""

import subprocess
import sys

import pytest

from axicfd.cli import app, exits
from axicfd.cli.progress import Rows, duration
from axicfd.variants.runner import REFUSED, SOLVED, Outcome
from axicfd.variants.sweep import Progress
from tests.output.made_up import TEXT

PLAN = """\
case = "syrup.toml"
[[vary]]
key = "stream.syrup.mean_velocity"
values = ["1 cm/s", "2 cm/s", "3 cm/s"]
"""


@pytest.fixture
def here(tmp_path, monkeypatch):
    """An empty folder to work in, with a case and a plan; what is solved is made up."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "syrup.toml").write_text(TEXT)
    (tmp_path / "plan.toml").write_text(PLAN)

    def run(jobs, on_done, *, keep, workers, executor):
        for job in jobs:
            velocity = job.case.stream["syrup"].mean_velocity
            if velocity > 0.025:
                on_done(Outcome(job.key, REFUSED, "too fast", None, 0.1))
                continue
            names = "stream.syrup.outlet_temperature_K", "stream.syrup.pressure_drop_Pa"
            found = {
                "values": dict.fromkeys(names, 300.0 + 100.0 * velocity),
                "half_widths": dict.fromkeys(names, 0.01),
                "limits": {},
                "cautions": ("reynolds",),
                "cells": 1000,
            }
            on_done(Outcome(job.key, SOLVED, "", found, 1.5))

    monkeypatch.setattr("axicfd.variants.sweep.run", run)
    monkeypatch.setattr("axicfd.solver.warm_up.is_cold", lambda: False)
    return tmp_path


def test_a_sweep_ends_with_0_and_tells_what_came_of_it(here, capsys):
    assert app.main(["sweep", "plan.toml"]) == exits.SOLVED
    told = capsys.readouterr()
    assert "3 rows: 2 solved, 1 refused" in " ".join(told.out.split())
    assert "row 3 refused: too fast" in told.out
    assert "28.85 ±0.01" in told.out and "syrup: mean velocity, cm/s" in " ".join(told.out.split())
    assert "3 of 3 rows   1 not solved" in told.err
    assert (here / "plan-results" / "sweep.csv").exists()
    assert app.main(["sweep", "plan.toml", "--out", "some/where"]) == exits.SOLVED
    assert (here / "some" / "where" / "sweep.sqlite").exists()


def test_a_sweep_is_drawn(here, capsys):
    app.main(["sweep", "plan.toml"])
    assert app.main(["draw", "plan-results"]) == exits.SOLVED
    assert (here / "plan-results" / "sweep.png").exists() and (here / "plan-results" / "table.txt").exists()


def test_a_bad_plan_ends_with_2_and_its_line(here, capsys):
    (here / "plan.toml").write_text(PLAN.replace("mean_velocity", "mean_velosity"))
    assert app.main(["sweep", "plan.toml"]) == exits.UNUSABLE
    assert "plan.toml, line 3: " in capsys.readouterr().err
    assert not (here / "plan-results").exists()


@pytest.mark.parametrize(
    "words, told",
    [
        (["--workers", "0"], "at least 1"),
        (["--workers", "2", "--cluster", "tcp://localhost:1"], "Leave one out"),
        (["--tls-ca", "ca.pem"], "go together"),
        (["--cluster", "tls://x:1", "--tls-ca", "a", "--tls-cert", "b", "--tls-key", "c"], "does not exist"),
        (["--set", "stream.syrup.mas_flow=1 g/s"], "mass_flow"),
    ],
)
def test_bad_options_are_told(here, capsys, words, told):
    assert app.main(["sweep", "plan.toml", *words]) == exits.UNUSABLE
    assert told in capsys.readouterr().err


def test_an_interruption_is_told_with_what_is_kept(here, capsys, monkeypatch):
    def interrupted(jobs, on_done, **options):
        raise KeyboardInterrupt

    monkeypatch.setattr("axicfd.variants.sweep.run", interrupted)
    assert app.main(["sweep", "plan.toml"]) == exits.INTERRUPTED
    assert "run again to go on" in capsys.readouterr().err


def test_missing_extras_are_asked_for(here, capsys, monkeypatch):
    monkeypatch.setitem(sys.modules, "distributed", None)
    assert app.main(["sweep", "plan.toml", "--cluster", "tcp://10.1.2.3:8786"]) == exits.UNUSABLE
    told = capsys.readouterr().err
    assert "axicfd[cluster]" in told and "warning: tcp://10.1.2.3:8786 is reached in plain" in told


def test_progress_is_one_line():
    line = Rows().line(Progress(done=1200, failed=3, rows=4000, seconds=60.0, left=150.0))
    assert line == "1 200 of 4 000 rows   3 not solved   2.5 min left"
    assert [duration(s) for s in (42.0, 150.0, 9000.0)] == ["42 s", "2.5 min", "2.5 h"]


def test_help_loads_nothing_heavy():
    code = "import sys; from axicfd.cli.app import main; main(['sweep', '--help']); print('numpy' in sys.modules)"
    told = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True).stdout
    assert told.splitlines()[-1] == "False"
