"""Two results side by side, on made-up ones and on their folders."""

import copy
import json
from dataclasses import replace

import pytest

from axicfd.errors import ResultsFolderError
from axicfd.output import comparison, csv, folder
from axicfd.output.comparison import compare
from tests.output.made_up import made_up

OUTLET = "stream.syrup.outlet_temperature"


def other(kelvin: float, half_width: float | None = 0.05, **changes):
    """The made-up result with another outlet temperature and inputs; a half-width for it in both."""
    result = made_up()
    summary = copy.deepcopy(result.summary)
    summary["stream"]["syrup"]["outlet_temperature_K"] += kelvin
    summary.pop("numerical_uncertainty", None)
    if half_width is not None:
        summary["numerical_uncertainty"] = {"stream": {"syrup": {"outlet_temperature_K": half_width}}}
    return replace(result, summary=summary, case=result.case.replace(changes))


def row(found, path=OUTLET):
    return next(row for row in found.rows if row.of.path == path)


def test_half_widths_add_up():
    found = row(compare(other(0.0), other(0.2)))
    assert found.difference == pytest.approx(0.2)
    assert found.half_width == pytest.approx(0.1)
    assert found.told_apart is True


@pytest.mark.parametrize("kelvin, told", [(0.099, False), (-0.099, False), (0.101, True), (-0.101, True)])
def test_differences_within_both_half_widths_are_not_told_apart(kelvin, told):
    assert row(compare(other(0.0), other(kelvin))).told_apart is told


def test_without_mesh_errors_nothing_is_told_apart():
    found = compare(other(0.0, None), other(5.0, None))
    assert all(r.told_apart is None for r in found.rows)
    assert "cannot be judged" in " ".join(comparison.sentences(found))


def test_inputs_that_differ_are_listed_whatever_their_units():
    found = compare(
        other(0.0, **{"stream.syrup.inlet_temperature": "293.15 K"}),
        other(0.0, **{"stream.syrup.inlet_temperature": "20 degC", "stream.syrup.reynolds": 3.0}),
    )
    assert [path for path, _, _ in found.inputs] == ["stream.syrup.mass_flow", "stream.syrup.reynolds"]
    assert found.inputs[0][2] is None and found.inputs[1][1:] == (None, 3.0)


def test_a_default_written_out_is_no_difference():
    assert compare(other(0.0), other(0.0, **{"stream.syrup.outlet_pressure": "1 atm"})).inputs == ()


def test_folders_and_results_give_the_same(tmp_path):
    for name, kelvin in ("a", 0.0), ("b", 0.2):
        folder.write(other(kelvin), tmp_path / name)
    found = compare(tmp_path / "a", str(tmp_path / "b"))
    assert found.names == (str(tmp_path / "a"), str(tmp_path / "b"))
    assert found.rows == compare(other(0.0), other(0.2)).rows and not found.inputs


def test_it_shows_itself_and_converts(tmp_path):
    found = compare(other(0.0), other(0.2))
    assert "1 of" in repr(found)
    _, body = comparison.quantity_rows(found)
    assert any(line[-2] == "+0.2 ±0.1 K" for line in body), body
    assert "<table>" in comparison.html(found)
    comparison.write(found, tmp_path / "out")
    tree = json.loads((tmp_path / "out" / "compare.json").read_text())
    assert next(q for q in tree["quantities"] if q["path"] == OUTLET)["told_apart"] is True
    table = csv.read_columns(tmp_path / "out" / "compare.csv")
    assert table["told_apart"][table["quantity"].index(OUTLET)] == "yes"


def test_what_did_not_converge_is_said():
    result = other(0.0)
    found = compare(result, replace(result, summary={**result.summary, "converged": False}))
    assert any("did not converge" in text for text in comparison.sentences(found))


def test_no_folder_is_said(tmp_path):
    with pytest.raises(ResultsFolderError, match="is not a folder"):
        compare(tmp_path / "none", tmp_path / "none")
