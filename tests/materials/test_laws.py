"""Values, derivatives and integrals of the property laws."""

import math

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.interpolate import PchipInterpolator

from axicfd.materials.laws import Constant, Exponential, IdealGasDensity, Table

T_POINTS = (280.0, 300.0, 305.0, 340.0, 400.0)
SYRUP = (2.0, 0.6, 0.5, 0.09, 0.01)

LAWS = {
    "constant": Constant(4.2),
    "exponential": Exponential(293.15, 2.0, 0.05),
    "exponential without slope": Exponential(293.15, 2.0, 0.0),
    "gas": IdealGasDensity(101325.0, 287.05),
    "two points": Table((280.0, 400.0), (1.0, 3.0)),
    "table": Table(T_POINTS, SYRUP),
    "table with a bump": Table(T_POINTS, (1.0, 2.0, 2.1, 1.9, 1.95)),
    "logarithmic": Table(T_POINTS, SYRUP, logarithmic=True),
    "table going on": Table(T_POINTS, SYRUP).extended(),
    "rising table going on": Table(T_POINTS, SYRUP[::-1]).extended(),
    "logarithmic going on": Table(T_POINTS, SYRUP, logarithmic=True).extended(),
}


@pytest.fixture(params=LAWS.values(), ids=LAWS.keys())
def law(request):
    return request.param


def test_derivative_is_the_slope(law):
    T = np.array([250.0, 281.0, 299.0, 303.0, 320.0, 399.0, 430.0, 900.0])
    h = 1e-3
    slope = (law(T + h) - law(T - h)) / (2 * h)
    np.testing.assert_allclose(law.derivative(T), slope, rtol=1e-6, atol=1e-8)


@pytest.mark.parametrize(("a", "b"), [(281.0, 283.0), (250.0, 450.0), (390.0, 290.0), (410.0, 700.0), (100.0, 270.0)])
def test_integral_is_the_area(law, a, b):
    inside = sorted(t for t in (*T_POINTS, *_breaks(law)) if min(a, b) < t < max(a, b))
    edges = [min(a, b), *inside, max(a, b)]
    area = math.fsum(quad(law, lo, hi, epsabs=0, epsrel=1e-12)[0] for lo, hi in zip(edges, edges[1:], strict=False))
    assert law.integral(a, b) == pytest.approx(math.copysign(1, b - a) * area, rel=1e-11)


def _breaks(law):
    return law._curve.breaks if isinstance(law, Table) else ()


def test_integral_adds_up_and_turns_sign(law):
    a, b, c = 270.0, 333.0, 420.0
    assert law.integral(a, b) + law.integral(b, c) == pytest.approx(law.integral(a, c), rel=1e-13)
    assert law.integral(b, a) == pytest.approx(-law.integral(a, b), rel=1e-13)


def test_shape_is_kept(law):
    T = np.full((3, 4), 310.0)
    assert law(T).shape == law.derivative(T).shape == law.integral(300.0, T).shape == (3, 4)
    assert isinstance(float(law(310.0)), float) and np.ndim(law(310.0)) == 0


def test_nonsense_temperatures_give_finite_values(law):
    T = np.array([-1e6, -300.0, 0.0, 1e6])
    with np.errstate(all="raise"):
        assert np.all(np.isfinite(law(T))) and np.all(np.isfinite(law.derivative(T)))


def test_laws_are_hashable_and_equal_by_value(law):
    assert hash(law) == hash(law) and law == law
    assert Table([280.0, 300.0], [1.0, 2.0]) == Table((280.0, 300.0), (1.0, 2.0))


def test_constant_or_not():
    assert (
        Constant(1.0).is_constant
        and Table((1.0, 2.0), (3.0, 3.0)).is_constant
        and Exponential(1.0, 2.0, 0.0).is_constant
    )
    assert not LAWS["table"].is_constant and not LAWS["exponential"].is_constant and not LAWS["gas"].is_constant


@pytest.mark.parametrize(
    "values", [SYRUP, (1.0, 2.0, 2.1, 1.9, 1.95), (1.0, 1.0, 2.0, 2.0, 5.0), (5.0, 1.0, 4.0, 3.9, 3.0)]
)
def test_table_against_an_independent_monotone_cubic(values):
    T = np.linspace(280.0, 400.0, 501)
    np.testing.assert_allclose(Table(T_POINTS, values)(T), PchipInterpolator(T_POINTS, values)(T), rtol=1e-13)


def test_table_goes_through_its_points_and_holds_its_ends():
    for logarithmic in (False, True):
        law = Table(T_POINTS, SYRUP, logarithmic)
        np.testing.assert_allclose(law(np.array(T_POINTS)), SYRUP, rtol=1e-14)
        assert law(100.0) == pytest.approx(2.0) and law(1000.0) == pytest.approx(0.01)
        assert law.span == law.extended().span == (280.0, 400.0)


def test_logarithmic_table_of_an_exponential_is_that_exponential():
    exact = Exponential(300.0, 0.5, 0.04)
    points = np.linspace(290.0, 360.0, 5)
    table = Table(points, exact(points), logarithmic=True).extended()
    T = np.linspace(270.0, 400.0, 27)
    np.testing.assert_allclose(table(T), exact(T), rtol=1e-12)
    np.testing.assert_allclose(table.integral(300.0, T), exact.integral(300.0, T), rtol=1e-12, atol=1e-14)


def test_extended_table_goes_straight_on_but_stays_positive():
    law = Table((300.0, 400.0), (2.0, 1.0)).extended()
    assert law(250.0) == pytest.approx(2.5) and law(450.0) == pytest.approx(0.5)
    assert law(600.0) == pytest.approx(0.01)
    rising = Table((300.0, 400.0), (1.0, 2.0)).extended()
    assert (
        rising(450.0) == pytest.approx(2.5)
        and rising(250.0) == pytest.approx(0.5)
        and rising(0.0) == pytest.approx(0.01)
    )


@pytest.mark.parametrize(
    ("T", "value", "logarithmic"),
    [((300.0,), (1.0,), False), ((300.0, 300.0), (1.0, 2.0), False), ((300.0, 310.0), (1.0,), False),
     ((300.0, 310.0), (1.0, 0.0), True), ((300.0, math.nan), (1.0, 1.0), False)],
)  # fmt: skip
def test_a_table_that_is_none_is_refused(T, value, logarithmic):
    with pytest.raises(ValueError, match="table"):
        Table(T, value, logarithmic)


def test_exponential_and_gas_values():
    assert Exponential(293.15, 2.0, 0.05)(313.15) == pytest.approx(2.0 * math.exp(-1.0))
    assert IdealGasDensity(101325.0, 287.047)(300.0) == pytest.approx(1.17663, rel=1e-5)  # p / (R T)
