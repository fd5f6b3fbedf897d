"""What a results folder says in one file agrees with what it says in another, read without the project's own
readers."""

import csv
import json
import math
from pathlib import Path

import numpy as np
import pytest

import axicfd
from axicfd.output import folder
from tests.laws import tubes
from validation import ledger

SECTIONS = """
[[section]]
name    = "lead-in"
length  = "20 mm"
outside = { insulated = true }
[[section]]
name    = "heater"
length  = "40 mm"
outside = { heat = "5 W", film_coefficient = "50 W/m^2/K", ambient = "30 degC" }
generated = { sleeve = "2 W" }
[[section]]
name    = "rest"
length  = "60 mm"
outside = { film_coefficient = "80 W/m^2/K", ambient = "15 degC" }
"""
REST = """
[ends]
last.sleeve = { heat = "0.02 W" }
[sensor.middle]
z  = "40 mm"
at = "sleeve outer"
[mesh]
radial           = 16
axial            = 240
stretch_to_walls = 1
stretch_to_ends  = 1
"""
K, CP, MU, RHO = 0.5, 4000.0, 2e-3, 1000.0


@pytest.fixture(scope="module", params=["+z", "-z"])
def files(request, tmp_path_factory) -> tuple[Path, float]:
    """The folder, and 1 or -1 for the direction of the stream."""
    flow = f'mass_flow = "1 g/s"\ninlet_profile = "developed"\ndirection = "{request.param}"'
    result = axicfd.solve(axicfd.load(tubes.text(flow, sections=SECTIONS, rest=REST, viscous=True)))
    assert result.converged
    path = tmp_path_factory.mktemp("files") / "results"
    folder.write(result, path)
    return path, 1.0 if request.param == "+z" else -1.0


def columns(path: Path) -> dict[str, np.ndarray]:
    with path.open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    return {key: np.array([float(row[key] or "nan") for row in rows]) for key in rows[0]}


@pytest.fixture(scope="module")
def parts(files):
    path, _ = files
    summary = json.loads((path / "summary.json").read_text(encoding="utf-8"))
    finest = summary | summary["finest_mesh"]  # as fields and curves; printed values are extrapolated
    return columns(path / "axial-water.csv"), dict(np.load(path / "fields.npz")), finest


def test_heat_of_the_curves_is_what_the_stream_takes_up(files):
    found = ledger.recompute(files[0])
    assert found["stream"] < 1e-3 and found["outside"] < 3e-3  # the mesh is not refined at the joints
    assert found["energy"] < 1e-10 and found["mass"] < 1e-12


def test_bulk_temperature_is_enthalpy_over_mass_flow(parts):
    curves, f, summary = parts
    area = math.pi * np.diff(f["r_faces"] ** 2)[:16]
    mass = RHO * f["u.water"] * area
    bulk = (mass * f["T_z_faces"][:, :16]).sum(axis=1) / mass.sum(axis=1)
    np.testing.assert_allclose(curves["bulk_temperature_K"] - f["inlet_temperature"], bulk, atol=1e-9)
    np.testing.assert_allclose(np.abs(mass.sum(axis=1)), 1e-3, rtol=1e-12)
    outlet = curves["bulk_temperature_K"][-1 if mass[0, 0] > 0 else 0]
    assert summary["stream"]["water"]["outlet_temperature_K"] == pytest.approx(outlet, abs=1e-9)
    gain = 1e-3 * CP * (outlet - float(f["inlet_temperature"]))
    assert summary["stream"]["water"]["heat_gain_W"] == pytest.approx(gain, rel=1e-9)


def test_conduction_along_the_stream(parts):
    curves, f, _ = parts
    z, area = f["z_faces"], math.pi * np.diff(f["r_faces"] ** 2)[:16]
    zc = 0.5 * (z[1:] + z[:-1])
    slope = np.diff((f["T"][:, :16] * area).sum(axis=1)) / np.diff(zc)
    np.testing.assert_allclose(curves["axial_conduction_W"][1:-1], -K * slope, rtol=1e-8, atol=1e-12)
    assert curves["axial_conduction_W"][0] == 0.0 == curves["axial_conduction_W"][-1]


def test_wall_flux_is_the_slope_of_the_temperature(parts):
    """Of second order only: from the last two cells and the wall, by a parabola in r."""
    curves, f, _ = parts
    r, t, wall = f["r_faces"][:17], f["T"][:, :16], f["T_inner_side"][:, 16]
    rc = 0.5 * (r[1:] + r[:-1])
    a, b = r[16] - rc[15], r[16] - rc[14]
    slope = (wall - t[:, 15]) / a + ((wall - t[:, 15]) / a - (wall - t[:, 14]) / b) * a / (b - a)
    flux = 0.5 * K * (slope[1:] + slope[:-1])
    z = f["z_faces"][1:-1]
    inside = (z > 0.032) & (z < 0.048)
    np.testing.assert_allclose(curves["wall_heat_flux_W_m2"][1:-1][inside], flux[inside], rtol=0.02)


def test_nusselt_and_friction_follow_from_the_other_columns(parts):
    curves, f, _ = parts
    difference = curves["wetted_wall_temperature_K"] - curves["bulk_temperature_K"]
    nusselt = curves["wall_heat_flux_W_m2"] * 4e-3 / (K * difference)
    known = np.isfinite(curves["nusselt"])
    assert known.sum() > 200
    np.testing.assert_allclose(curves["nusselt"][known], nusselt[known], rtol=1e-9)
    mass_flux = 1e-3 / (math.pi * 2e-3**2)
    friction = 8.0 * curves["wall_shear_stress_Pa"] * RHO / mass_flux**2
    np.testing.assert_allclose(curves["friction_factor_darcy"], friction, rtol=1e-9)
    last = f["r_faces"][16] - 0.5 * (f["r_faces"][15] + f["r_faces"][16])
    shear = MU * np.abs(f["u.water"][:, 15]) / last
    np.testing.assert_allclose(np.abs(curves["wall_shear_stress_Pa"][5:-5]), shear[5:-5], rtol=1e-9)


def test_pressure_wall_shear_and_momentum_of_two_stations(files, parts):
    """Developed flow of constant viscosity: between any two faces only pressure and wall shear act."""
    curves, _, _ = parts
    a, b = 60, 180  # anywhere
    drop = (curves["pressure_Pa"][a] - curves["pressure_Pa"][b]) * files[1] * math.pi * 2e-3**2
    shear = np.trapezoid(curves["wall_shear_stress_Pa"][a : b + 1], curves["z_m"][a : b + 1])
    assert shear * math.pi * 4e-3 == pytest.approx(drop, rel=1e-6)


def test_outside_surface_obeys_its_film(files, parts):
    outer, (_, _, summary) = columns(files[0] / "outside.csv"), parts
    flux = 80.0 * (15.0 + 273.15 - outer["temperature_K"])
    inside = outer["z_m"] > 0.0601
    np.testing.assert_allclose(outer["heat_flux_W_m2"][inside], flux[inside], rtol=1e-6)
    heat = 2 * math.pi * 5e-3 * np.trapezoid(outer["heat_flux_W_m2"], outer["z_m"])
    assert heat == pytest.approx(sum(summary["ledger"]["section"].values()), rel=4e-3)


def test_sensor_and_hottest_layer_are_temperatures_of_the_fields(parts):
    _, f, summary = parts
    t = f["T_inner_side"][:, -1] + f["inlet_temperature"]
    zc = 0.5 * (f["z_faces"][1:] + f["z_faces"][:-1])
    assert summary["sensor"]["middle"]["temperature_K"] == pytest.approx(np.interp(0.04, zc, t), abs=0.01)
    sleeve = np.flatnonzero(f["r_faces"] > 3e-3)[0] - 1
    hottest = max(f["T"][:, sleeve:].max() + f["inlet_temperature"], t.max())
    assert summary["layer"]["sleeve"]["hottest_K"] == pytest.approx(hottest, abs=0.05)
    assert summary["layer"]["sleeve"]["hottest_K"] >= hottest - 1e-9
