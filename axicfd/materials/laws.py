"""Laws: a property as a function of absolute temperature, with its derivative and its integral.

Every law is a small frozen, hashable object that evaluates on arrays of any shape and never raises once it
is built: an iteration may pass through temperatures that make no sense. Whether the temperatures of a
solution lie inside `span` is judged afterwards, by whoever reads the solution.

    law(T)              value at T [K], same shape as T (a float gives a float)
    law.derivative(T)   d(value)/dT
    law.integral(a, b)  integral of exactly what law(T) returns, from a to b [K]; enthalpies come from here
    law.span            (lowest, highest) temperature the data cover [K], infinite where unlimited
    law.is_constant     True if the value does not depend on temperature
    law.extended()      the same law going on beyond its span instead of holding its end values
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

UNLIMITED = (-math.inf, math.inf)
LARGEST_EXPONENT = 300.0  # exp() is cut here: far outside any property, far inside floating point
SMALLEST_SHARE = 0.01  # a straight continuation stops falling at this share of the end value: a property stays positive
GAUSS_POINTS = 16  # per piece of a logarithmic table; exact to rounding for any change below some e^10 per piece


@dataclass(frozen=True)
class Constant:
    """A property that does not depend on temperature."""

    value: float

    is_constant = True
    span = UNLIMITED

    def __call__(self, T: ArrayLike) -> Any:
        return np.full(np.shape(T), self.value)[()]

    def derivative(self, T: ArrayLike) -> Any:
        return np.zeros(np.shape(T))[()]

    def integral(self, T0: ArrayLike, T: ArrayLike) -> Any:
        return self.value * np.subtract(T, T0, dtype=float)[()]

    def extended(self) -> Constant:
        return self


@dataclass(frozen=True)
class Exponential:
    """value * exp(-exponent * (T - at)): a falling viscosity where exponent [1/K] is positive."""

    at: float
    value: float
    exponent: float

    span = UNLIMITED

    @property
    def is_constant(self) -> bool:
        return self.exponent == 0.0

    def __call__(self, T: ArrayLike) -> Any:
        power = -self.exponent * (np.asarray(T, dtype=float) - self.at)
        return (self.value * np.exp(np.clip(power, -LARGEST_EXPONENT, LARGEST_EXPONENT)))[()]

    def derivative(self, T: ArrayLike) -> Any:
        return -self.exponent * self(T)

    def integral(self, T0: ArrayLike, T: ArrayLike) -> Any:
        if self.is_constant:
            return Constant(self.value).integral(T0, T)
        # expm1 keeps the digits where T is close to T0
        step = np.clip(-self.exponent * np.subtract(T, T0, dtype=float), -LARGEST_EXPONENT, LARGEST_EXPONENT)
        return (-self(T0) * np.expm1(step) / self.exponent)[()]

    def extended(self) -> Exponential:
        return self


@dataclass(frozen=True)
class IdealGasDensity:
    """Density of an ideal gas, pressure / (gas_constant * T), at one absolute pressure [Pa].

    gas_constant is that of the gas, in J/(kg K). Below 1 K, where no gas is, the value of 1 K is returned so
    that no iteration can divide by zero.
    """

    pressure: float
    gas_constant: float

    is_constant = False
    span = (1.0, math.inf)

    def __call__(self, T: ArrayLike) -> Any:
        return (self.pressure / self.gas_constant / np.maximum(T, 1.0))[()]

    def derivative(self, T: ArrayLike) -> Any:
        slope = -self.pressure / self.gas_constant / np.maximum(T, 1.0) ** 2
        return np.where(np.less(T, 1.0), 0.0, slope)[()]

    def integral(self, T0: ArrayLike, T: ArrayLike) -> Any:
        def from_one_kelvin(t: ArrayLike) -> Array:
            return np.log(np.maximum(t, 1.0)) + np.minimum(np.subtract(t, 1.0), 0.0)

        return (self.pressure / self.gas_constant * (from_one_kelvin(T) - from_one_kelvin(T0)))[()]

    def extended(self) -> IdealGasDensity:
        return self


@dataclass(frozen=True)
class Table:
    """Points (temperature [K] rising, value) joined by a monotone, once differentiable curve.

    Between the points the curve has no bump that the points do not have (piecewise cubic with the slopes of
    Fritsch & Butland 1984, SIAM J. Sci. Stat. Comput. 5, 300). `logarithmic` interpolates ln(value): right
    for a viscosity, which falls by equal factors rather than equal amounts. Outside the points the end value
    is held, unless `goes_on`: then the curve goes straight on with its end slope (in ln if logarithmic), a
    falling one no further than to a hundredth of the end value.
    """

    temperature: tuple[float, ...]
    value: tuple[float, ...]
    logarithmic: bool = False
    goes_on: bool = False

    def __post_init__(self) -> None:
        object.__setattr__(self, "temperature", tuple(float(t) for t in self.temperature))
        object.__setattr__(self, "value", tuple(float(v) for v in self.value))
        if len(self.temperature) != len(self.value) or len(self.temperature) < 2:
            raise ValueError("a table needs as many values as temperatures, and two or more of them")
        if not all(map(math.isfinite, self.temperature + self.value)):
            raise ValueError("a table holds finite numbers only")
        if any(b <= a for a, b in zip(self.temperature, self.temperature[1:], strict=False)):
            raise ValueError("the temperatures of a table must rise from point to point")
        if self.logarithmic and min(self.value) <= 0.0:
            raise ValueError("the values of a logarithmic table must be greater than 0")

    @property
    def span(self) -> tuple[float, float]:
        return self.temperature[0], self.temperature[-1]

    @property
    def is_constant(self) -> bool:
        return len(set(self.value)) == 1

    def extended(self) -> Table:
        return replace(self, goes_on=True)

    @cached_property
    def _curve(self) -> _Pieces:
        T = np.array(self.temperature)
        y = np.log(self.value) if self.logarithmic else np.array(self.value)
        return _joined(T, y, self.goes_on, share_floor=not self.logarithmic)

    def __call__(self, T: ArrayLike) -> Any:
        y = self._curve.value(np.asarray(T, dtype=float))
        return (self._exp(y) if self.logarithmic else y)[()]

    def derivative(self, T: ArrayLike) -> Any:
        T = np.asarray(T, dtype=float)
        slope = self._curve.slope(T)
        return (slope * self._exp(self._curve.value(T)) if self.logarithmic else slope)[()]

    def integral(self, T0: ArrayLike, T: ArrayLike) -> Any:
        primitive = self._log_primitive if self.logarithmic else self._curve.primitive
        return (primitive(np.asarray(T, dtype=float)) - primitive(np.asarray(T0, dtype=float)))[()]

    @staticmethod
    def _exp(y: Array) -> Array:
        return np.exp(np.clip(y, -LARGEST_EXPONENT, LARGEST_EXPONENT))

    def _log_primitive(self, T: Array) -> Array:
        """Integral of the curve from the first temperature to T, by Gauss points in each piece."""
        return self._curve.primitive_of(self._exp, T, self._log_sums)

    @cached_property
    def _log_sums(self) -> Array:
        return self._curve.sums_of(self._exp)


Law = Constant | Exponential | Table | IdealGasDensity


# the curve through a table


@dataclass(frozen=True, eq=False)
class _Pieces:
    """A piecewise cubic on the whole line: piece i lies between breaks i-1 and i, the end ones are unlimited.

    breaks : (m,)       rising [K]
    origin : (m + 1,)   [K] where the local coordinate of each piece is 0
    c      : (m + 1, 4) value = c0 + c1 s + c2 s^2 + c3 s^3, s = T - origin
    """

    breaks: Array
    origin: Array
    c: Array

    def value(self, T: Array) -> Array:
        i = np.searchsorted(self.breaks, T)
        s = T - self.origin[i]
        return ((self.c[i, 3] * s + self.c[i, 2]) * s + self.c[i, 1]) * s + self.c[i, 0]

    def slope(self, T: Array) -> Array:
        i = np.searchsorted(self.breaks, T)
        s = T - self.origin[i]
        return (3.0 * self.c[i, 3] * s + 2.0 * self.c[i, 2]) * s + self.c[i, 1]

    def primitive(self, T: Array) -> Array:
        i = np.searchsorted(self.breaks, T)
        return self._up_to(i, T - self.origin[i]) + self._sums[i]

    def _up_to(self, i: Any, s: Array) -> Array:
        """Integral over piece i from its origin to s."""
        c = self.c
        return (((c[i, 3] / 4.0 * s + c[i, 2] / 3.0) * s + c[i, 1] / 2.0) * s + c[i, 0]) * s

    @cached_property
    def _sums(self) -> Array:
        """Integral from break 0 to the origin of each piece, (m + 1,)."""
        i = np.arange(1, len(self.breaks))
        inner = self._up_to(i, np.diff(self.breaks))
        return _running(inner)

    def sums_of(self, function: Callable[[Array], Array]) -> Array:
        """The same for function(value)."""
        inner = _gauss(lambda T: function(self.value(T)), self.breaks[:-1], self.breaks[1:])
        return _running(inner)

    def primitive_of(self, function: Callable[[Array], Array], T: Array, sums: Array) -> Array:
        i = np.searchsorted(self.breaks, T)
        return _gauss(lambda t: function(self.value(t)), self.origin[i], T) + sums[i]


def _running(inner: Array) -> Array:
    # pieces 0 and 1 both start at break 0, so both begin at zero
    return np.concatenate([[0.0], [0.0], np.cumsum(inner)])


def _gauss(function: Callable[[Array], Array], a: Array, b: Array) -> Array:
    """Integral of function from a to b (arrays of one shape); each interval lies within one smooth piece."""
    x, w = np.polynomial.legendre.leggauss(GAUSS_POINTS)
    half = 0.5 * (b - a)
    nodes = np.expand_dims(a + half, -1) + np.expand_dims(half, -1) * x
    return np.asarray((function(nodes) @ w) * half)


def _joined(T: Array, y: Array, goes_on: bool, share_floor: bool) -> _Pieces:
    """The pieces through points (T, y), with what happens outside them."""
    d = _slopes(T, y)
    h = np.diff(T)
    rise = np.diff(y) / h
    inner = np.column_stack([y[:-1], d[:-1], (3 * rise - 2 * d[:-1] - d[1:]) / h, (d[:-1] + d[1:] - 2 * rise) / h**2])
    breaks, origin, c = (
        list(T),
        [T[0], *T[:-1], T[-1]],
        [np.array([y[0], 0, 0, 0]), *inner, np.array([y[-1], 0, 0, 0])],
    )
    if goes_on:
        c[0][1], c[-1][1] = d[0], d[-1]
        if share_floor:
            _stop_falling(breaks, origin, c)
    return _Pieces(np.array(breaks), np.array(origin), np.array(c))


def _stop_falling(breaks: list[float], origin: list[float], c: list[Array]) -> None:
    """Where a straight continuation falls towards zero, let it hold a small share of the end value."""
    end, slope = c[-1][0], c[-1][1]
    if end * slope < 0.0:
        breaks.append(origin[-1] + (SMALLEST_SHARE - 1.0) * end / slope)
        origin.append(breaks[-1])
        c.append(np.array([SMALLEST_SHARE * end, 0.0, 0.0, 0.0]))
    end, slope = c[0][0], c[0][1]
    if end * slope > 0.0:
        reach = origin[0] - (1.0 - SMALLEST_SHARE) * end / slope
        # the falling piece now lies between two breaks and is told from its left one
        c[0] = np.array([SMALLEST_SHARE * end, slope, 0.0, 0.0])
        origin[0] = reach
        breaks.insert(0, reach)
        origin.insert(0, reach)
        c.insert(0, np.array([SMALLEST_SHARE * end, 0.0, 0.0, 0.0]))


def _slopes(T: Array, y: Array) -> Array:
    """Slope at each point that keeps the curve monotone between points, (n,)."""
    h = np.diff(T)
    rise = np.diff(y) / h
    if len(T) == 2:
        return np.array([rise[0], rise[0]])
    d = np.zeros(len(T))
    same_way = rise[:-1] * rise[1:] > 0.0
    w1, w2 = 2 * h[1:] + h[:-1], h[1:] + 2 * h[:-1]
    left, right = np.where(same_way, rise[:-1], 1.0), np.where(same_way, rise[1:], 1.0)
    d[1:-1] = np.where(same_way, (w1 + w2) / (w1 / left + w2 / right), 0.0)
    d[0] = _end_slope(h[0], h[1], rise[0], rise[1])
    d[-1] = _end_slope(h[-1], h[-2], rise[-1], rise[-2])
    return d


def _end_slope(h0: float, h1: float, rise0: float, rise1: float) -> float:
    """Slope of the parabola through the last three points, cut back so that the end piece stays monotone."""
    d = ((2 * h0 + h1) * rise0 - h0 * rise1) / (h0 + h1)
    if d * rise0 <= 0.0:
        return 0.0
    if rise0 * rise1 <= 0.0 and abs(d) > 3.0 * abs(rise0):
        return 3.0 * rise0
    return float(d)
