"""Laminar heat transfer in a tube with a developed velocity profile: the Graetz problem and its relatives.

Constant properties, no viscous heating. Axial conduction in the fluid is neglected unless a function says
otherwise. Everywhere x* = x / (D Re Pr) counts from the start of the heated length and r is the radius over
that of the bore. Conditions at the wall:

    T       uniform wall temperature
    H       uniform wall heat flux
    film    uniform ambient behind an overall coefficient U per area of the bore: Bi = U D / k; Bi = inf is T

The eigenvalues are computed here. With s = r2 the radial problem reads 4 (s R')' + lambda2 (1 - s) R = 0, its
solutions are smooth in s, and a Galerkin method with Legendre polynomials finds them to nearly all digits.
Below SHORTEST the series would need too many terms and an expansion in powers of x*^(1/3) takes over, good
to 1e-5.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

NU_T = 3.656793457763292
"""Developed Nusselt number, uniform wall temperature. Source: Graetz 1885; half the square of lambda_0."""

NU_H = 48.0 / 11.0
"""Developed Nusselt number, uniform wall flux. Source: closed form."""

NU_T_DISSIPATION = 9.6
"""The same for T far downstream, where only viscous heating is left. Source: closed form."""

ENTRY_LENGTH_T = 0.0334654
ENTRY_LENGTH_H = 0.0430527
"""x* from which Nu stays within 5 % of its developed value.

Source: Shah & London 1978 (from memory); the series of this module gives the same digits.
"""

ENTRY_LENGTH_RULE = 0.05
"""L / (D Re Pr) of a thermal entrance as often quoted. Source: common practice, no source."""

TERMS = 120  # of every series
POLYNOMIALS = 320  # of the Galerkin method; 120 eigenvalues come out to 1e-12
SHORTEST = 1e-4  # x* below which the expansion is used; the last term kept is exp(-2 lambda2 x*) < 1e-20 there

LEVEQUE_T = (8.0 / 9.0) ** (1.0 / 3.0) / math.gamma(4.0 / 3.0)  # 1.07673; Leveque 1928, closed form
LEVEQUE_H = (8.0 / 9.0) ** (1.0 / 3.0) * math.gamma(2.0 / 3.0)  # 1.30198; closed form


# ----- eigenvalues


@dataclass(frozen=True, eq=False)
class Modes:
    """Eigenfunctions R_n of one wall condition, with the integral of (1 - s) R_n R_m over s equal to 0 or 1.

    lambda_squared : (TERMS,) rising
    mean           : (TERMS,) integral of (1 - s) R_n: weight of a uniform inlet temperature
    wall           : (TERMS,) R_n(1)
    coefficients   : (POLYNOMIALS, TERMS) in Legendre polynomials of 2 s - 1
    """

    lambda_squared: Array
    mean: Array
    wall: Array
    coefficients: Array

    def __call__(self, r: ArrayLike) -> Array:
        """R_n at radius r, shape of r plus (TERMS,)."""
        argument = 2.0 * np.square(np.asarray(r, dtype=float)) - 1.0
        return np.moveaxis(np.polynomial.legendre.legval(argument, self.coefficients), 0, -1)

    def decay(self, x_star: ArrayLike) -> Array:
        """exp(-2 lambda_n2 x*), shape of x_star plus (TERMS,)."""
        return np.exp(-2.0 * np.multiply.outer(np.asarray(x_star, dtype=float), self.lambda_squared))


@lru_cache(maxsize=32)
def modes(biot: float) -> Modes:
    """The eigenfunctions for a film of Biot number biot >= 0; inf is T, 0 is H (first mode: a constant)."""
    P, dP, s, w = _legendre(POLYNOMIALS)
    to_basis = np.eye(POLYNOMIALS)
    if math.isinf(biot):
        to_basis = np.eye(POLYNOMIALS, POLYNOMIALS - 1) - np.eye(POLYNOMIALS, POLYNOMIALS - 1, -1)
    stiffness = to_basis.T @ (dP.T * (4.0 * s * w)) @ dP @ to_basis
    mass = to_basis.T @ (P.T * ((1.0 - s) * w)) @ P @ to_basis
    if not math.isinf(biot):
        stiffness += biot  # every polynomial is 1 at the wall
    # the inverse problem, shifted so that the constant mode of H is no obstacle: the wanted eigenvalues are
    # its largest and so the most precise
    raised = stiffness + mass
    scale = 1.0 / np.sqrt(np.diag(raised))
    # mass x = inverse raised x by Cholesky's factors, without a library that takes long to import
    lower = np.linalg.cholesky(raised * np.outer(scale, scale))
    half = np.linalg.solve(lower, mass * np.outer(scale, scale))
    inverse, vectors = np.linalg.eigh(np.linalg.solve(lower, half.T))
    vectors = np.linalg.solve(lower.T, vectors)
    lambda_squared = 1.0 / inverse[::-1][:TERMS] - 1.0
    shape = to_basis @ (scale[:, None] * vectors[:, ::-1][:, :TERMS])
    shape /= np.sqrt(np.einsum("in,ij,jn->n", shape, (P.T * ((1.0 - s) * w)) @ P, shape))
    shape *= np.where(np.polynomial.legendre.legval(-1.0, shape) < 0.0, -1.0, 1.0)
    return Modes(lambda_squared, ((1.0 - s) * w) @ P @ shape, shape.sum(axis=0), shape)


@lru_cache(maxsize=4)
def _legendre(count: int) -> tuple[Array, Array, Array, Array]:
    """Legendre polynomials of 2 s - 1 and their slopes in s at Gauss points, (points, count); s; weights."""
    t, w = np.polynomial.legendre.leggauss(count + 2)
    P = np.asarray(np.polynomial.legendre.legvander(t, count - 1), dtype=np.float64)
    dP = np.zeros_like(P)
    for n in range(1, count):
        # P'_n = P'_(n-2) + (2 n - 1) P_(n-1), and 2 from t to s
        dP[:, n] = (dP[:, n - 2] if n > 1 else 0.0) + 2.0 * (2 * n - 1) * P[:, n - 1]
    return P, dP, np.asarray(0.5 * (t + 1.0)), np.asarray(0.5 * w)


# ----- uniform wall temperature, and film


def bulk_T(x_star: ArrayLike) -> Any:
    """(T_wall - T_bulk) / (T_wall - T_inlet) at x*, from 1 down to 0."""
    x = np.asarray(x_star, dtype=float)
    y = np.cbrt(np.maximum(x, 0.0))
    b, c = _near_inlet_T()
    near = 1.0 - 4.0 * y**2 * (1.5 * LEVEQUE_T + b * y + 0.75 * c * y**2)
    return np.where(x < SHORTEST, near, bulk_film(np.maximum(x, SHORTEST), math.inf))[()]


def nusselt_T(x_star: ArrayLike) -> Any:
    """Local Nusselt number at x* > 0, uniform wall temperature."""
    x = np.asarray(x_star, dtype=float)
    b, c = _near_inlet_T()
    short = np.minimum(x, SHORTEST)
    y = np.cbrt(short)
    near = (LEVEQUE_T / y + b + c * y) / bulk_T(short)
    return np.where(x < SHORTEST, near, _overall_nusselt(np.maximum(x, SHORTEST), math.inf))[()]


def mean_nusselt_T(x_star: ArrayLike) -> Any:
    """Mean Nusselt number from 0 to x* > 0: with it, bulk_T is exp(-4 Nu_mean x*)."""
    x = np.asarray(x_star, dtype=float)
    near = -np.log(bulk_T(np.minimum(x, SHORTEST))) / (4.0 * x)
    return np.where(x < SHORTEST, near, mean_overall_nusselt(x, math.inf))[()]


def bulk_film(x_star: ArrayLike, biot: float) -> Any:
    """(T_ambient - T_bulk) / (T_ambient - T_inlet) at x*."""
    m = modes(biot)
    return (m.decay(x_star) @ (2.0 * m.mean**2))[()]


def wall_film(x_star: ArrayLike, biot: float) -> Any:
    """(T_ambient - T_wall) / (T_ambient - T_inlet) at x* >= SHORTEST; T_wall on the fluid's side."""
    m = modes(biot)
    return (m.decay(x_star) @ (m.mean * m.wall))[()]


def temperature_film(r: ArrayLike, x_star: float, biot: float) -> Any:
    """(T_ambient - T) / (T_ambient - T_inlet) at radius r for one x* >= SHORTEST."""
    m = modes(biot)
    return (m(r) @ (m.mean * m.decay(x_star)))[()]


def nusselt_film(x_star: ArrayLike, biot: float) -> Any:
    """Local Nusselt number at x* >= SHORTEST between wall and bulk, film of Biot number biot > 0."""
    if math.isinf(biot):
        return nusselt_T(x_star)
    m = modes(biot)
    decay = _decay_beyond_first(np.asarray(x_star, dtype=float), m)
    wall = decay @ (m.mean * m.wall)
    return (biot * wall / (decay @ (2.0 * m.mean**2) - wall))[()]


def mean_overall_nusselt(x_star: ArrayLike, biot: float) -> Any:
    """Mean of U_all D / k from bulk to ambient: with it, bulk_film is exp(-4 Nu x*)."""
    m = modes(biot)
    x = np.asarray(x_star, dtype=float)
    rest = _decay_beyond_first(x, m) @ (2.0 * m.mean**2)
    return ((2.0 * m.lambda_squared[0] * x - np.log(rest)) / (4.0 * x))[()]


def developed_nusselt_film(biot: float) -> float:
    """Developed Nusselt number between wall and bulk: 48/11 at Bi = 0, 4 at Bi = 4, 3.6568 at Bi = inf."""
    if biot == 0.0:
        return NU_H
    overall = 0.5 * modes(biot).lambda_squared[0]
    return float(overall if math.isinf(biot) else 1.0 / (1.0 / overall - 1.0 / biot))


def _overall_nusselt(x_star: ArrayLike, biot: float) -> Array:
    m = modes(biot)
    decay = _decay_beyond_first(np.asarray(x_star, dtype=float), m)
    return np.asarray((decay @ (m.lambda_squared * m.mean**2)) / (2.0 * decay @ m.mean**2))


def _decay_beyond_first(x_star: Array, m: Modes) -> Array:
    """m.decay without the factor of the first term: far downstream all terms together would underflow."""
    return np.exp(-2.0 * np.multiply.outer(x_star, m.lambda_squared - m.lambda_squared[0]))


@lru_cache(maxsize=1)
def _near_inlet_T() -> tuple[float, float]:
    """b, c of (q D / k) / (T_wall - T_inlet) = LEVEQUE_T / y + b + c y, y = x*^(1/3), fitted to the series.

    Newman 1969 gives b = -1.2 and c = -0.374 (from memory).
    """
    x = np.array([1.0, 8.0]) * SHORTEST
    m = modes(math.inf)
    flux = m.decay(x) @ (m.lambda_squared * m.mean**2)
    return _fit(x, flux, LEVEQUE_T)


def _fit(x: Array, nusselt: Array, leading: float) -> tuple[float, float]:
    y = np.cbrt(x)
    b, c = np.linalg.solve(np.column_stack([np.ones(2), y]), nusselt - leading / y)
    return float(b), float(c)


# ----- uniform wall flux


def nusselt_H(x_star: ArrayLike) -> Any:
    """Local Nusselt number at x* > 0, uniform wall flux."""
    x = np.asarray(x_star, dtype=float)
    y = np.cbrt(x)
    b, c = _near_inlet_H()
    return np.where(x < SHORTEST, LEVEQUE_H / y + b + c * y, _series_H(np.maximum(x, SHORTEST)))[()]


def mean_nusselt_H(x_star: ArrayLike) -> Any:
    """Mean over length of the local Nusselt number from 0 to x* > 0, uniform wall flux."""
    x = np.asarray(x_star, dtype=float)
    # in y = x^(1/3) the integrand is smooth down to y = 0
    t, w = np.polynomial.legendre.leggauss(60)
    y = np.multiply.outer(np.cbrt(x), 0.5 * (t + 1.0))
    return ((3.0 * y**2 * nusselt_H(y**3)) @ (0.5 * w) * np.cbrt(x) / x)[()]


def bulk_H(x_star: ArrayLike) -> Any:
    """(T_bulk - T_inlet) / (q D / k) at x*, q positive into the stream: 4 x*, exact."""
    return 4.0 * np.asarray(x_star, dtype=float)[()]


def wall_H(x_star: ArrayLike) -> Any:
    """(T_wall - T_inlet) / (q D / k) at x* > 0."""
    return bulk_H(x_star) + 1.0 / nusselt_H(x_star)


def temperature_H(r: ArrayLike, x_star: float) -> Any:
    """(T - T_inlet) / (q D / k) at radius r for one x* >= SHORTEST."""
    m = modes(0.0)
    s = np.square(np.asarray(r, dtype=float))
    developed = 0.5 * (s - 0.25 * s**2 - 7.0 / 24.0)
    return (4.0 * x_star + developed + m(r)[..., 1:] @ (_weights_H()[1:] * m.decay(x_star)[1:]))[()]


def _series_H(x_star: Array) -> Array:
    m = modes(0.0)
    # the constant mode has no part in the difference between wall and bulk
    return 1.0 / (11.0 / 48.0 + m.decay(x_star)[..., 1:] @ (_weights_H()[1:] * m.wall[1:]))


@lru_cache(maxsize=1)
def _weights_H() -> Array:
    """What each mode takes away from the developed profile at x* = 0, (TERMS,)."""
    P, _, s, w = _legendre(POLYNOMIALS)
    developed = 0.5 * (s - 0.25 * s**2 - 7.0 / 24.0)
    return np.asarray(-((1.0 - s) * w * developed) @ P @ modes(0.0).coefficients)


@lru_cache(maxsize=1)
def _near_inlet_H() -> tuple[float, float]:
    """b, c of Nu = LEVEQUE_H / y + b + c y, y = x*^(1/3), fitted to the series."""
    x = np.array([1.0, 8.0]) * SHORTEST
    return _fit(x, _series_H(x), LEVEQUE_H)


# ----- axial conduction in the fluid


def developed_nusselt_T_with_axial_conduction(peclet: float) -> tuple[float, float]:
    """Developed Nusselt number for T with axial conduction in the fluid, and m of the decay exp(-m x / R).

    Nu rises from 3.6568 (Pe = inf) to 4.1807 (Pe = 0). For H it is 48/11 at every Pe. Computed here: the
    radial problem 4 (s R')' + (m2 + Pe m (1 - s)) R = 0 is quadratic in m; the smallest positive m counts.
    """
    from scipy.linalg import eig

    count = 40
    P, dP, s, w = _legendre(count)
    basis = np.eye(count, count - 1) - np.eye(count, count - 1, -1)
    stiffness = basis.T @ (dP.T * (4.0 * s * w)) @ dP @ basis
    carried = peclet * (basis.T @ (P.T * ((1.0 - s) * w)) @ P @ basis)
    conducted = basis.T @ (P.T * w) @ P @ basis
    n = count - 1
    left = np.block([[np.zeros((n, n)), np.eye(n)], [stiffness, -carried]])
    right = np.block([[np.eye(n), np.zeros((n, n))], [np.zeros((n, n)), conducted]])
    values, vectors = eig(left, right)
    fits = (np.abs(values.imag) < 1e-6 * np.abs(values)) & (values.real > 0.0)
    first = np.flatnonzero(fits)[np.argmin(values.real[fits])]
    m = float(values.real[first])
    R = P @ basis @ vectors[:n, first].real
    flux = w @ ((m**2 + peclet * m * (1.0 - s)) * R)  # twice the slope -dR/dr at the wall
    return float(flux / (w @ (2.0 * (1.0 - s) * R))), m


# ----- viscous heating, and both profiles developing


def nusselt_H_with_dissipation(brinkman: float) -> float:
    """Developed Nusselt number for H with viscous heating, Br = mu U2 / (q D). Source: closed form."""
    return 48.0 / (11.0 + 48.0 * brinkman)


def mean_nusselt_T_flat_inlet(x_star: ArrayLike, prandtl: float) -> Any:
    """Mean Nusselt number from 0 to x*, uniform wall temperature, velocity developing from a flat inlet.

    For 0.7 <= Pr <= 50 and 1e-4 <= x* <= 0.2 it is -0.8 to +6.2 % from an independent computation, not
    published (parabolised equations, two resolutions). Source: Baehr & Stephan, in Bergman et al., eq. 8.58.
    """
    gz = 1.0 / np.asarray(x_star, dtype=float)
    inner = 3.657 / np.tanh(2.264 * gz ** (-1 / 3) + 1.7 * gz ** (-2 / 3)) + 0.0499 * gz * np.tanh(1.0 / gz)
    return inner / np.tanh(2.432 * prandtl ** (1 / 6) * gz ** (-1 / 6))
