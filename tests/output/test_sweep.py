"""The folder of a sweep: what it holds, and that it is gone on with, begun anew or refused."""

import csv
import json
import os
import signal
import sqlite3
import subprocess
import sys
import time
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

import axicfd
from axicfd.errors import AxicfdError, ResultsFolderError
from axicfd.output import folder, sweep_figures, sweep_lines
from axicfd.output.sweep import read_sweep, sweep
from axicfd.output.sweep_store import SweepStore
from axicfd.variants import runner
from tests.variants.test_runner import BASE

THREAD = {"executor": lambda: ThreadPoolExecutor(1)}
FLOWS = {"key": "stream.water.reynolds", "values": [40.0, 60.0, 9000.0]}
FLUX = {"key": "section.all.outside.heat_flux", "values": [100.0, 200.0]}
OUTLET = "stream.water.outlet_temperature_K"


def table_of(path):
    with path.open(newline="") as file:
        return list(csv.DictReader(file))


@pytest.fixture(scope="module")
def grid(tmp_path_factory):
    """A sweep of six rows, two of them refused, in a folder."""
    return sweep({"case": BASE, "vary": [FLOWS, FLUX]}, tmp_path_factory.mktemp("sweep") / "made" / "here", **THREAD)


def test_the_table_has_a_row_per_variant(grid):
    rows = table_of(grid.folder / "sweep.csv")
    assert [row["status"] for row in rows] == ["solved"] * 4 + ["refused"] * 2
    assert [row["stream.water.reynolds"] for row in rows][:2] == ["40.0", "40.0"]
    assert [row["section.all.outside.heat_flux_W_m2"] for row in rows][:2] == ["100.0", "200.0"]
    assert float(rows[1][OUTLET]) > float(rows[0][OUTLET]) > 300.0
    assert float(rows[0][f"numerical_uncertainty.{OUTLET}"]) > 0.0
    assert rows[4][OUTLET] == "" and "9000" in rows[4]["message"]
    assert set(rows[0]) == set(grid.columns) and float(rows[0]["seconds"]) > 0.0


def test_the_folder_reads_back_as_the_table(grid):
    again = read_sweep(grid.folder)
    assert again.columns == grid.columns and again.base == grid.base
    assert (again.varied, again.units) == (grid.varied, grid.units)
    assert len(again) == 6 and again.counts == {"solved": 4, "refused": 2}
    assert again[OUTLET][4] is None
    with pytest.raises(AxicfdError, match="outlet_temperature_K"):
        again["stream.water.outlet_temprature_K"]


def test_run_again_it_computes_nothing(grid, monkeypatch):
    monkeypatch.setattr(runner, "solved", None)
    again = sweep({"case": BASE, "vary": [FLOWS, FLUX]}, grid.folder, **THREAD)
    assert again.columns == grid.columns
    smaller = sweep({"case": BASE, "vary": [FLOWS]}, grid.folder, **THREAD)  # the base has this flux
    assert smaller[OUTLET] == tuple(grid[OUTLET][i] for i in (0, 2, 4))
    sweep({"case": BASE, "vary": [FLOWS, FLUX]}, grid.folder, **THREAD)


def test_another_base_case_is_refused_or_begun_anew(tmp_path):
    plan = {"case": BASE, "vary": [FLOWS | {"values": [40.0]}]}
    other = {"case": BASE.replace({"layer.tube.thickness": 0.002}), "vary": plan["vary"]}
    first = sweep(plan, tmp_path, **THREAD)
    with pytest.raises(ResultsFolderError, match="another base case"):
        sweep(other, tmp_path, **THREAD)
    second = sweep(other, tmp_path, replace=True, **THREAD)
    assert second["layer.tube.hottest_K"] != first["layer.tube.hottest_K"]


def test_places_that_cannot_be_used_are_told(tmp_path):
    plan = {"case": BASE, "vary": [FLOWS]}
    (tmp_path / "file").write_text("")
    with pytest.raises(ResultsFolderError, match="not a folder"):
        sweep(plan, tmp_path / "file", **THREAD)
    with pytest.raises(ResultsFolderError, match="other files"):
        sweep(plan, tmp_path, **THREAD)
    (tmp_path / "broken").mkdir()
    (tmp_path / "broken" / "sweep.sqlite").write_text("this is no data base, and long enough to be read as one" * 30)
    with pytest.raises(ResultsFolderError, match="sweep.sqlite"):
        sweep(plan, tmp_path / "broken", **THREAD)
    assert len(sweep(plan, tmp_path / "broken", replace=True, **THREAD)) == 3
    with pytest.raises(ResultsFolderError, match="holds no sweep"):
        read_sweep(tmp_path)
    with pytest.raises(AxicfdError, match="needs a folder"):
        sweep(plan, keep_fields=True, **THREAD)


def test_a_store_that_breaks_meanwhile_is_told(tmp_path):
    with pytest.raises(ResultsFolderError, match="cannot use .*sweep.sqlite"):
        with SweepStore(tmp_path / "sweep.sqlite") as store:
            with sqlite3.connect(tmp_path / "sweep.sqlite") as other:
                other.execute("drop table plan")
            store.plan()


def test_an_interrupted_sweep_keeps_its_rows_and_its_table(tmp_path):
    def stop(event):
        if event.done == 1:
            raise KeyboardInterrupt

    plan = {"case": BASE, "vary": [FLOWS]}
    with pytest.raises(KeyboardInterrupt):
        sweep(plan, tmp_path, on_progress=stop, **THREAD)
    assert [row["status"] for row in table_of(tmp_path / "sweep.csv")] == ["solved", "", ""]
    events = []
    sweep(plan, tmp_path, on_progress=events.append, **THREAD)
    assert events[0].done == 1 and events[-1].done == 3


def test_whole_results_are_kept_where_asked(tmp_path):
    table = sweep({"case": BASE, "vary": [FLOWS]}, tmp_path, keep_fields=True, **THREAD)
    assert table["folder"][2] is None
    stored = folder.read(tmp_path / table["folder"][1])
    assert stored.case.stream["water"].reynolds == 60.0
    assert stored.summary["stream"]["water"]["outlet_temperature_K"] == table[OUTLET][1]


def test_in_memory_it_leaves_no_files(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    table = axicfd.sweep({"case": BASE, "vary": [FLOWS]}, **THREAD)
    assert table.folder is None and list(tmp_path.iterdir()) == []
    assert "2 solved, 1 refused" in repr(table)
    shown = table._repr_html_()
    assert "2 solved, 1 refused" in shown and "degC</th>" in shown and "±" in shown and "<td>40</td>" in shown
    assert json.loads(json.dumps(table.as_dict()))["status"] == ["solved", "solved", "refused"]


def test_the_extras_are_asked_for_by_name(grid, monkeypatch, tmp_path):
    monkeypatch.setitem(sys.modules, "pandas", None)
    monkeypatch.setitem(sys.modules, "pyarrow", None)
    for export in (grid.to_pandas, lambda: grid.to_parquet(tmp_path / "x.parquet")):
        with pytest.raises(AxicfdError, match=r"axicfd\[data\]"):
            export()


def test_the_table_becomes_a_data_frame_and_a_parquet_file(grid, tmp_path):
    pandas = pytest.importorskip("pandas")
    pytest.importorskip("pyarrow")
    frame = grid.to_pandas()
    assert list(frame.columns) == list(grid.columns) and frame[OUTLET][0] == grid[OUTLET][0]
    grid.to_parquet(tmp_path / "sweep.parquet")
    pandas.testing.assert_frame_equal(pandas.read_parquet(tmp_path / "sweep.parquet"), frame, check_dtype=False)


# ------------------------------------------------------------------------------------------- shown


def with_limits(table):
    """The table with made-up verdicts."""
    from dataclasses import replace

    verdicts = ("fail", "pass", "too close to call", "pass", None, None)
    return replace(table, columns={**table.columns, "limits.stream.water.outlet_temperature": verdicts})


def test_rows_within_their_limits_come_first(grid):
    rows = sweep_lines.sorted_rows(with_limits(grid))
    assert [row["row"] for row in rows] == [2, 4, 3, 1, 5, 6]
    header, lines = sweep_lines.header_and_lines(with_limits(grid))
    assert header[:3] == ["row", "water: reynolds", "all: heat flux, W/m²"] and header[-2:] == ["limits", "status"]
    assert [line[-2] for line in lines] == ["pass", "pass", "too close to call", "fail", "", ""]
    text = sweep_lines.as_text(header, lines)
    assert "±" in text and "refused: " in text


def test_a_limit_that_is_not_judged_is_not_passed():
    row = {"status": "solved", "limits.a": "pass", "limits.b": "not judged"}
    assert sweep_lines.verdict(row, ["limits.a", "limits.b"]) == "not judged"
    assert sweep_lines.verdict(row | {"limits.a": "fail"}, ["limits.a", "limits.b"]) == "fail"


def test_pictures_and_tables_are_written(grid, tmp_path):
    written = {path.name for path in sweep_figures.draw_all(with_limits(grid), tmp_path, ".svg")}
    assert written == {"sweep.svg", "table.txt", "passing.csv"}
    assert [row["row"] for row in table_of(tmp_path / "passing.csv")] == ["2", "4"]
    text = (tmp_path / "sweep.svg").read_text()
    assert "hottest wetted wall" in text and "refused" in text and "hatched: fails its limit" in text


def test_one_key_gives_curves_and_three_give_points():
    def titles(*vary):
        figure = sweep_figures.picture(sweep({"case": BASE, "vary": list(vary)}, **THREAD))
        return [axes.get_xlabel() for axes in figure.axes]

    assert set(titles(FLOWS | {"values": [40.0, 60.0]})) == {"water: reynolds"}
    thickness = {"key": "layer.tube.thickness", "values": [0.001, 0.002]}
    flow = FLOWS | {"values": [40.0, 60.0]}
    assert titles(flow, FLUX, thickness)[:3] == ["water: reynolds", "all: heat flux, W/m²", "tube: thickness, m"]


def test_rows_that_fail_a_limit_can_be_told_in_grey():
    """Open on a curve, ringed among scattered points; dots keep an edge, since the lightest nearly are the paper."""
    from dataclasses import replace

    def judged(*vary, **more):
        table = sweep({"case": BASE, "vary": list(vary), **more}, **THREAD)
        fails = ("fail", *("pass",) * (len(table) - 1))
        return replace(table, columns={**table.columns, "limits.stream.water.outlet_temperature": fails})

    curves = sweep_figures.picture(judged(FLOWS | {"values": [40.0, 60.0]}))
    assert any("open and red" in text.get_text() for text in curves.texts)
    assert [line.get_markerfacecolor() for line in curves.axes[0].lines if line.get_marker() == "o"][-1] == "white"
    flow, flux = ({"key": vary["key"], "from": low, "to": 2 * low} for vary, low in ((FLOWS, 40.0), (FLUX, 100.0)))
    points = sweep_figures.picture(judged(flow, flux, sample={"kind": "latin hypercube", "count": 4, "seed": 1}))
    assert any("ringed: fails its limit" in text.get_text() for text in points.texts)
    dots, rings = points.axes[0].collections
    assert len(dots.get_offsets()) == 4 and len(dots.get_edgecolors()) and len(rings.get_offsets()) == 1


def test_a_curve_names_the_keys_that_change_with_its_own():
    keys = (FLOWS | {"values": [40.0, 60.0], "together": "a"}, FLUX | {"together": "a"})
    figure = sweep_figures.picture(sweep({"case": BASE, "vary": list(keys)}, **THREAD))
    assert any("over water: reynolds, all: heat flux changing with it" in text.get_text() for text in figure.texts)


def test_axes_step_by_a_factor_where_the_values_do():
    assert sweep_figures._steps_by_factor([1.0, 2.0, 4.0, 8.0])
    assert not sweep_figures._steps_by_factor([1.0, 2.0, 3.0, 4.0])
    assert sweep_figures._edges(np.array([1.0, 2.0, 3.0])).tolist() == [0.5, 1.5, 2.5, 3.5]


# ------------------------------------------------------------------------------------------- killed

PLAN = """\
case = "base.toml"
[[vary]]
key = "stream.water.reynolds"
from = 10
to = 80
count = 30
"""


def children(pid):
    found = subprocess.run(["ps", "-o", "pid=", "--ppid", str(pid)], capture_output=True, text=True).stdout.split()
    return [int(child) for child in found if is_solving(int(child))]


def is_solving(pid):
    try:
        with open(f"/proc/{pid}/cmdline", "rb") as file:
            return b"spawn_main" in file.read()
    except OSError:
        return False


def finished(path):
    try:
        with sqlite3.connect(f"file:{path}?mode=ro", uri=True, timeout=30) as connection:
            return dict(connection.execute("select key, found from record"))
    except sqlite3.OperationalError:
        return {}


def wait_for(condition, process):
    begun = time.monotonic()
    while not condition():
        assert process.poll() is None and time.monotonic() - begun < 300.0
        time.sleep(0.02)


@pytest.mark.slow
@pytest.mark.skipif(not os.path.isdir("/proc/self"), reason="finds its processes in /proc")
def test_killed_workers_and_a_killed_sweep_lose_no_finished_row(tmp_path):
    from axicfd.case.write import to_toml

    (tmp_path / "base.toml").write_text(to_toml(BASE))
    (tmp_path / "plan.toml").write_text(PLAN)
    command = [sys.executable, "-m", "axicfd", "sweep", "plan.toml", "--out", "out", "--workers", "2"]
    store = tmp_path / "out" / "sweep.sqlite"
    here = {"cwd": tmp_path, "env": os.environ | {"PYTHONPATH": os.pathsep.join(filter(None, sys.path))}}
    process = subprocess.Popen(command, **here, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    for rows in (3, 8):
        wait_for(lambda rows=rows: len(finished(store)) >= rows and children(process.pid), process)
        os.kill(children(process.pid)[0], signal.SIGKILL)
    wait_for(lambda: len(finished(store)) >= 14, process)
    workers = children(process.pid)
    os.kill(process.pid, signal.SIGKILL)
    process.wait()
    before = finished(store)
    assert 14 <= len(before) < 30
    begun = time.monotonic()
    while any(is_solving(worker) for worker in workers):  # they end with their caller
        assert time.monotonic() - begun < 60.0
        time.sleep(0.1)
    assert subprocess.run(command, **here, capture_output=True).returncode == 0
    after = finished(store)
    assert len(after) == 30 and before.items() <= after.items()
    rows = table_of(tmp_path / "out" / "sweep.csv")
    assert [row["status"] for row in rows] == ["solved"] * 30
    again = subprocess.run(command, **here, capture_output=True, text=True)
    assert again.returncode == 0 and again.stderr.splitlines() == ["30 of 30 rows"]
    assert table_of(tmp_path / "out" / "sweep.csv") == rows
