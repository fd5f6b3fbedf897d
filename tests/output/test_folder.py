import json
from pathlib import Path

import numpy as np
import pytest

from axicfd.errors import ResultsFolderError
from axicfd.output import folder
from tests.output.made_up import made_up

FILES = {
    "summary.json",
    "case.toml",
    "axial-syrup.csv",
    "axial-syrup.half-width.csv",
    "outside.csv",
    "radial.csv",
    "fields.vtr",
    "fields.npz",
}


@pytest.fixture(scope="module")
def result():
    return made_up()


def test_everything_is_written_and_read_back(result, tmp_path):
    where = tmp_path / "missing" / "parents" / "syrup-results"
    folder.write(result, where)
    assert {path.name for path in where.iterdir()} == FILES
    stored = folder.read(where)
    assert stored.case == result.case
    assert stored.layout == result.layout
    assert stored.summary["stream"]["syrup"]["outlet_temperature_K"] == 329.35
    assert list(stored.axial["syrup"]) == list(result.axial["syrup"])
    for name, column in result.axial["syrup"].items():
        assert np.array_equal(stored.axial["syrup"][name], column, equal_nan=True)
    assert list(stored.axial_half_width["syrup"]) == list(result.axial["syrup"])
    for name, column in result.axial_half_width["syrup"].items():
        assert np.array_equal(stored.axial_half_width["syrup"][name], column, equal_nan=True)
    assert stored.summary["numerical_uncertainty"] == result.summary["numerical_uncertainty"]
    assert stored.summary["finest_mesh"]["stream"]["syrup"]["outlet_temperature_K"] == 329.41
    for name, value in result.fields.items():
        assert np.array_equal(stored.fields[name], value), name
    assert stored.radial["layer"] == result.radial["layer"]


def test_without_mesh_errors_there_is_no_file_of_them(tmp_path):
    folder.write(made_up(converged=False), tmp_path / "r")
    assert {path.name for path in (tmp_path / "r").iterdir()} == FILES - {"axial-syrup.half-width.csv"}
    assert folder.read(tmp_path / "r").axial_half_width == {}


def test_summary_holds_null_for_what_is_not_finite(result):
    summary = json.loads(folder.summary_text(result.summary))
    assert summary["balance"] == {"mass": 1e-16, "energy": None}
    assert summary["stream"]["syrup"]["reynolds"] == 1.3  # numpy numbers become plain ones


def test_an_existing_folder_needs_replace(result, tmp_path):
    where = tmp_path / "r"
    folder.write(result, where)
    (where / "temperature.png").write_bytes(b"old picture")
    with pytest.raises(ResultsFolderError, match="--replace"):
        folder.write(result, where)
    assert (where / "temperature.png").exists()
    folder.write(result, where, replace=True)
    assert {path.name for path in where.iterdir()} == FILES
    assert list(tmp_path.iterdir()) == [where]


def test_a_folder_of_other_files_is_never_replaced(result, tmp_path):
    (tmp_path / "thesis.txt").write_text("years of work")
    with pytest.raises(ResultsFolderError, match="other files"):
        folder.write(result, tmp_path, replace=True)
    assert (tmp_path / "thesis.txt").exists()


def test_a_file_in_the_way_is_named(result, tmp_path):
    path = tmp_path / "taken"
    path.write_text("")
    with pytest.raises(ResultsFolderError, match="not a folder"):
        folder.write(result, path, replace=True)


@pytest.mark.parametrize("fault", [KeyboardInterrupt, OSError])
def test_an_interruption_leaves_no_folder(result, tmp_path, monkeypatch, fault):
    def interrupted(path, *_):
        path.write_bytes(b"half")
        raise fault

    monkeypatch.setattr("axicfd.output.folder.vtr.write_fields", interrupted)
    with pytest.raises((KeyboardInterrupt, ResultsFolderError)):
        folder.write(result, tmp_path / "r")
    assert list(tmp_path.iterdir()) == []


def test_an_interruption_keeps_the_old_folder(result, tmp_path, monkeypatch):
    folder.write(result, tmp_path / "r")

    def interrupted(*_):
        raise KeyboardInterrupt

    monkeypatch.setattr("axicfd.output.folder.vtr.write_fields", interrupted)
    with pytest.raises(KeyboardInterrupt):
        folder.write(result, tmp_path / "r", replace=True)
    assert [path.name for path in tmp_path.iterdir()] == ["r"]
    assert folder.read(tmp_path / "r").summary["converged"]


def test_what_is_no_results_folder_is_said(tmp_path):
    with pytest.raises(ResultsFolderError, match="not a folder"):
        folder.read(Path("/nowhere/at/all"))
    with pytest.raises(ResultsFolderError, match="summary.json"):
        folder.read(tmp_path)


@pytest.mark.parametrize("name", sorted(FILES - {"fields.vtr", "case.toml"}))
def test_a_broken_file_is_named(result, tmp_path, name):
    where = tmp_path / "r"
    folder.write(result, where)
    (where / name).write_bytes(b"" if name.endswith("csv") else b"broken")
    with pytest.raises(ResultsFolderError, match=name):
        folder.read(where)


def test_spaces_in_names_become_dashes():
    assert folder.file_name("thick syrup") == "thick-syrup"


def test_a_place_that_cannot_be_written_to_is_said_before_the_solve(tmp_path, monkeypatch):
    monkeypatch.setattr("axicfd.output.folder.os.access", lambda *_: False)
    with pytest.raises(ResultsFolderError, match="cannot be written to"):
        folder.refuse_unusable(tmp_path / "missing" / "r", replace=False)
