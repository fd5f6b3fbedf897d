"""Developed values against closed forms, and the order at which they are reached."""

import numpy as np
import pytest

from axicfd.mesh.spacing import graded_map
from axicfd.solver import developed
from axicfd.solver.flow import flow_mesh
from axicfd.theory import duct_heat


def mesh_of(cells, stretch=4.0, r_first=0.0):
    r = r_first + (5e-3 - r_first) * graded_map(stretch, r_first > 0.0, True)(np.arange(cells + 1) / cells)
    return flow_mesh(np.linspace(0.0, 0.1, 5), r, np.ones((4, cells)))


def profile(mesh):
    return developed.velocity(mesh, 1000.0, 0.01)


def error(value, expected):
    return abs(value / expected - 1.0)


def test_velocity_carries_the_mass_flow_and_is_a_parabola():
    mesh = mesh_of(64)
    u = profile(mesh)
    assert 1000.0 * (u * mesh.area).sum() == pytest.approx(0.01, rel=1e-13)
    mean = 0.01 / 1000.0 / mesh.area.sum()
    rc = 0.5 * (mesh.r[1:] + mesh.r[:-1])
    # Hagen and Poiseuille: u = 2 U (1 - r^2/R^2)
    assert u == pytest.approx(2.0 * mean * (1.0 - (rc / 5e-3) ** 2), abs=2e-3 * mean)


QUANTITIES = {
    # Darcy f Re of a round tube, closed form
    "friction": (lambda m, u: developed.friction_reynolds(m, u), 64.0),
    # uniform wall flux, closed form
    "flux": (lambda m, u: developed.nusselt_uniform_flux(m, u), 48.0 / 11.0),
    # uniform wall temperature: half the square of the first eigenvalue of the Graetz problem (theory)
    "temperature": (lambda m, u: developed.nusselt_third_kind(m, u, np.inf, 1e9), duct_heat.NU_T),
    # closed form: at Biot 4 the first solution is exp(-r^2/R^2), with Nu = 4 exactly
    "film": (lambda m, u: developed.nusselt_third_kind(m, u, 4.0, 1e9), 4.0),
    # with axial conduction in the fluid at Pe = 1; independent computation, not published (spectral, 30 and
    # 44 radial nodes agree to all digits given)
    "Pe 1": (lambda m, u: developed.nusselt_third_kind(m, u, np.inf, 1.0), 4.027346),
}


@pytest.mark.parametrize("name", QUANTITIES)
def test_developed_values_of_a_round_tube(name):
    evaluate, expected = QUANTITIES[name]
    mesh = mesh_of(96)
    assert evaluate(mesh, profile(mesh)) == pytest.approx(expected, rel=2e-4)


@pytest.mark.parametrize("name", QUANTITIES)
def test_developed_values_are_of_second_order(name):
    evaluate, expected = QUANTITIES[name]
    errors = []
    for cells in (12, 24, 48):
        mesh = mesh_of(cells)
        errors.append(error(evaluate(mesh, profile(mesh)), expected))
    orders = np.log2(np.array(errors[:-1]) / errors[1:])
    assert (orders > 1.85).all(), orders
    assert (orders < 2.3).all(), orders


@pytest.mark.parametrize("biot", [0.1, 1.0, 10.0, 100.0])
def test_films_against_the_series(biot):
    mesh = mesh_of(96)
    found = developed.nusselt_third_kind(mesh, profile(mesh), biot, 1e9)
    assert found == pytest.approx(duct_heat.developed_nusselt_film(biot), rel=2e-4)


@pytest.mark.parametrize("peclet", [0.1, 0.5, 2.0, 10.0, 100.0])
def test_axial_conduction_against_the_series(peclet):
    mesh = mesh_of(96)
    expected, _ = duct_heat.developed_nusselt_T_with_axial_conduction(peclet)
    assert developed.nusselt_third_kind(mesh, profile(mesh), np.inf, peclet) == pytest.approx(expected, rel=2e-4)


def test_a_weak_film_acts_like_uniform_flux():
    mesh = mesh_of(48)
    u = profile(mesh)
    found = developed.nusselt_third_kind(mesh, u, 1e-6, 1e9)
    assert found == pytest.approx(developed.nusselt_uniform_flux(mesh, u), rel=1e-6)


def test_plug_flow_at_a_given_wall_temperature():
    """phi = J0(j r/R), Nu = j^2 with j = 2.404826 the first zero of J0: 5.7832 (separation of variables)."""
    mesh = mesh_of(96)
    found = developed.nusselt_third_kind(mesh, np.ones(96), np.inf, 1e9)
    assert found == pytest.approx(2.404825557695773**2, rel=2e-4)


def test_plug_flow_with_uniform_flux():
    """Nu = 8 (integration of the plug profile)."""
    mesh = mesh_of(96)
    assert developed.nusselt_uniform_flux(mesh, np.ones(96)) == pytest.approx(8.0, rel=5e-4)


def test_friction_of_an_annulus():
    """Radius ratio 0.5: f Re = 95.251 (closed form, both walls)."""
    mesh = mesh_of(96, r_first=2.5e-3)
    k = 0.5
    shape = (1.0 - k) ** 2 / (1.0 + k**2 + (1.0 - k**2) / np.log(k))
    assert developed.friction_reynolds(mesh, profile(mesh)) == pytest.approx(64.0 * shape, rel=1e-3)
