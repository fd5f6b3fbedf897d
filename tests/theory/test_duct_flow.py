"""Developed flow and the hydrodynamic entrance against closed forms and independent tables."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest

from axicfd.theory import duct_flow, groups

REFERENCE = Path(__file__).parents[2] / "validation" / "reference"


def table(name):
    with (REFERENCE / name).open(encoding="utf-8") as file:
        lines = [line for line in file if not line.startswith("#")]
    return [[float(cell) for cell in row] for row in list(csv.reader(lines))[1:]]


def test_developed_profile_carries_its_flow():
    s, w = np.polynomial.legendre.leggauss(8)
    r = np.sqrt(0.5 * (s + 1)) * 0.003
    assert 0.5 * w @ duct_flow.developed_velocity(r, 0.003, 0.7) == pytest.approx(0.7)
    assert duct_flow.developed_velocity(0.0, 0.003, 0.7) == pytest.approx(1.4)
    assert duct_flow.developed_velocity(0.003, 0.003) == pytest.approx(0.0)


def test_pressure_drop_shear_and_friction_agree():
    rho, mu, U, D, L = 1100.0, 0.004, 0.3, 0.006, 2.0
    flow = U * groups.tube_area(D)
    drop = duct_flow.developed_pressure_drop(mu, flow, L, D)
    shear = duct_flow.developed_wall_shear(mu, U, D)
    assert drop * groups.tube_area(D) == pytest.approx(shear * math.pi * D * L)  # balance of forces
    f = groups.darcy_friction_factor(shear, rho, U)
    assert f * groups.reynolds(rho, U, D, mu) == pytest.approx(duct_flow.DARCY_F_RE)
    assert drop == pytest.approx(f * L / D * rho * U**2 / 2)


def test_apparent_friction():
    # Shah 1978: within 2.4 % by its author; independent boundary-layer computation, not published, Fanning
    for x, _, drop, _, fanning, *_ in table("hydro_entrance_boundary_layer.csv"):
        assert duct_flow.apparent_f_re(x) == pytest.approx(4 * fanning, rel=0.021)
        assert duct_flow.apparent_f_re(x) * x == pytest.approx(drop, rel=0.021)
    # far downstream: 64 x+ and an entrance loss of 1.25
    assert duct_flow.apparent_f_re(50.0) * 50.0 - 64.0 * 50.0 == pytest.approx(1.25, rel=1e-3)


def test_entrance_pressure_drop_is_above_the_developed_one():
    rho, mu, U, D = 1000.0, 0.001, 0.1, 0.004
    for length in (0.01, 0.1, 10.0):
        drop = duct_flow.entrance_pressure_drop(rho, mu, U, length, D)
        developed = duct_flow.developed_pressure_drop(mu, U * groups.tube_area(D), length, D)
        assert developed < drop < developed + 1.251 * 0.5 * rho * U**2


def test_entry_length():
    # independent computation, not published: Navier-Stokes, finite elements; deviations as documented
    for row in table("hydro_entrance_navier_stokes.csv"):
        reynolds, length = row[:2]
        assert duct_flow.entry_length(reynolds) == pytest.approx(length, rel=0.05 if 4 < reynolds < 21 else 0.017)
        if reynolds > 49:
            assert duct_flow.entry_length_chen(reynolds) == pytest.approx(length, rel=0.013)
    assert duct_flow.entry_length(0.0) == pytest.approx(0.619)


@pytest.mark.parametrize("velocity", [1e-6, 1e-2, 1.0, 5.0])
def test_velocities_of_a_pressure_drop_give_it_back(velocity):
    oil = {"viscosity": 1e-3, "length": 0.5, "diameter": 4e-3}
    drop = duct_flow.entrance_pressure_drop(1000.0, 1e-3, velocity, 0.5, 4e-3)
    assert duct_flow.entrance_mean_velocity(drop, 1000.0, **oil) == pytest.approx(velocity, rel=1e-6)
    drop = duct_flow.developed_pressure_drop(1e-3, velocity * math.pi * 4e-6, 0.5, 4e-3)
    assert duct_flow.developed_mean_velocity(drop, **oil) == pytest.approx(velocity)
