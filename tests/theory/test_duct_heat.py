"""The Graetz problem and its relatives against independent tables and closed forms."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.special import hyp1f1

from axicfd.theory import duct_heat

REFERENCE = Path(__file__).parents[2] / "validation" / "reference"


def table(name):
    """Data rows of a reference table as floats, an empty or `nan` cell as nan."""
    with (REFERENCE / name).open(encoding="utf-8") as file:
        lines = [line for line in file if not line.startswith("#")]
    return [[float(cell) for cell in row] for row in list(csv.reader(lines))[1:]]


def test_eigenvalues_T():
    # independent computation, not published: Kummer function, 40 digits; agrees with Shah & London 1978
    m = duct_heat.modes(math.inf)
    for n, (_, root, square, _, weight) in enumerate(table("graetz_eigen_T.csv")):
        assert math.sqrt(m.lambda_squared[n]) == pytest.approx(root, rel=1e-10)
        assert m.lambda_squared[n] == pytest.approx(square, rel=1e-10)
        assert m.lambda_squared[n] * m.mean[n] ** 2 / 4 == pytest.approx(weight, rel=1e-9)
    assert 0.5 * m.lambda_squared[0] == pytest.approx(duct_heat.NU_T, rel=1e-12)


def test_eigenvalues_H():
    # independent computation, not published: Kummer function, 40 digits; agrees with Siegel et al. 1958
    m, weights = duct_heat.modes(0.0), duct_heat._weights_H()
    assert m.lambda_squared[0] == pytest.approx(0.0, abs=1e-11)
    for n, _, square, _, _, at_wall in table("graetz_eigen_H.csv"):
        n = int(n)
        assert m.lambda_squared[n] == pytest.approx(square, rel=1e-10)
        assert 2.0 * weights[n] * m.wall[n] == pytest.approx(at_wall, rel=1e-9)


def test_many_eigenvalues_are_good():
    # Newman and Sellars, Tribus & Klein: lambda_n tends to 4 n + 8/3, the weight to 1.01279 lambda^(-1/3);
    # an independent computation gave 1.012845 at n = 89
    m = duct_heat.modes(math.inf)
    n = np.arange(20, duct_heat.TERMS)
    gap = np.sqrt(m.lambda_squared[20:]) - (4 * n + 8 / 3)
    assert np.all(np.diff(gap) < 0) and 0 < gap[-1] < 1e-4
    root = math.sqrt(m.lambda_squared[89])
    assert root ** (1 / 3) * m.lambda_squared[89] * m.mean[89] ** 2 / 4 == pytest.approx(1.012845, rel=1e-6)


@pytest.mark.parametrize("biot", [0.3, 4.0, 50.0])
def test_film_eigenfunctions_are_kummer_functions(biot):
    # R = exp(-lambda r2 / 2) M(1/2 - lambda/4, 1, lambda r2), the closed form of the eigenfunctions
    m = duct_heat.modes(biot)
    r = np.linspace(0.0, 1.0, 11)
    for n in range(4):
        root = math.sqrt(m.lambda_squared[n])
        exact = np.exp(-root * r**2 / 2) * hyp1f1(0.5 - root / 4, 1.0, root * r**2)
        computed = m(r)[:, n]
        np.testing.assert_allclose(computed / computed[0], exact, atol=1e-9)


def test_nusselt_against_the_table():
    # independent computation, not published: 90-term series, all digits printed are good
    for x, local_T, mean_T, bulk, local_H, mean_H in table("graetz_nu_vs_xstar.csv"):
        assert duct_heat.nusselt_T(x) == pytest.approx(local_T, abs=6e-6)
        assert duct_heat.mean_nusselt_T(x) == pytest.approx(mean_T, abs=6e-6)
        assert duct_heat.bulk_T(x) == pytest.approx(bulk, abs=6e-7)
        assert duct_heat.nusselt_H(x) == pytest.approx(local_H, abs=6e-6)
        assert duct_heat.mean_nusselt_H(x) == pytest.approx(mean_H, rel=1e-4)  # the table's own limit near 0


@pytest.mark.parametrize("function", [duct_heat.nusselt_T, duct_heat.mean_nusselt_T, duct_heat.nusselt_H])
def test_series_and_expansion_meet(function):
    short = duct_heat.SHORTEST
    below, above = function(short * (1 - 1e-12)), function(short * (1 + 1e-12))
    assert below == pytest.approx(above, rel=2e-5)
    # and far below it is Leveque's law, whose next term is about 1 in Nu
    leading = {"nusselt_T": duct_heat.LEVEQUE_T, "mean_nusselt_T": 1.5 * duct_heat.LEVEQUE_T}
    constant = leading.get(function.__name__, duct_heat.LEVEQUE_H)
    assert function(1e-12) * 1e-4 == pytest.approx(constant, rel=2e-4)


def test_any_distance_is_answered():
    x = np.array([1e-9, 1e-5, 1e-3, 1.0, 50.0, 1e4])
    with np.errstate(all="raise", under="ignore"):
        for function in (
            duct_heat.nusselt_T,
            duct_heat.mean_nusselt_T,
            duct_heat.nusselt_H,
            duct_heat.mean_nusselt_H,
        ):
            assert np.all(np.diff(function(x)) <= 1e-9) and function(0.01).shape == ()
    assert duct_heat.nusselt_T(1e4) == pytest.approx(duct_heat.NU_T)
    assert duct_heat.mean_nusselt_T(1e4) == pytest.approx(duct_heat.NU_T, rel=1e-4)
    assert duct_heat.bulk_T(0.0) == pytest.approx(1.0)


def test_entry_lengths():
    # Shah & London 1978 (from memory): within 5 % of the developed value
    for function, limit, length in (
        (duct_heat.nusselt_T, duct_heat.NU_T, duct_heat.ENTRY_LENGTH_T),
        (duct_heat.nusselt_H, duct_heat.NU_H, duct_heat.ENTRY_LENGTH_H),
    ):
        found = brentq(lambda x, f=function, n=limit: f(x) - 1.05 * n, 0.01, 0.2)
        assert found == pytest.approx(length, rel=2e-6)
    # 0.05 D Re Pr, common practice: 1.5 % and 3.4 % above the developed values
    assert duct_heat.nusselt_T(duct_heat.ENTRY_LENGTH_RULE) / duct_heat.NU_T == pytest.approx(1.0145, abs=1e-4)
    assert duct_heat.nusselt_H(duct_heat.ENTRY_LENGTH_RULE) / duct_heat.NU_H == pytest.approx(1.0344, abs=1e-4)


def test_third_kind():
    # independent computation, not published: Kummer function; Bi = 4 is the closed form exp(-r2)
    for biot, root, nusselt, *_ in table("nu_third_kind_vs_biot.csv"):
        assert math.sqrt(duct_heat.modes(biot).lambda_squared[0]) == pytest.approx(root, rel=5e-9)
        assert duct_heat.developed_nusselt_film(biot) == pytest.approx(nusselt, rel=2e-8)
    assert duct_heat.developed_nusselt_film(4.0) == pytest.approx(4.0, rel=1e-12)
    assert duct_heat.developed_nusselt_film(0.0) == duct_heat.NU_H
    assert duct_heat.developed_nusselt_film(math.inf) == pytest.approx(duct_heat.NU_T, rel=1e-12)


def test_film_lies_between_its_limits():
    x = np.array([1e-3, 0.01, 0.1])
    np.testing.assert_allclose(duct_heat.nusselt_film(x, 1e7), duct_heat.nusselt_T(x), rtol=1e-5)
    np.testing.assert_allclose(duct_heat.nusselt_film(x, 1e-4), duct_heat.nusselt_H(x), rtol=1e-4)
    assert np.all(duct_heat.nusselt_film(x, 4.0) > duct_heat.nusselt_T(x))
    assert np.all(duct_heat.nusselt_film(x, 4.0) < duct_heat.nusselt_H(x))


@pytest.mark.parametrize("biot", [1.0, 4.0, math.inf])
def test_film_profile_carries_its_bulk(biot):
    s, w = np.polynomial.legendre.leggauss(200)
    s, w = 0.5 * (s + 1), 0.5 * w
    profile = duct_heat.temperature_film(np.sqrt(s), 0.02, biot)
    assert w @ (2 * (1 - s) * profile) == pytest.approx(duct_heat.bulk_film(0.02, biot), rel=1e-12)
    assert duct_heat.bulk_film(0.0, biot) == pytest.approx(1.0, abs=2e-3)  # a finite number of terms
    mean = duct_heat.mean_overall_nusselt(0.02, biot)
    assert math.exp(-4 * mean * 0.02) == pytest.approx(duct_heat.bulk_film(0.02, biot))


def test_flux_profile_starts_flat_and_closes_its_heat():
    s, w = np.polynomial.legendre.leggauss(200)
    s, w = 0.5 * (s + 1), 0.5 * w
    r = np.sqrt(s)
    for x in (1e-3, 0.05, 2.0):
        profile = duct_heat.temperature_H(r, x)
        assert w @ (2 * (1 - s) * profile) == pytest.approx(4 * x, rel=1e-10)
        assert duct_heat.temperature_H(1.0, x) == pytest.approx(duct_heat.wall_H(x), rel=1e-12)
    assert np.max(np.abs(duct_heat.temperature_H(np.linspace(0, 0.5, 6), 1e-4))) < 1e-9
    # closed form far downstream: T_wall - T_bulk = (11/48) q D / k
    assert duct_heat.wall_H(3.0) - duct_heat.bulk_H(3.0) == pytest.approx(11 / 48, rel=1e-12)


def test_axial_conduction_in_the_fluid():
    # independent computation, not published: spectral, two resolutions
    for peclet, nusselt, decay, *_ in table("nu_axial_conduction_T_vs_peclet.csv"):
        found = duct_heat.developed_nusselt_T_with_axial_conduction(peclet)
        assert found == pytest.approx((nusselt, decay), rel=2e-6)


def test_dissipation():
    # closed form 48 / (11 + 48 Br)
    assert duct_heat.nusselt_H_with_dissipation(0.0) == duct_heat.NU_H
    assert duct_heat.nusselt_H_with_dissipation(1.0) == pytest.approx(48 / 59)


def test_flat_inlet_correlation():
    # independent computation, not published, Pr = 0.7 (parabolised equations): 23.94 at 0.001, 8.719 at 0.01
    assert duct_heat.mean_nusselt_T_flat_inlet(0.001, 0.7) == pytest.approx(23.94, rel=0.07)
    assert duct_heat.mean_nusselt_T_flat_inlet(0.01, 0.7) == pytest.approx(8.719, rel=0.07)
    assert duct_heat.mean_nusselt_T_flat_inlet(100.0, 5.0) == pytest.approx(3.657, rel=1e-3)
