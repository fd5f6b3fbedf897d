"""Steady conduction in cylinders, slabs and fins: closed forms, exact unless a function says otherwise.

Heat is told per length of tube [W/m] and counts positive outward; contact resistances and films are given
per area [m2 K/W], [W/(m2 K)] and act on the radius where they sit.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

# ----- resistances


def layer_resistance(r_inner: float, r_outer: float, conductivity: float) -> float:
    """R' [m K/W] of one cylindrical layer: ln(r_o / r_i) / (2 pi k)."""
    return math.log(r_outer / r_inner) / (2.0 * math.pi * conductivity)


def area_resistance(resistance: float, radius: float) -> float:
    """R' [m K/W] of a contact resistance [m2 K/W] at a radius."""
    return resistance / (2.0 * math.pi * radius)


def film_resistance(coefficient: float, radius: float) -> float:
    """R' [m K/W] of a film coefficient [W/(m2 K)] at a radius."""
    return 1.0 / (2.0 * math.pi * radius * coefficient)


def critical_radius(conductivity: float, coefficient: float) -> float:
    """Outer radius [m] of an insulation at which it loses most heat: k / h."""
    return conductivity / coefficient


# ----- layers in series


@dataclass(frozen=True)
class Shell:
    """One cylindrical layer; r_inner = 0 makes it a rod. The contact resistance sits at its inner face."""

    r_inner: float
    r_outer: float
    conductivity: float
    contact_resistance: float = 0.0
    heat_per_volume: float = 0.0


@dataclass(frozen=True)
class Side:
    """What acts on a free surface: a temperature [K] behind a resistance [m2 K/W], or a flux [W/m2] inward.

    The flux counts positive into the body, on the inner and on the outer side alike; 0 is insulation.
    """

    temperature: float | None = None
    resistance: float = 0.0
    flux: float = 0.0


@dataclass(frozen=True)
class ShellSolution:
    """Exact temperature of a stack of shells.

    inner_temperature : per shell, on the shell's own side of its contact resistance [K]
    heat_inner        : per shell, heat through its inner face [W/m], positive outward
    """

    shells: tuple[Shell, ...]
    inner_temperature: tuple[float, ...]
    heat_inner: tuple[float, ...]

    def temperature(self, shell: int, r: ArrayLike) -> Any:
        """Temperature [K] in one shell at radius r."""
        layer = self.shells[shell]
        return self.inner_temperature[shell] + _drop(layer, self.heat_inner[shell], r)

    def outer_temperature(self, shell: int) -> float:
        return float(self.temperature(shell, self.shells[shell].r_outer))

    def heat_outer(self, shell: int) -> float:
        """Heat through the outer face of one shell [W/m], positive outward."""
        return self.heat_inner[shell] + _generated(self.shells[shell])


def solve_shells(shells: Sequence[Shell], inner: Side, outer: Side) -> ShellSolution:
    """Temperature of shells listed from the axis outward, with any contact resistance and generation.

    One side at least must hold a temperature, and a rod's inner side is the axis (insulated).
    """
    first, last = shells[0], shells[-1]
    if inner.temperature is None and outer.temperature is None:
        raise ValueError("a temperature must be given on one side at least")
    if first.r_inner == 0.0 and (inner.temperature is not None or inner.flux != 0.0):
        raise ValueError("the axis of a rod takes no temperature and no flux")

    def march(T: float, heat: float) -> ShellSolution:
        temperatures, heats = [], []
        for layer in shells:
            if layer.r_inner > 0.0:
                T -= heat * area_resistance(layer.contact_resistance, layer.r_inner)
            temperatures.append(T)
            heats.append(heat)
            T = float(T + _drop(layer, heat, layer.r_outer))
            heat += _generated(layer)
        return ShellSolution(tuple(shells), tuple(temperatures), tuple(heats))

    def miss(solution: ShellSolution) -> float:
        """How far the outer side's condition is missed."""
        heat, T = solution.heat_outer(len(shells) - 1), solution.outer_temperature(len(shells) - 1)
        if outer.temperature is None:
            return heat + outer.flux * 2.0 * math.pi * last.r_outer
        return T - heat * area_resistance(outer.resistance, last.r_outer) - outer.temperature

    def trial(unknown: float) -> ShellSolution:
        if inner.temperature is None:
            return march(unknown, inner.flux * 2.0 * math.pi * first.r_inner)
        return march(inner.temperature - unknown * area_resistance(inner.resistance, first.r_inner), unknown)

    # everything is linear in the one unknown, so two trials give it
    at_zero, slope = miss(trial(0.0)), miss(trial(1.0)) - miss(trial(0.0))
    return trial(-at_zero / slope)


def _drop(layer: Shell, heat: float, r: ArrayLike) -> Any:
    """T(r) - T(inner face) in one layer that takes `heat` [W/m] through its inner face."""
    a, g, k = layer.r_inner, layer.heat_per_volume, layer.conductivity
    r = np.asarray(r, dtype=float)
    if a == 0.0:
        return -g / (4.0 * k) * r**2
    log = np.log(r / a)
    return -heat * log / (2.0 * math.pi * k) - g / (4.0 * k) * (r**2 - a**2 - 2.0 * a**2 * log)


def _generated(layer: Shell) -> float:
    return math.pi * (layer.r_outer**2 - layer.r_inner**2) * layer.heat_per_volume


# ----- conductivity linear in temperature (Kirchhoff)


def linear_conductivity_heat(
    T_inner: float, T_outer: float, r_inner: float, r_outer: float, k0: float, slope: float, T0: float
) -> float:
    """Heat outward [W/m] through a layer with k = k0 (1 + slope (T - T0)): the mean conductivity counts."""
    k_mean = k0 * (1.0 + slope * (0.5 * (T_inner + T_outer) - T0))
    return 2.0 * math.pi * k_mean * (T_inner - T_outer) / math.log(r_outer / r_inner)


def linear_conductivity_temperature(
    r: ArrayLike, T_inner: float, T_outer: float, r_inner: float, r_outer: float, slope: float, T0: float
) -> Any:
    """Temperature [K] at radius r of the same layer; its Kirchhoff variable is straight in ln r."""
    share = np.log(np.divide(r, r_inner)) / math.log(r_outer / r_inner)

    def kirchhoff(T: Any) -> Any:
        return (T - T0) + 0.5 * slope * (T - T0) ** 2

    potential = kirchhoff(T_inner) + share * (kirchhoff(T_outer) - kirchhoff(T_inner))
    if slope == 0.0:
        return T0 + potential
    # the root that tends to the potential itself as the slope vanishes
    return T0 + 2.0 * potential / (1.0 + np.sqrt(1.0 + 2.0 * slope * potential))


# ----- slab


def slab_temperature(
    x: ArrayLike,
    T_left: float,
    T_right: float,
    thickness: float,
    conductivity: float,
    heat_per_volume: float = 0.0,
) -> Any:
    """Temperature [K] in a slab between two temperatures with uniform generation [W/m3]."""
    x = np.asarray(x, dtype=float)
    straight = T_left + (T_right - T_left) * x / thickness
    return straight + heat_per_volume / (2.0 * conductivity) * x * (thickness - x)


# ----- along a wall


def fin_temperature(x: ArrayLike, length: float, spreading_length: float) -> Any:
    """(T - T_ambient) / (T_base - T_ambient) along a fin from its base, insulated tip.

    spreading_length = sqrt(k A / (h P)) [m]; one-dimensional: the fin is thin beside its own resistance.
    """
    x = np.asarray(x, dtype=float)
    # cosh((L - x)/s) / cosh(L/s) without overflow
    near, far = np.exp(-x / spreading_length), np.exp((x - 2.0 * length) / spreading_length)
    return (near + far) / (1.0 + math.exp(-2.0 * length / spreading_length))


def fin_heat(conductivity: float, area: float, length: float, spreading_length: float, excess: float) -> float:
    """Heat [W] into the base of the same fin, its base `excess` [K] above the ambient."""
    return conductivity * area * excess * math.tanh(length / spreading_length) / spreading_length


def wall_flux_share(x_over_length: ArrayLike, transfer_units: float, axial_number: float) -> Any:
    """q_inner / q_mean along a tube whose wall conducts, uniform outer flux, insulated wall ends.

    One-dimensional wall and fluid, constant coefficient: transfer_units N = h P L / (m cp), axial_number
    M = (k_w A_w / L) / (m cp). Source: closed form of the model behind the axial conduction number of
    Maranzana, Perry & Maillet 2004, Int. J. Heat Mass Transfer 47, 3993.
    """
    n, m = transfer_units, axial_number
    x = np.asarray(x_over_length, dtype=float)
    root = math.sqrt(n**2 + 4.0 * n / m)
    rising, falling = 0.5 * (root - n), -0.5 * (root + n)
    # wall minus fluid D = 1/n + a exp(rising (x - 1)) + b exp(falling x), in units of the fluid's rise; at
    # both ends the wall temperature has no slope and the fluid's is n D, so D' = -n D there
    left = np.array([(rising + n) * math.exp(-rising), falling + n])
    right = np.array([rising + n, (falling + n) * math.exp(falling)])
    a, b = np.linalg.solve(np.array([left, right]), np.array([-1.0, -1.0]))
    return 1.0 + n * (a * np.exp(rising * (x - 1.0)) + b * np.exp(falling * x))


# ----- two dimensions


def wavy_cylinder_temperature(
    r: ArrayLike, z: ArrayLike, r_inner: float, r_outer: float, length: float, waves: int, outer_biot: float
) -> Any:
    """(T - T_mean) / amplitude in a hollow cylinder under an ambient mean + amplitude cos(waves pi z / L).

    Insulated inner face and ends; outer film of outer_biot = h r_outer / k, inf for a given temperature;
    waves = 1, 2, ... half waves along the length. Source: separation of variables, exact.
    """
    from scipy.special import i0, i1, k0, k1

    kappa = waves * math.pi / length
    slope_ratio = i1(kappa * r_inner) / k1(kappa * r_inner)

    def shape(rho: Any) -> Any:
        return i0(kappa * rho) + slope_ratio * k0(kappa * rho)

    surface = shape(r_outer)
    if not math.isinf(outer_biot):
        steepness = kappa * (i1(kappa * r_outer) - slope_ratio * k1(kappa * r_outer))
        surface = surface + steepness * r_outer / outer_biot
    return shape(np.asarray(r, dtype=float)) / surface * np.cos(kappa * np.asarray(z, dtype=float))
