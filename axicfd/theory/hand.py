"""The hand estimate: what an engineer gets from closed forms before anything is solved.

Constant properties, developed velocity, heat going straight through the wall (no conduction along it), no
viscous heating. Each stretch of the tube starts a new thermal entrance at its own bulk temperature, which is
exact for the first heated stretch and gives too low a wall temperature behind another heated one.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from axicfd.theory import duct_flow, duct_heat, groups

LARGEST_BIOT = 1e6  # beyond it a film is a given temperature, to 1e-5 of the Nusselt number


@dataclass(frozen=True)
class HandStream:
    """The stream at its inlet: kg/s, K, m, kg/m3, J/(kg K), W/(m K), Pa s."""

    mass_flow: float
    inlet_temperature: float
    bore: float
    density: float
    specific_heat: float
    conductivity: float
    viscosity: float
    flat_inlet: bool = True


@dataclass(frozen=True)
class Stretch:
    """One section of the tube; sections are listed in the direction of flow.

    length          : [m]
    heat_per_length : [W/m] from outside fluxes and from generation in the wall, positive into the tube
    ambient         : [K] temperature that holds behind `resistance`; None where only the heat is given
    wall_resistance : [m K/W] from the bore's wall to the outer surface: layers and contacts in series
    resistance      : [m K/W] from the bore's wall to the ambient: the same plus the outside film or contact
    """

    length: float
    heat_per_length: float = 0.0
    ambient: float | None = None
    wall_resistance: float = 0.0
    resistance: float = 0.0


@dataclass(frozen=True)
class StretchEstimate:
    """What comes out for one stretch; z counts from the inlet [m], temperatures in K.

    mean_nusselt : from bulk to wall for a given heat or wall temperature, from bulk to ambient (U D / k)
                   behind a resistance; None where the stretch is insulated
    """

    end_z: float
    end_bulk_temperature: float
    mean_nusselt: float | None
    heat: float
    hottest_wall: float
    hottest_wall_z: float
    hottest_outside: float


@dataclass(frozen=True)
class HandEstimate:
    """The estimate of the whole tube, SI units; entry lengths from the inlet or the start of heating."""

    outlet_temperature: float
    pressure_drop: float
    heat_gain: float
    hottest_wetted_wall: float
    hottest_wetted_wall_z: float
    hottest_outside: float
    reynolds: float
    prandtl: float
    peclet: float
    hydrodynamic_entry_length: float
    thermal_entry_length: float
    viscous_rise: float
    stretches: tuple[StretchEstimate, ...]


def hand_estimate(stream: HandStream, stretches: Sequence[Stretch]) -> HandEstimate | None:
    """Outlet temperature, pressure drop and hottest wall by closed forms; None where nothing flows.

    Pressure: 128 mu Q L / (pi D4), with the developing flow of a flat inlet by Shah 1978. Heat: the Graetz
    series of each stretch for its given heat (H), wall temperature (T) or ambient (film).
    thermal_entry_length is 0.0431 D Re Pr (uniform flux, the longer of the two). viscous_rise [K] is what
    the pressure drop would warm the stream by, drop / (rho cp); it is left out of everything else.
    """
    if stream.mass_flow == 0.0:
        return None
    area = groups.tube_area(stream.bore)
    velocity = groups.mean_velocity(stream.mass_flow, stream.density, area)
    reynolds = groups.reynolds(stream.density, velocity, stream.bore, stream.viscosity)
    prandtl = groups.prandtl(stream.viscosity, stream.specific_heat, stream.conductivity)
    peclet = groups.peclet(reynolds, prandtl)

    found: list[StretchEstimate] = []
    z, bulk = 0.0, stream.inlet_temperature
    for stretch in stretches:
        found.append(_pass_through(stream, stretch, peclet, z, bulk))
        z, bulk = found[-1].end_z, found[-1].end_bulk_temperature

    if stream.flat_inlet:
        drop = duct_flow.entrance_pressure_drop(stream.density, stream.viscosity, velocity, z, stream.bore)
    else:
        drop = duct_flow.developed_pressure_drop(stream.viscosity, velocity * area, z, stream.bore)
    hottest = max(found, key=lambda stretch: stretch.hottest_wall)
    return HandEstimate(
        outlet_temperature=bulk,
        pressure_drop=drop,
        heat_gain=stream.mass_flow * stream.specific_heat * (bulk - stream.inlet_temperature),
        hottest_wetted_wall=hottest.hottest_wall,
        hottest_wetted_wall_z=hottest.hottest_wall_z,
        hottest_outside=max(stretch.hottest_outside for stretch in found),
        reynolds=reynolds,
        prandtl=prandtl,
        peclet=peclet,
        hydrodynamic_entry_length=float(duct_flow.entry_length(reynolds)) * stream.bore,
        thermal_entry_length=duct_heat.ENTRY_LENGTH_H * stream.bore * peclet,
        viscous_rise=drop / (stream.density * stream.specific_heat),
        stretches=tuple(found),
    )


def _pass_through(stream: HandStream, stretch: Stretch, peclet: float, z: float, bulk: float) -> StretchEstimate:
    """One stretch, entered at z with a bulk temperature; the wall is hottest at one of its two ends."""
    x = groups.x_star(stretch.length, stream.bore, peclet)
    start = min(x, duct_heat.SHORTEST)
    capacity_flow = stream.mass_flow * stream.specific_heat
    if stretch.ambient is None:
        heat = stretch.heat_per_length * stretch.length
        end_bulk = bulk + heat / capacity_flow
        # q D / k of a heat per length: q = heat_per_length / (pi D)
        scale = stretch.heat_per_length / (math.pi * stream.conductivity)
        wall = [bulk + scale * float(duct_heat.wall_H(place)) for place in (start, x)]
        outside = [T + stretch.heat_per_length * stretch.wall_resistance for T in wall]
        mean = float(duct_heat.mean_nusselt_H(x)) if stretch.heat_per_length != 0.0 else None
    else:
        # heat put in at the outer surface acts like a warmer ambient
        outer_resistance = max(stretch.resistance - stretch.wall_resistance, 0.0)
        ambient = stretch.ambient + stretch.heat_per_length * outer_resistance
        biot = groups.overall_biot(stretch.resistance, stream.conductivity)
        if biot > LARGEST_BIOT:
            wall = outside = [ambient, ambient]
            mean = float(duct_heat.mean_nusselt_T(x))
        else:
            shares = [float(duct_heat.wall_film(place, biot)) for place in (start, x)]
            wall = [ambient - (ambient - bulk) * share for share in shares]
            to_outside = stretch.wall_resistance / stretch.resistance
            outside = [T + (ambient - T) * to_outside for T in wall]
            mean = float(duct_heat.mean_overall_nusselt(x, biot))
        end_bulk = ambient - (ambient - bulk) * math.exp(-4.0 * mean * x)
        heat = capacity_flow * (end_bulk - bulk)
    at_end = wall[1] >= wall[0]
    return StretchEstimate(
        end_z=z + stretch.length,
        end_bulk_temperature=end_bulk,
        mean_nusselt=mean,
        heat=heat,
        hottest_wall=max(wall),
        hottest_wall_z=z + stretch.length if at_end else z,
        hottest_outside=max(outside),
    )
