"""Curves along z of a solution whose values are known."""

import numpy as np
import pytest

from axicfd.results.axial import outside_curves, radial_profiles, stream_curves, stream_view
from tests.results.made_up import BACKWARDS, FLUX, MEAN, MU, RHO, K, MadeUp, R, made_up

# bulk of z + (r / R)^2 with a parabola of velocity: the mean of (r / R)^2 is 1/3
BULK_OF_SQUARE = 5.0 / 3.0


@pytest.fixture(scope="module")
def plain() -> MadeUp:
    return made_up()


@pytest.fixture(scope="module")
def curves(plain):
    return stream_curves(stream_view(plain.case, plain.solution, "water"))


def test_bulk_temperature_weighs_with_the_flow(plain, curves):
    expected = 293.15 + 100.0 * plain.grid.z + BULK_OF_SQUARE
    np.testing.assert_allclose(curves["bulk_temperature_K"], expected, atol=5e-3 * BULK_OF_SQUARE)
    # an area mean would be 5 / 2 above
    assert np.all(np.abs(curves["bulk_temperature_K"] - expected) < 0.1)


def test_bulk_temperature_with_a_varying_specific_heat():
    """The temperature whose enthalpy is the convected one: cp = 4000 + 40 (T - T_in)."""
    varying = made_up(
        (
            'specific_heat = "4000 J/kg/K"',
            'specific_heat = { temperature = ["20 degC", "120 degC"], value = ["4000 J/kg/K", "8000 J/kg/K"] }',
        )
    )
    view = stream_view(varying.case, varying.solution, "water")
    h = view.enthalpy / view.flow
    np.testing.assert_allclose(4000.0 * view.bulk + 20.0 * view.bulk**2, h, rtol=1e-10)


def test_wall_is_on_the_fluids_side_of_a_contact(plain, curves):
    np.testing.assert_allclose(curves["wetted_wall_temperature_K"], 293.15 + 100.0 * plain.grid.z + 5.0, rtol=1e-9)


def test_nusselt_only_where_wall_and_bulk_differ(plain, curves):
    z = plain.grid.z
    inside = (z > 0.041) & (z < 0.0999)
    difference = 5.0 - BULK_OF_SQUARE
    np.testing.assert_allclose(curves["wall_heat_flux_W_m2"][inside], FLUX, rtol=1e-9)
    np.testing.assert_allclose(curves["heat_transfer_coefficient_W_m2K"][inside], FLUX / difference, rtol=5e-3)
    np.testing.assert_allclose(curves["nusselt"][inside], FLUX / difference * 2 * R / K, rtol=5e-3)
    assert np.all(curves["nusselt"][z < 0.039] == 0.0)  # insulated, yet warmer than the bulk
    level = plain.with_heat(minus=np.zeros_like(plain.solution.heat.minus), tz=plain.solution.heat.tz * 0.0,
                            hz=plain.solution.heat.hz * 0.0)  # fmt: skip
    none = stream_curves(stream_view(level.case, level.solution, "water"))
    assert np.all(np.isnan(none["nusselt"]))


def test_friction_and_pressure(plain, curves):
    reynolds = RHO * MEAN * 2 * R / MU
    np.testing.assert_allclose(curves["wall_shear_stress_Pa"], 4.0 * MU * MEAN / R, rtol=0.02)
    np.testing.assert_allclose(curves["friction_factor_darcy"], 64.0 / reynolds, rtol=0.02)
    np.testing.assert_allclose(curves["apparent_friction_factor"][1:], 64.0 / reynolds, rtol=0.02)
    gradient = 8.0 * MU * MEAN / R**2
    np.testing.assert_allclose(curves["pressure_Pa"], 101325.0 + gradient * (0.1 - plain.grid.z), rtol=1e-9)
    assert curves["pressure_Pa"][-1] == 101325.0


def test_velocities(curves):
    np.testing.assert_allclose(curves["axis_velocity_m_s"], 2.0 * MEAN, rtol=2e-3)
    np.testing.assert_array_equal(curves["peak_velocity_m_s"], curves["axis_velocity_m_s"])
    assert not curves["reverse"].any()


def test_backward_flow_is_flagged_and_has_no_nusselt(plain):
    u = plain.solution.streams["water"].u.copy()
    mz = plain.solution.streams["water"].mz.copy()
    u[100, -1], mz[100, -1] = -0.01, -1e-7
    found = stream_curves(stream_view(plain.case, plain.with_flow(u=u, mz=mz).solution, "water"))
    assert found["reverse"][100] == 1.0 and found["reverse"].sum() == 1.0
    assert np.isnan(found["nusselt"][100]) and found["wall_shear_stress_Pa"][100] < 0.0


def test_flat_inlet_leaves_its_first_stations_empty():
    flat = made_up(('inlet_profile     = "developed"', 'inlet_profile     = "flat"'))
    found = stream_curves(stream_view(flat.case, flat.solution, "water"))
    z = flat.grid.z
    near = z < 0.5 * 2 * R
    assert np.all(np.isnan(found["wall_shear_stress_Pa"][near]))
    assert np.all(np.isfinite(found["wall_shear_stress_Pa"][~near]))
    assert np.isnan(found["pressure_Pa"][0]) and np.isfinite(found["pressure_Pa"][1:]).all()


def test_stream_the_other_way_has_the_mirrored_curves(curves):
    turned = made_up(*BACKWARDS)
    qz = np.zeros_like(turned.solution.heat.qz)
    qz[50, 0] = 3.0
    back = turned.with_heat(qz=qz)
    found = stream_curves(stream_view(back.case, back.solution, "water"))
    assert np.all(np.diff(found["z_m"]) > 0.0)
    for name in curves:
        if name not in ("z_m", "axial_conduction_W"):
            np.testing.assert_allclose(found[name][::-1], curves[name], rtol=1e-6, atol=1e-9, err_msg=name)
    assert found["axial_conduction_W"][50] == 3.0  # towards rising z, whichever way the stream runs


def test_outside_surface(plain):
    found = outside_curves(plain.case, plain.solution)
    np.testing.assert_allclose(found["temperature_K"], 293.15 + 51.0 + 100.0 * plain.grid.z, rtol=1e-9)
    assert found["heat_flux_W_m2"][-1] == pytest.approx(FLUX)
    joint = np.argmin(np.abs(plain.grid.z - 0.04))
    assert found["heat_flux_W_m2"][joint] == pytest.approx(0.5 * FLUX)


def test_radial_profiles_at_the_stations_asked_for(plain):
    found = {k: np.array(v) for k, v in radial_profiles(plain.case, plain.solution).items()}
    assert sorted(set(found["station_m"])) == pytest.approx([0.04, 0.1])
    stream = (found["layer"] == "water") & (found["station_m"] == 0.04)
    r = found["r_m"][stream]
    expected = 293.15 + 4.0 + 5.0 * (r / R) ** 2
    np.testing.assert_allclose(found["temperature_K"][stream], expected, rtol=1e-9)
    np.testing.assert_allclose(found["axial_velocity_m_s"][stream], 2 * MEAN * (1 - (r / R) ** 2), rtol=3e-3)
    assert np.all(np.isnan(found["axial_velocity_m_s"][found["layer"] == "tube"]))


def test_heat_conducted_along_counts_the_stream_alone(plain):
    qz = np.zeros_like(plain.solution.heat.qz)
    qz[50, 0], qz[50, -1] = 2.0, 7.0
    with_heat = plain.with_heat(qz=qz)
    found = stream_curves(stream_view(with_heat.case, with_heat.solution, "water"))
    assert found["axial_conduction_W"][50] == 2.0


def test_largest_shear_is_taken_from_the_same_place_on_every_mesh():
    """Half a diameter behind a flat inlet, also where no face lies there; the shear falls along the tube."""
    flat = made_up(('inlet_profile     = "developed"', 'inlet_profile     = "flat"'))
    falling = 2.0 - flat.grid.z / flat.layout.length
    flat = flat.with_flow(u=flat.solution.streams["water"].u * falling[:, None])
    view = stream_view(flat.case, flat.solution, "water")
    reported = view.shear()
    at_end = reported[-1]
    expected = at_end * (2.0 - R / flat.layout.length)
    assert view.largest_shear() == pytest.approx(expected, rel=1e-12)
    assert view.largest_shear() > np.nanmax(reported) * (1.0 - 1e-12)
