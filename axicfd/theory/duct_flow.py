"""Laminar flow in a tube: the developed profile, its friction, and the entrance.

Friction factors are Darcy's (four times Fanning's). Lengths in the entrance are x+ = x / (D Re).
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

DARCY_F_RE = 64.0
"""f Re of developed flow in a tube. Source: Hagen-Poiseuille, exact."""


def developed_velocity(r: ArrayLike, radius: float, mean_velocity: float = 1.0) -> Any:
    """Axial velocity [m/s] at radius r: 2 U (1 - r2/R2). Source: Hagen-Poiseuille, exact."""
    return 2.0 * mean_velocity * (1.0 - np.square(np.divide(r, radius)))


def developed_pressure_drop(viscosity: float, volume_flow: float, length: float, diameter: float) -> float:
    """Pressure drop [Pa] of developed flow: 128 mu Q L / (pi D4). Source: Hagen-Poiseuille, exact."""
    return 128.0 * viscosity * volume_flow * length / (math.pi * diameter**4)


def developed_wall_shear(viscosity: float, mean_velocity: float, diameter: float) -> float:
    """Wall shear stress [Pa] of developed flow: 8 mu U / D. Source: Hagen-Poiseuille, exact."""
    return 8.0 * viscosity * mean_velocity / diameter


def apparent_f_re(x_plus: ArrayLike) -> Any:
    """Darcy f_app Re from a flat inlet to x+; the pressure drop is (f_app Re) x+ in units of rho U2 / 2.

    Within 2.4 % as its author says; -2.0 to +1.0 % against `hydro_entrance_boundary_layer.csv` for x+ from
    1e-5 to 0.5. Below Re of about 100 the drop is larger. Source: Shah 1978, J. Fluids Eng. 100, 177 (formula
    from memory).
    """
    root = 3.44 / np.sqrt(x_plus)
    x = np.asarray(x_plus, dtype=float)
    fanning = root + (1.25 / (4.0 * x) + 16.0 - root) / (1.0 + 0.00021 / x**2)
    return (4.0 * fanning)[()]


def entrance_pressure_drop(
    density: float, viscosity: float, mean_velocity: float, length: float, diameter: float
) -> float:
    """Pressure drop [Pa] from a flat inlet over a length, the developing flow included (Shah 1978)."""
    reynolds = density * mean_velocity * diameter / viscosity
    x_plus = length / (diameter * reynolds)
    return float(apparent_f_re(x_plus)) * x_plus * 0.5 * density * mean_velocity**2


def developed_mean_velocity(drop: float, viscosity: float, length: float, diameter: float) -> float:
    """Mean velocity [m/s] of developed flow that a pressure drop [Pa] drives. Source: Hagen-Poiseuille, exact."""
    return drop * diameter**2 / (32.0 * viscosity * length)


def entrance_mean_velocity(drop: float, density: float, viscosity: float, length: float, diameter: float) -> float:
    """Mean velocity [m/s] from a flat inlet that a pressure drop [Pa] drives: `entrance_pressure_drop` inverted."""
    from scipy.optimize import brentq

    highest = developed_mean_velocity(drop, viscosity, length, diameter)  # the entrance costs something on top
    if entrance_pressure_drop(density, viscosity, highest, length, diameter) <= drop:
        return highest  # it costs less than round-off

    def excess(log_share: float) -> float:
        velocity = highest * math.exp(log_share)
        return math.log(entrance_pressure_drop(density, viscosity, velocity, length, diameter) / drop)

    low = -1.0
    while excess(low) > 0.0:
        low *= 2.0
    return highest * math.exp(brentq(excess, low, 0.0, xtol=1e-10))


def entry_length(reynolds: ArrayLike) -> Any:
    """L/D from a flat inlet to 99 % of the developed axis velocity, for any laminar Reynolds number.

    [0.619^1.6 + (0.0567 Re)^1.6]^(1/1.6); within 1.6 % of `hydro_entrance_navier_stokes.csv` but 3 to 5 %
    long for Re from 5 to 20. Source: Durst, Ray, Unsal & Bayoumi 2005, J. Fluids Eng. 127, 1154 (from
    memory).
    """
    return (0.619**1.6 + (0.0567 * np.asarray(reynolds, dtype=float)) ** 1.6) ** (1.0 / 1.6)


def entry_length_chen(reynolds: ArrayLike) -> Any:
    """The same length: 0.60 / (0.035 Re + 1) + 0.056 Re, good from Re 50 (-1.2 to +0.9 %), 15 % long at 10.

    Source: Chen 1973, J. Fluids Eng. 95, 153 (from memory).
    """
    re = np.asarray(reynolds, dtype=float)
    return 0.60 / (0.035 * re + 1.0) + 0.056 * re
