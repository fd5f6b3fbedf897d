"""Inlets, outsides, ends and heat sources of a case as the arrays that kernels take.

Heat is in W and positive into the tube; temperatures are measured from the inlet temperature.
"""

from dataclasses import dataclass

import numpy as np

from axicfd.case.keys import ZTable
from axicfd.case.layout import Layout
from axicfd.case.model import Case, FileProfile, Outside
from axicfd.mesh.grid import NOTHING, Array, Grid
from axicfd.theory import duct_flow

NO_EXCHANGE = np.inf
CORNER = 0.1  # bore radii from the wall's corner at an inlet within which friction and work of pressure count less


@dataclass(frozen=True)
class Exchange:
    """Heat through a row of boundary faces: what is brought in, and a resistance to a temperature.

    brought    : (n,) [W] heat brought in regardless of temperature
    temperature: (n,) [K] of the surroundings, plate or clamp
    resistance : (n,) [K/W] between that temperature and the face; infinite where there is no such exchange
    """

    brought: Array
    temperature: Array
    resistance: Array

    def linear(self, half: Array) -> tuple[Array, Array]:
        """(a, b) of the heat a - b T* into a cell whose node is `half` [K/W] away from the face.

        T* is the node temperature with the rise of its own source. The face temperature is T* + half * heat.
        """
        exchanging = np.isfinite(self.resistance)
        resistance = np.where(exchanging, self.resistance, 0.0)
        b = np.where(exchanging, 1.0 / (resistance + half), 0.0)
        a = np.where(exchanging, b * (self.brought * resistance + self.temperature), self.brought)
        return a, b


def no_exchange(n: int) -> Exchange:
    return Exchange(np.zeros(n), np.zeros(n), np.full(n, NO_EXCHANGE))


def cell_means(value: float | ZTable, z0: float, z: Array) -> Array:
    """Exact means over the cells between faces z of a value or a table whose z starts at z0; (len(z) - 1,)."""
    if not isinstance(value, ZTable):
        return np.full(len(z) - 1, float(value))
    zt, vt = np.asarray(value.z) + z0, np.asarray(value.value)
    area = np.concatenate([[0.0], np.cumsum(0.5 * (vt[1:] + vt[:-1]) * np.diff(zt))])
    x = np.clip(z, zt[0], zt[-1])
    k = np.clip(np.searchsorted(zt, x, side="right") - 1, 0, len(zt) - 2)
    width = np.maximum(zt[k + 1] - zt[k], 1e-300)
    share = (x - zt[k]) / width
    integral = area[k] + (x - zt[k]) * (vt[k] + 0.5 * share * (vt[k + 1] - vt[k]))
    integral += vt[0] * np.minimum(z - zt[0], 0.0) + vt[-1] * np.maximum(z - zt[-1], 0.0)
    return np.diff(integral) / np.diff(z)


def outside(case: Case, grid: Grid, t_in: float) -> Exchange:
    """The outside condition of every station."""
    layout = grid.layout
    exchange = no_exchange(grid.nz)
    for k, placed in enumerate(layout.sections):
        i0, i1 = np.searchsorted(grid.section, [k, k + 1])
        surface = placed.layers[-1]
        if surface.kind == "void":
            continue
        here = slice(i0, i1)
        z, area = grid.z[i0 : i1 + 1], 2.0 * np.pi * surface.r_outer * grid.dz[here]
        condition = placed.outside
        exchange.brought[here] = _brought(condition, placed.z0, z, area, placed.z1 - placed.z0)
        if condition.film_coefficient is not None and condition.ambient is not None:
            h = cell_means(condition.film_coefficient, placed.z0, z)
            exchange.temperature[here] = cell_means(condition.ambient, placed.z0, z) - t_in
            exchange.resistance[here] = np.divide(1.0, h * area, out=np.full(i1 - i0, NO_EXCHANGE), where=h > 0.0)
        elif condition.temperature is not None:
            exchange.temperature[here] = cell_means(condition.temperature, placed.z0, z) - t_in
            exchange.resistance[here] = cell_means(condition.contact_resistance or 0.0, placed.z0, z) / area
    return exchange


def _brought(condition: Outside, z0: float, z: Array, area: Array, length: float) -> Array:
    """(n,) [W] heat brought in over the cells between faces z."""
    if condition.heat_flux is not None:
        return cell_means(condition.heat_flux, z0, z) * area
    if condition.heat is not None:
        return condition.heat / length * np.diff(z)
    if condition.heat_per_length is not None:
        return cell_means(condition.heat_per_length, z0, z) * np.diff(z)
    return np.zeros(len(z) - 1)


def counted_near_corner(zc: Array, rc: Array, radius: float) -> Array:
    """(nz, nr) share of the viscous heat and the work of pressure that counts behind an inlet whose profile slips.

    zc (nz,) [m] from the inlet        rc (nr,) [m]        radius [m] of the wall that the stream slips along

    Where the stream slips in the inlet plane and sticks to the wall, dissipation grows like 1 / s^2 with the distance s
    from the corner and its integral like a logarithm: every halving of the cells adds 9.33 mu U^2 R (creeping flow of a
    corner, stream function s f(angle): Moffatt 1964, J. Fluid Mech. 18, 1; the number is our own computation), and no
    temperature behind it has a limit.
    A sharp corner between a plane of one velocity and a wall is no property of a tube, so what the edge of a real one
    does is left out: s^4 / (s^2 + e^2)^2 is counted, with e of `CORNER` radii. Of what all beyond a distance l sets
    free that takes out 13.45 ln(1.65 e / l) mu U^2 R; the developed flow sets free 8 pi mu U^2 per length. The fourth
    power lets the few cells at the corner, which know little of its field, weigh so little that second order remains.
    """
    square = zc[:, None] ** 2 + (radius - rc[None, :]) ** 2
    return (square / (square + (CORNER * radius) ** 2)) ** 2


def end_faces(case: Case, grid: Grid, end: str, t_in: float) -> Exchange:
    """The condition of the solids' end faces in the "first" or "last" plane, one entry per radial cell.

    A heat stated for all layers is shared by area.
    """
    exchange = no_exchange(grid.nr)
    i = 0 if end == "first" else grid.nz - 1
    at_end = [piece for piece in grid.pieces if piece.layer.kind == "solid" and piece.i0 <= i < piece.i1]
    conditions = [case.ends.of(end, piece.layer.name) for piece in at_end]
    for piece, condition in zip(at_end, conditions, strict=True):
        here = slice(piece.j0, piece.j1)
        area = grid.area_z[here]
        if condition.heat_flux is not None:
            exchange.brought[here] = condition.heat_flux * area
        elif condition.heat is not None:
            sharing = [p.layer.area for p, c in zip(at_end, conditions, strict=True) if c is condition]
            exchange.brought[here] = condition.heat * area / sum(sharing)
        if condition.film_coefficient and condition.ambient is not None:
            exchange.temperature[here] = condition.ambient - t_in
            exchange.resistance[here] = 1.0 / (condition.film_coefficient * area)
        elif condition.temperature is not None:
            exchange.temperature[here] = condition.temperature - t_in
            exchange.resistance[here] = (condition.contact_resistance or 0.0) / area
    return exchange


class Surroundings:
    """The outside and both ends of a grid."""

    def __init__(self, case: Case, grid: Grid, t_in: float):
        self.outside = outside(case, grid, t_in)
        self.first = end_faces(case, grid, "first", t_in)
        self.last = end_faces(case, grid, "last", t_in)
        self._rows, self._surface = np.arange(grid.nz), grid.outer - 1
        self._insulated = grid.kind[self._rows, self._surface] == NOTHING
        self._shape = grid.shape

    def at_outside(self, half_out: Array) -> tuple[Array, Array]:
        """(a, b) (nz,) of the heat a - b T* into the outermost cells; half_out (nz, nr) [K/W] node to outer face."""
        a, b = self.outside.linear(np.where(self._insulated, 1.0, half_out[self._rows, self._surface]))
        return np.where(self._insulated, 0.0, a), np.where(self._insulated, 0.0, b)

    def losses(self, half_out: Array, half_first: Array, half_last: Array) -> Array:
        """(nz, nr) [W/K] conductance of each cell to all surroundings."""
        loss = np.zeros(self._shape)
        loss[self._rows, self._surface] += self.at_outside(half_out)[1]
        loss[0] += self.first.linear(half_first)[1]
        loss[-1] += self.last.linear(half_last)[1]
        return loss


def generation(grid: Grid) -> Array:
    """(nz, nr) [W] heat generated in each cell, by `heat_per_volume` and `generated`."""
    heat = np.zeros(grid.shape)
    for piece in grid.pieces:
        volume = grid.volume[piece.cells]
        heat[piece.cells] += grid.layout.sections[piece.section].heat_density(piece.layer) * volume
    return heat


def contact(grid: Grid) -> Array:
    """(nz, nr + 1) [K/W] contact resistance at radial faces (at the inner face of the layer that states it)."""
    resistance = np.zeros((grid.nz, grid.nr + 1))
    for piece in grid.pieces:
        if piece.layer.contact_resistance and piece.layer.r_inner > 0.0:
            rows = slice(piece.i0, piece.i1)
            resistance[rows, piece.j0] = piece.layer.contact_resistance / grid.area_r[rows, piece.j0]
    return resistance


def mass_flow(case: Case, layout: Layout, stream: str) -> float:
    """Mass flow [kg/s] of a stream, positive, from whichever flow key it has but `pressure_drop`.

    A flow that a pressure drop drives is only known from a solve; `estimated_mass_flow` tells about how large it is.
    """
    given = case.stream[stream]
    fluid = case.fluid_of(stream)
    density = float(fluid.density(given.inlet_temperature))
    area = np.pi * layout.bore_diameter**2 / 4
    if given.mass_flow is not None:
        return given.mass_flow
    if given.volume_flow is not None:
        return given.volume_flow * density
    if given.mean_velocity is not None:
        return given.mean_velocity * density * area
    assert given.reynolds is not None, "the flow of a pressure drop is found by a solve"
    viscosity = float(fluid.viscosity(given.inlet_temperature))
    return given.reynolds * viscosity * area / layout.bore_diameter


def estimated_mass_flow(case: Case, layout: Layout, stream: str) -> float:
    """Mass flow [kg/s] of a stream; by hand at inlet viscosity where its pressure drop is given."""
    given, fluid = case.stream[stream], case.fluid_of(stream)
    if given.pressure_drop is None:
        return mass_flow(case, layout, stream)
    return flow_of_drop(case, layout, stream, float(fluid.viscosity(given.inlet_temperature)))


def flow_of_drop(case: Case, layout: Layout, stream: str, viscosity: float) -> float:
    """Mass flow [kg/s] that the pressure drop of a stream would drive at a uniform viscosity [Pa s], by hand."""
    given, fluid = case.stream[stream], case.fluid_of(stream)
    density, bore = float(fluid.density(given.inlet_temperature)), layout.bore_diameter
    assert given.pressure_drop is not None
    drop, length = given.pressure_drop, layout.length
    if given.slips_at_inlet:
        velocity = duct_flow.entrance_mean_velocity(drop, density, viscosity, length, bore)
    else:
        velocity = duct_flow.developed_mean_velocity(drop, viscosity, length, bore)
    return velocity * density * np.pi * bore**2 / 4


def inlet_velocity(
    case: Case, stream: str, mass_flow_: float, density: float, rc: Array, area: Array, developed: Array
) -> Array:
    """(nr,) [m/s] velocity in the inlet plane, scaled to the mass flow exactly.

    rc, area  : node radii and axial face areas of the stream's cells
    developed : (nr,) the developed velocity on the same cells, any scale
    """
    profile = case.stream[stream].inlet_profile
    if isinstance(profile, FileProfile):
        shape = np.interp(rc, profile.r_m, profile.velocity)
    else:
        shape = developed if profile == "developed" else np.ones(len(rc))
    return shape * mass_flow_ / (density * (shape * area).sum())


def inlet_temperature(case: Case, stream: str, rc: Array) -> Array:
    """(nr,) [K] temperature of the entering fluid, from the stream's inlet temperature."""
    given = case.stream[stream]
    if isinstance(given.inlet_profile, FileProfile):
        return np.interp(rc, given.inlet_profile.r_m, given.inlet_profile.temperature_K) - given.inlet_temperature
    return np.zeros(len(rc))
