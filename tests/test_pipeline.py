"""From a case to a result: the climb over meshes, what is told on the way, and what a Result is."""

import dataclasses
import pickle

import numpy as np
import pytest

import axicfd
from axicfd.errors import RefusedModel
from axicfd.mesh import build
from axicfd.pipeline import Progress, solve
from tests.laws import tubes

MESH = "[mesh]\nradial = 16\naxial = 96\n"


@pytest.fixture(scope="module")
def told() -> list[Progress]:
    return []


@pytest.fixture(scope="module")
def result(told):
    return solve(axicfd.load(tubes.text(rest=MESH, viscous=True)), told.append)


def test_the_name_of_a_file_is_no_case():
    for take in (axicfd.solve, axicfd.wall_effect, axicfd.what_matters, axicfd.spread):
        with pytest.raises(axicfd.AxicfdError, match=r'is str, not a Case\. Write axicfd\.load\("tube\.toml"\)'):
            take("tube.toml")
    with pytest.raises(axicfd.AxicfdError, match="not a Case"):
        axicfd.find("tube.toml", "section.all.length", "stream.oil.outlet_temperature = 60 degC")


def test_meshes_are_climbed_from_coarse_to_fine(result, told):
    cells = [cells for _, cells, _, _ in result.history]
    assert cells == sorted(cells) and len(set(cells)) > 1
    assert cells[-1] == result.summary["cells"] == result.solution.grid.cells
    done = [event for event in told if event.done]
    assert [e.level for e in done] == list(range(1, done[-1].levels + 1))
    assert [e.cells for e in done] == cells
    assert all(a.seconds <= b.seconds for a, b in zip(told[:-1], told[1:], strict=True))


def test_progress_tells_headline_quantities_once_known(result, told):
    assert told[0].outlet_temperature is None and told[0].pressure_drop is None
    stream = result.summary["stream"]["water"]  # extrapolated once three meshes tell how
    assert told[-1].outlet_temperature == stream["outlet_temperature_K"]
    assert told[-1].pressure_drop == stream["pressure_drop_Pa"]
    bars = [event.drop_half_width for event in told if event.done]
    assert bars[:3] == [None] * 3 and bars[3] > bars[4] > 0.0
    assert told[-1].residual < 1e-8


def test_result_is_read_only(result):
    with pytest.raises(dataclasses.FrozenInstanceError):
        result.summary = {}
    for array in (result.axial["water"]["z_m"], result.outside["z_m"], result.fields["T"]):
        with pytest.raises(ValueError):
            array[0] = 1.0


def test_quantities_by_their_path(result):
    assert result["stream.water.outlet_temperature_K"] == result.summary["stream"]["water"]["outlet_temperature_K"]
    assert result["section.heater.heat_in_W"] == pytest.approx(5.0)
    assert result["stream.water.outlet_temperature"] == result["stream.water.outlet_temperature_K"]
    assert result["balance.energy"] == result.summary["balance"]["energy"]
    for wrong in ("stream.water.colour", "balance.heat", "a..b"):
        with pytest.raises(KeyError):
            result[wrong]
    with pytest.raises(axicfd.AxicfdError, match="Write stream.water.outlet_temperature") as error:
        result["stream.water.outlet_temprature"]
    assert pickle.loads(pickle.dumps(error.value)).mistakes == error.value.mistakes


def test_axial_curves_have_the_promised_columns(result):
    assert list(result.axial["water"]) == [
        "z_m",
        "bulk_temperature_K",
        "wetted_wall_temperature_K",
        "wall_heat_flux_W_m2",
        "heat_transfer_coefficient_W_m2K",
        "nusselt",
        "pressure_Pa",
        "friction_factor_darcy",
        "wall_shear_stress_Pa",
        "axis_velocity_m_s",
        "peak_velocity_m_s",
        "apparent_friction_factor",
        "axial_conduction_W",
        "reverse",
    ]
    assert {len(column) for column in result.axial["water"].values()} == {result.solution.grid.nz + 1}


def pairs(values, widths, path=""):
    """(dotted path, value, half-width or None) of all numbers of a tree."""
    for key, value in values.items():
        width = (widths or {}).get(key)
        if isinstance(value, dict):
            yield from pairs(value, width, f"{path}{key}.")
        elif key != "why" and isinstance(value, int | float):
            yield f"{path}{key}", value, width


PARTS = "stream", "layer", "section", "sensor"


def test_every_headline_quantity_has_a_mesh_error(result):
    bars = result.summary["numerical_uncertainty"]
    found = list(pairs({part: result.summary[part] for part in PARTS}, bars))
    assert len(found) > 25
    for path, _, width in found:
        assert width is not None and width >= 0.0, path
    rules = bars["rule"]["stream"]["water"]
    assert rules["pressure_drop_Pa"] == "extrapolated" and rules["mass_flow_kg_s"] == "exact"
    assert bars["observed_order"]["stream"]["water"]["pressure_drop_Pa"] == pytest.approx(2.0, abs=0.3)


def test_printed_values_stay_within_their_mesh_error_of_a_finer_solve(result):
    """The finer solve's own extrapolated values are some sixteen times nearer to the limit."""
    finer = solve(result.case, halvings=1)
    widths = result.summary["numerical_uncertainty"]
    missed = [
        path
        for path, value, width in pairs({part: result.summary[part] for part in PARTS}, widths)
        if abs(value - finer[path]) > width + 1e-9 * abs(value)
    ]
    assert missed == []


def test_curves_and_fields_are_those_of_the_finest_mesh(result):
    finest = result.summary["finest_mesh"]["stream"]["water"]
    assert result.axial["water"]["bulk_temperature_K"][-1] == finest["outlet_temperature_K"]
    assert finest["pressure_drop_Pa"] != result["stream.water.pressure_drop_Pa"]


def test_curves_have_half_widths_in_the_same_columns(result):
    curves, widths = result.axial["water"], result.axial_half_width["water"]
    assert list(widths) == list(curves)
    np.testing.assert_array_equal(widths["z_m"], curves["z_m"])
    assert np.isnan(widths["reverse"]).all()
    for name in "bulk_temperature_K", "pressure_Pa", "axis_velocity_m_s":
        assert np.all(widths[name][1:] >= 0.0)
        assert widths[name][1:].max() < 0.05 * np.ptp(curves[name][1:]), name
    with pytest.raises(ValueError):
        widths["pressure_Pa"][0] = 1.0


def test_one_halving_more_changes_little_and_quadruples_the_cells(result):
    finer = solve(result.case, halvings=1)
    assert finer.summary["cells"] == 4 * result.summary["cells"]
    rise = result["stream.water.outlet_temperature_K"] - 293.15
    change = finer["stream.water.outlet_temperature_K"] - result["stream.water.outlet_temperature_K"]
    assert 0.0 < abs(change) < 0.01 * rise


def test_twice_the_iterations_change_nothing_that_is_printed(result):
    """Solved on to a residual far below the case's own, printed values stay within 1e-6 of their scale."""
    further = solve(result.case.replace({"solve.stop_below": 1e-11}))
    assert further.summary["residual"] < 1e-10
    for key, scale in ("outlet_temperature_K", 30.0), ("pressure_drop_Pa", None), ("hottest_wetted_wall_K", 30.0):
        a, b = (r.summary["stream"]["water"][key] for r in (result, further))
        assert abs(a - b) < 1e-6 * (scale or abs(b)), key


def test_same_case_same_numbers(result):
    again = solve(result.case)
    np.testing.assert_array_equal(again.fields["T"], result.fields["T"])


def test_no_flow_is_conduction(result):
    still = solve(result.case.replace({"stream.water.mass_flow": 0.0}))
    assert still.converged
    assert still.summary["stream"]["water"]["mass_flow_kg_s"] == 0.0
    assert still.summary["balance"]["energy"] < 1e-10
    assert np.isnan(still.axial["water"]["bulk_temperature_K"]).all()


def test_turbulent_flow_is_refused_before_anything_is_solved():
    events: list[Progress] = []
    case = axicfd.load(tubes.text("reynolds = 9000", rest=MESH))
    with pytest.raises(RefusedModel, match="9000"):
        solve(case, events.append)
    assert not events


def test_without_convergence_the_fields_are_kept_and_marked(monkeypatch):
    from axicfd.solver import convergence

    monkeypatch.setattr(convergence, "PATIENCE", 1)
    case = axicfd.load(tubes.text(rest=MESH + "[solve]\nstop_below = 1e-13\n"))
    found = solve(case)
    assert not found.converged and found.summary["converged"] is False
    assert found.summary["stop_reason"] == "no further progress"
    assert "numerical_uncertainty" not in found.summary and "finest_mesh" not in found.summary
    assert found.axial_half_width == {}
    assert np.isfinite(found.fields["T"]).all()
    assert "not converged" in repr(found)


def test_a_coarse_mesh_that_does_not_converge_leaves_the_mesh_errors_of_the_three_finest(monkeypatch):
    from axicfd import pipeline

    solve_on, solved = pipeline.solve_on, []

    def stalls_on_the_second(*arguments, **more):
        solved.append(solve_on(*arguments, **more))
        return dataclasses.replace(solved[-1], stop_reason="no further progress") if len(solved) == 2 else solved[-1]

    monkeypatch.setattr(pipeline, "solve_on", stalls_on_the_second)
    found = solve(axicfd.load(tubes.text(rest=MESH)))
    assert found.converged and len(found.nested) == 3
    assert "numerical_uncertainty" in found.summary


@pytest.mark.parametrize("mesh", ["at_most = 1000", "radial = 8\naxial = 8"])
def test_the_smallest_meshes_get_through(mesh):
    """Their coarsest ones have one cell along z, or diverge; that used to stop the climb, or end in an IndexError."""
    result = solve(axicfd.load(tubes.text(rest=f"[mesh]\n{mesh}\n", viscous=True)))
    assert result.converged
    assert abs(result["balance.energy"]) < 1e-8


@pytest.mark.parametrize(
    ("outside", "bath"),
    [
        ('film_coefficient = "10 W/m^2/K", ambient = "80 degC"', 60.0),
        ('temperature = "20 degC"', 0.0),
    ],
)
def test_a_tube_at_rest_that_starts_from_its_answer(outside, bath):
    """No step is needed then. The residual used to be reported as infinite, and the balance to be 1 of no heat."""
    text = f"""
[stream.water]
fluid = "water"
inlet_temperature = "20 degC"
mass_flow = "0 g/s"

[[layer]]
stream = "water"
diameter = "2 mm"

[[section]]
name = "bath"
length = "50 mm"
outside = {{ {outside} }}

[mesh]
radial = 8
axial = 48
"""
    result = solve(axicfd.load(text))
    assert result.fields["T"] == pytest.approx(bath, abs=1e-9)
    assert result.converged and result.summary["residual"] < 1e-8
    assert (result["balance.energy"] or 0.0) < 1e-8


def uneven(tmp_path, profile: str):
    """A line whose first section lies in a void and that is heated in its second."""
    (tmp_path / "slug.csv").write_text("r_m,velocity,temperature_K\n0,1,293.15\n0.001,1,293.15\n", encoding="utf-8")
    path = tmp_path / "line.toml"
    path.write_text(
        f"""
[stream.water]
fluid = "water"
inlet_temperature = "20 degC"
mass_flow = "0.5 g/s"
inlet_profile = {profile}

[[section]]
name = "held"
length = "30 mm"
outside = {{ insulated = true }}
layer = [
    {{ stream = "water", diameter = "2 mm" }},
    {{ name = "line", solid = "ptfe", thickness = "0.3 mm" }},
    {{ name = "air", void = true, thickness = "1 mm" }},
]

[[section]]
name = "cooled"
length = "30 mm"
outside = {{ temperature = "5 degC", contact_resistance = "1e-3 m^2 K/W" }}
layer = [
    {{ stream = "water", diameter = "2 mm" }},
    {{ name = "line", solid = "ptfe", thickness = "0.3 mm" }},
]

[mesh]
radial = 16
axial = 96
""",
        encoding="utf-8",
    )
    return solve(axicfd.load(path))


def test_the_outside_of_a_void_has_no_temperature(tmp_path):
    """It used to be shown at the inlet temperature."""
    outside = uneven(tmp_path, '"flat"').outside
    behind = outside["z_m"] > 0.03 + 1e-9
    assert np.isnan(outside["temperature_K"][~behind]).all()
    assert (outside["temperature_K"][behind] < 293.15).all()


def test_a_slug_from_a_file_is_a_flat_inlet(tmp_path):
    """The wall's corner is singular either way: no shear, no friction there. A file used to be taken as smooth."""
    plain, read = (uneven(tmp_path, profile) for profile in ('"flat"', '{ file = "slug.csv" }'))
    for column in ("wall_shear_stress_Pa", "apparent_friction_factor", "pressure_Pa", "nusselt"):
        np.testing.assert_allclose(read.axial["water"][column], plain.axial["water"][column], rtol=1e-6)
    near = plain.axial["water"]["z_m"] < 0.5 * 2e-3
    assert np.isnan(plain.axial["water"]["apparent_friction_factor"][near]).all()
    key = "stream.water.largest_wall_shear_stress_Pa"
    assert read[key] == pytest.approx(plain[key], rel=1e-6)


def test_errors_of_the_two_directions_are_told_apart(result):
    """Their sum is the correction that extrapolation makes; second order is exact only in the limit."""
    bars = result.summary["numerical_uncertainty"]
    r, z = (bars[word]["stream"]["water"]["pressure_drop_Pa"] for word in ("from_r", "from_z"))
    path = "stream.water.pressure_drop_Pa"
    assert r + z == pytest.approx(result["finest_mesh." + path] - result[path], rel=0.3)


@pytest.fixture
def coarse(monkeypatch):
    """The tool's own first mesh is small."""
    monkeypatch.setattr(build, "CELLS", 3000)


def test_the_mesh_is_refined_until_the_accuracy_is_reached(coarse):
    asked = axicfd.load(tubes.text(viscous=True, rest='[solve]\naccuracy = "0.3 %"\n'))
    events: list[Progress] = []
    found = solve(asked, events.append)
    said = found.summary["accuracy"]
    assert said["reached"] and said["stopped_by"] is None
    assert said["solves"] > 1 and found.summary["cells"] > 2304
    assert events[-1].refinements == said["solves"] - 1 and events[0].refinements == 0
    assert not [c for c in found.summary["cautions"] if c["code"] == "mesh-error"]
    for path, judged in said["quantity"].items():
        assert judged["half_width"] <= judged["allowed"], path
    finer = solve(asked.replace({"solve.accuracy": None, "mesh.at_most": 40_000}))
    for path, judged in said["quantity"].items():
        assert abs(finer[path] - found[path]) <= judged["allowed"], path


def test_a_hopeless_accuracy_says_what_stopped_it(coarse):
    asked = axicfd.load(tubes.text(rest='[solve]\naccuracy = { pressure_drop = "1e-7 %" }\n[mesh]\nat_most = 9000\n'))
    found = solve(asked)
    said = found.summary["accuracy"]
    assert found.converged and not said["reached"] and said["stopped_by"] == "cells"
    assert "more than 9000 cells" in said["text"] and 4000 < found.summary["cells"] <= 9000
    (caution,) = [c for c in found.summary["cautions"] if c["code"] == "mesh-error"]
    assert caution["place"] == "stream.water.pressure_drop_Pa" and caution["found"] > caution["limit"]


def test_an_accuracy_is_sought_on_so_many_meshes_only(coarse, monkeypatch):
    monkeypatch.setattr("axicfd.pipeline.SOLVES", 1)
    said = solve(axicfd.load(tubes.text(rest='[solve]\naccuracy = { pressure_drop = "1e-7 %" }\n'))).summary["accuracy"]
    assert not said["reached"] and said["stopped_by"] == "solves" and "1 meshes were tried" in said["text"]


def test_counts_given_by_the_case_fix_the_mesh():
    found = solve(axicfd.load(tubes.text(rest=MESH + '[solve]\naccuracy = { pressure_drop = "1e-7 %" }\n')))
    assert found.summary["accuracy"]["stopped_by"] == "mesh" and found.summary["accuracy"]["solves"] == 1


def test_without_memory_for_a_finer_mesh_the_best_so_far_stands(coarse, monkeypatch):
    from axicfd import pipeline

    def short_of_memory(case, grid, *rest):
        if grid.cells > 4500:
            raise MemoryError
        return solve_on(case, grid, *rest)

    solve_on = pipeline.solve_on
    monkeypatch.setattr(pipeline, "solve_on", short_of_memory)
    found = solve(axicfd.load(tubes.text(rest='[solve]\naccuracy = { pressure_drop = "1e-7 %" }\n')))
    assert found.summary["accuracy"]["stopped_by"] == "memory" and found.summary["cells"] <= 4500
    assert found.converged
