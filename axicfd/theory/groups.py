"""Dimensionless numbers of laminar flow and heat transfer in ducts, each defined once.

Plain numbers or arrays in SI units. D is the hydraulic diameter 4 A / wetted perimeter (the bore of a tube).
"""

from __future__ import annotations

import math


def tube_area(diameter: float) -> float:
    """Cross-section of a bore [m2]."""
    return 0.25 * math.pi * diameter**2


def mean_velocity(mass_flow: float, density: float, area: float) -> float:
    """Mean axial velocity [m/s] of a mass flow [kg/s]."""
    return mass_flow / (density * area)


def reynolds(density: float, velocity: float, diameter: float, viscosity: float) -> float:
    """Re = rho U D / mu: inertia over friction."""
    return density * velocity * diameter / viscosity


def prandtl(viscosity: float, specific_heat: float, conductivity: float) -> float:
    """Pr = mu cp / k: how much faster momentum spreads than heat."""
    return viscosity * specific_heat / conductivity


def peclet(reynolds_number: float, prandtl_number: float) -> float:
    """Pe = Re Pr = U D / alpha: heat carried over heat conducted."""
    return reynolds_number * prandtl_number


def graetz(peclet_number: float, diameter: float, heated_length: float) -> float:
    """Gz = Pe D / L_heated, the inverse of x* at the end of the heated length (not the form with pi/4)."""
    return peclet_number * diameter / heated_length


def x_star(x: float, diameter: float, peclet_number: float) -> float:
    """x* = x / (D Pe): distance along a thermal entrance."""
    return x / (diameter * peclet_number)


def x_plus(x: float, diameter: float, reynolds_number: float) -> float:
    """x+ = x / (D Re): distance along a hydrodynamic entrance (not the form with a factor 2)."""
    return x / (diameter * reynolds_number)


def nusselt(wall_flux: float, diameter: float, conductivity: float, wall_minus_bulk: float) -> float:
    """Nu = q D / (k (T_wall - T_bulk)), q [W/m2] positive into the stream."""
    return wall_flux * diameter / (conductivity * wall_minus_bulk)


def brinkman_of_difference(viscosity: float, velocity: float, conductivity: float, difference: float) -> float:
    """Br = mu U2 / (k dT): viscous heating over conduction across a temperature difference dT."""
    return viscosity * velocity**2 / (conductivity * difference)


def brinkman_of_flux(viscosity: float, velocity: float, wall_flux: float, diameter: float) -> float:
    """Br = mu U2 / (q D): viscous heating over the wall's heat, q [W/m2] positive into the stream."""
    return viscosity * velocity**2 / (wall_flux * diameter)


def darcy_friction_factor(wall_shear: float, density: float, velocity: float) -> float:
    """f = 8 tau_wall / (rho U2): four times Fanning's factor."""
    return 8.0 * wall_shear / (density * velocity**2)


def overall_biot(resistance_per_length: float, conductivity: float) -> float:
    """Bi = U D / k of a tube whose wall and outside resist with R' [m K/W] in all; U refers to the bore.

    The diameter cancels: U pi D = 1 / R', so Bi = 1 / (pi k R'). Infinite for R' = 0, a given temperature.
    """
    if resistance_per_length == 0.0:
        return math.inf
    return 1.0 / (math.pi * conductivity * resistance_per_length)


def axial_conduction_number(wall_conductivity: float, wall_area: float, length: float, capacity_flow: float) -> float:
    """M = (k_w A_w / L) / (m cp): heat conducted along the wall over heat carried by the stream.

    wall_area [m2] is the wall's cross-section, capacity_flow m cp in W/K. The effect on the wall flux is a
    few per cent in the middle of the tube for M = 0.01, more near its ends. Source: Maranzana, Perry &
    Maillet 2004, Int. J. Heat Mass Transfer 47, 3993 (from memory).
    """
    return wall_conductivity * wall_area / (length * capacity_flow)


AXIAL_CONDUCTION_LIMIT = 0.01
"""M below which wall conduction is usually neglected. Source: Maranzana et al. 2004, from memory."""


def spreading_length(wall_conductivity: float, wall_area: float, coefficient: float, perimeter: float) -> float:
    """Length [m] over which heat spreads along a wall that loses it: sqrt(k_w A_w / (h P)), the fin length.

    coefficient [W/(m2 K)] acts on a perimeter [m].
    """
    return math.sqrt(wall_conductivity * wall_area / (coefficient * perimeter))
