"""Dimensionless numbers: the relations between them."""

import math

import pytest

from axicfd.theory import groups


def test_numbers_of_a_small_water_tube():
    # water at 20 degC, 2 mm bore, 1 g/s, worked by hand: U = 0.3189 m/s, Re = 635.6, Pr = 7.008
    rho, mu, cp, k, D = 998.2, 1.0016e-3, 4184.0, 0.598, 2e-3
    U = groups.mean_velocity(1e-3, rho, groups.tube_area(D))
    re, pr = groups.reynolds(rho, U, D, mu), groups.prandtl(mu, cp, k)
    pe = groups.peclet(re, pr)
    assert U == pytest.approx(0.31888, rel=1e-4)
    assert re == pytest.approx(4e-3 / (math.pi * D * mu)) == pytest.approx(635.6, rel=1e-4)
    assert pr == pytest.approx(7.008, rel=1e-4)
    assert pe == pytest.approx(U * D * rho * cp / k)
    assert groups.graetz(pe, D, 0.5) * groups.x_star(0.5, D, pe) == pytest.approx(1.0)
    assert groups.x_plus(0.5, D, re) == pytest.approx(groups.x_star(0.5, D, pe) * pr)


def test_overall_biot_is_coefficient_times_diameter():
    # a film of h on the bore itself: R' = 1 / (h pi D), so Bi = h D / k
    h, D, k = 200.0, 0.004, 0.6
    assert groups.overall_biot(1 / (h * math.pi * D), k) == pytest.approx(h * D / k)
    assert math.isinf(groups.overall_biot(0.0, k))


def test_axial_conduction_number_of_a_tube():
    # 2 (k_w / k_f) ((r_o / r_i)2 - 1) / ((L / R) Pe), the same number in ratios
    R, ratio, L, kw, kf, pe = 1e-3, 1.2, 40e-3, 100 * 0.6, 0.6, 50.0
    area = math.pi * R**2 * (ratio**2 - 1)
    capacity = pe * kf / (2 * R) * math.pi * R**2  # rho cp U A
    expected = 2 * 100 * (ratio**2 - 1) / (L / R * pe)
    assert groups.axial_conduction_number(kw, area, L, capacity) == pytest.approx(expected) == pytest.approx(0.044)


def test_brinkman_and_nusselt():
    assert groups.brinkman_of_flux(2.0, 0.1, 400.0, 0.01) == pytest.approx(0.005)
    assert groups.brinkman_of_difference(2.0, 0.1, 0.5, 20.0) == pytest.approx(0.002)
    assert groups.nusselt(1000.0, 0.01, 0.5, 5.0) == pytest.approx(4.0)


def test_spreading_length():
    assert groups.spreading_length(16.0, 1e-5, 100.0, 0.01) == pytest.approx(math.sqrt(1.6e-4))
