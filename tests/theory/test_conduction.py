"""Conduction: closed forms against hand-worked values, balances and differences."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest

from axicfd.theory import conduction
from axicfd.theory.conduction import Shell, Side, solve_shells

REFERENCE = Path(__file__).parents[2] / "validation" / "reference"


def test_resistances_in_series():
    # worked by hand: copper 5 to 6 mm (401 W/(m K)) and insulation to 26 mm (0.04 W/(m K)): 5.8344422 m K/W
    total = conduction.layer_resistance(5e-3, 6e-3, 401.0) + conduction.layer_resistance(6e-3, 26e-3, 0.04)
    assert total == pytest.approx(5.8344422, rel=1e-7)
    assert conduction.critical_radius(0.04, 10.0) == pytest.approx(4e-3)


def test_layers_with_contact_and_film():
    shells = [Shell(2e-3, 3e-3, 15.0), Shell(3e-3, 8e-3, 0.2, contact_resistance=3e-4)]
    solved = solve_shells(
        shells, Side(temperature=400.0, resistance=1 / 500.0), Side(temperature=300.0, resistance=0.1)
    )
    total = (
        conduction.film_resistance(500.0, 2e-3)
        + conduction.layer_resistance(2e-3, 3e-3, 15.0)
        + conduction.area_resistance(3e-4, 3e-3)
        + conduction.layer_resistance(3e-3, 8e-3, 0.2)
        + conduction.film_resistance(10.0, 8e-3)
    )
    heat = 100.0 / total
    assert solved.heat_inner == pytest.approx((heat, heat)) and solved.heat_outer(1) == pytest.approx(heat)
    jump = solved.outer_temperature(0) - solved.inner_temperature[1]
    assert jump == pytest.approx(heat * conduction.area_resistance(3e-4, 3e-3))
    assert solved.outer_temperature(1) == pytest.approx(300.0 + heat * conduction.film_resistance(10.0, 8e-3))


def test_generation_with_an_insulated_outside():
    # -(g/4k)(r_o2 - r_i2) + (g r_o2 / 2k) ln(r_o / r_i) = 0.0212715209 for k = g = r_i = 1, r_o = 1.2
    solved = solve_shells([Shell(1.0, 1.2, 1.0, heat_per_volume=1.0)], Side(temperature=0.0), Side())
    assert solved.outer_temperature(0) == pytest.approx(0.0212715209, rel=1e-9)
    assert solved.heat_outer(0) == pytest.approx(0.0, abs=1e-14)


def test_rod_with_generation():
    # closed form: T_axis - T_surface = g R2 / 4 k
    solved = solve_shells([Shell(0.0, 0.01, 2.0, heat_per_volume=1e6)], Side(), Side(temperature=300.0))
    assert solved.inner_temperature[0] == pytest.approx(300.0 + 1e6 * 1e-4 / 8.0)
    assert solved.heat_outer(0) == pytest.approx(math.pi * 1e-4 * 1e6)


def test_flux_counts_positive_into_the_body():
    outer = solve_shells([Shell(1.0, 2.0, 3.0)], Side(temperature=10.0), Side(flux=5.0))
    assert outer.heat_outer(0) == pytest.approx(-5.0 * 2 * math.pi * 2.0) and outer.outer_temperature(0) > 10.0
    inner = solve_shells([Shell(1.0, 2.0, 3.0)], Side(flux=5.0), Side(temperature=10.0))
    assert inner.heat_inner[0] == pytest.approx(5.0 * 2 * math.pi) and inner.inner_temperature[0] > 10.0


def test_profile_obeys_the_equation():
    shell = Shell(1.0, 2.0, 3.0, heat_per_volume=7.0)
    solved = solve_shells([shell], Side(temperature=10.0), Side(temperature=4.0, resistance=0.2))
    r, h = np.linspace(1.1, 1.9, 5), 1e-4

    def heat(radius):
        return -3.0 * radius * (solved.temperature(0, radius + h) - solved.temperature(0, radius - h)) / (2 * h)

    divergence = (heat(r + h) - heat(r - h)) / (2 * h) / r
    np.testing.assert_allclose(divergence, 7.0, rtol=1e-5)


def test_unusable_sides_are_refused():
    with pytest.raises(ValueError, match="temperature"):
        solve_shells([Shell(1.0, 2.0, 3.0)], Side(), Side(flux=1.0))
    with pytest.raises(ValueError, match="axis"):
        solve_shells([Shell(0.0, 2.0, 3.0)], Side(temperature=3.0), Side(temperature=1.0))


@pytest.mark.parametrize("slope", [4e-3, -2e-3, 0.0, 1e-13])
def test_conductivity_linear_in_temperature(slope):
    T_i, T_o, a, b, k0, T0 = 420.0, 300.0, 1e-3, 2e-3, 12.0, 300.0
    r, h = np.linspace(1.01e-3, 1.99e-3, 7), 1e-8
    T = conduction.linear_conductivity_temperature(np.array([a, b]), T_i, T_o, a, b, slope, T0)
    np.testing.assert_allclose(T, [T_i, T_o], rtol=1e-12)

    def at(radius):
        return conduction.linear_conductivity_temperature(radius, T_i, T_o, a, b, slope, T0)

    k = k0 * (1 + slope * (at(r) - T0))
    heat = -k * 2 * math.pi * r * (at(r + h) - at(r - h)) / (2 * h)
    expected = conduction.linear_conductivity_heat(T_i, T_o, a, b, k0, slope, T0)
    np.testing.assert_allclose(heat, expected, rtol=1e-5)


def test_slab():
    # closed form: the middle of a symmetric slab is g L2 / 8 k above its faces
    assert conduction.slab_temperature(0.5, 3.0, 3.0, 1.0, 2.0, 16.0) == pytest.approx(4.0)
    assert conduction.slab_temperature(0.25, 0.0, 4.0, 1.0, 2.0) == pytest.approx(1.0)


def test_fin():
    # closed form cosh((L - x) / s) / cosh(L / s)
    assert conduction.fin_temperature(0.1, 0.3, 0.2) == pytest.approx(math.cosh(1.0) / math.cosh(1.5))
    assert conduction.fin_temperature(1.0, 1e3, 1.0) == pytest.approx(math.exp(-1.0))  # no overflow
    h = 1e-7
    slope = (conduction.fin_temperature(h, 0.3, 0.2) - 1.0) / h
    assert conduction.fin_heat(16.0, 1e-5, 0.3, 0.2, 30.0) == pytest.approx(-16.0 * 1e-5 * 30.0 * slope, rel=1e-5)


def test_wall_flux_share():
    # closed form of the one-dimensional model, tabulated independently
    with (REFERENCE / "conjugate_1d_closed_form.csv").open(encoding="utf-8") as file:
        rows = list(csv.reader(line for line in file if not line.startswith("#")))[1:]
    for units, number, *expected in rows:
        found = conduction.wall_flux_share([0, 0.1, 0.5, 0.9, 1], float(units), float(number))
        np.testing.assert_allclose(found, [float(e) for e in expected], atol=6e-6)
    x, w = np.polynomial.legendre.leggauss(40)
    mean = 0.5 * w @ conduction.wall_flux_share(0.5 * (x + 1), 5.0, 0.1)
    assert mean == pytest.approx(1.0, rel=1e-12)  # what enters outside leaves inside


@pytest.mark.parametrize("biot", [math.inf, 2.0])
def test_wavy_cylinder(biot):
    a, b, length, h = 1.0, 2.0, 5.0, 1e-4

    def T(r, z):
        return conduction.wavy_cylinder_temperature(r, z, a, b, length, 2, biot)

    z = 0.7
    if math.isinf(biot):
        assert T(b, z) == pytest.approx(math.cos(2 * math.pi * z / length))
    else:
        slope = (T(b + h, z) - T(b - h, z)) / (2 * h)
        assert slope * b == pytest.approx(biot * (math.cos(2 * math.pi * z / length) - T(b, z)), rel=1e-6)
    assert (T(a + h, z) - T(a - h, z)) / (2 * h) == pytest.approx(0.0, abs=1e-6)
    r = 1.4
    radial = ((r + h / 2) * (T(r + h, z) - T(r, z)) - (r - h / 2) * (T(r, z) - T(r - h, z))) / h**2 / r
    axial = (T(r, z + h) - 2 * T(r, z) + T(r, z - h)) / h**2
    assert radial + axial == pytest.approx(0.0, abs=1e-5)
