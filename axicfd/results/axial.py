"""Curves along z: what each stream and the outside surface look like from station to station.

Curves live on axial faces, coarse ones of which are faces of every finer mesh. A stream is looked at in its own
direction; rows are returned by increasing z.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from axicfd.case.model import Case, UsedFluid
from axicfd.mesh.grid import NOTHING, Array, Grid
from axicfd.results import lines
from axicfd.solver.state import Solution

NO_DIFFERENCE = 1e-6  # share of the temperature span below which wall and bulk count as equal
SHEAR_FROM = 0.5  # diameters behind a flat inlet before wall shear is reported: it is singular in the corner


@dataclass(frozen=True)
class StreamView:
    """One stream of a solution in its own direction, reduced to what curves and summary need.

    z, zc     : (nz + 1,), (nz,) [m] distance from the stream's inlet
    flow      : (nz + 1,) [kg/s] mass flow through each axial face
    enthalpy  : (nz + 1,) [W] convected through each face, from the inlet temperature
    bulk      : (nz + 1,) [K] bulk temperature, from the inlet temperature
    wall      : (nz,) [K] wetted wall at stations; wall_before, wall_after (nz + 1,) at faces, from either side
    flux      : (nz,) [W/m2] into the stream at stations; flux_before, flux_after (nz + 1,)
    conducted : (nz + 1,) [W] heat conducted along the stream in its own direction
    """

    case: Case
    grid: Grid
    name: str
    fluid: UsedFluid
    t_in: float
    mirrored: bool
    diameter: float
    area: float
    z: Array
    zc: Array
    breaks: tuple[int, ...]
    flow: Array
    enthalpy: Array
    bulk: Array
    wall: Array
    wall_before: Array
    wall_after: Array
    flux: Array
    flux_before: Array
    flux_after: Array
    conducted: Array
    t: Array
    u: Array
    mz: Array
    p: Array
    viscosity_wall: Array

    @property
    def is_flat(self) -> bool:
        """Whether the profile of the inlet plane moves along the wall."""
        return self.case.stream[self.name].slips_at_inlet

    @property
    def mass_flow(self) -> float:
        return float(self.flow[0])

    @property
    def density(self) -> float:
        return float(self.fluid.density(self.t_in))

    @property
    def mean_velocity(self) -> float:
        return self.mass_flow / (self.density * self.area)

    @cached_property
    def curves(self) -> dict[str, Array]:
        """The columns of axial-STREAM.csv, computed once."""
        return stream_curves(self)

    @cached_property
    def wall_z(self) -> tuple[Array, Array]:
        """(z, value) of the wetted wall at all stations and faces, joints from each side."""
        return _all_places(self.z, self.zc, self.breaks, self.wall, self.wall_before, self.wall_after)

    def axis_velocity(self) -> Array:
        """(nz + 1,) [m/s] on the axis."""
        return lines.to_axis(self.u, self._rc)

    def peak_velocity(self) -> Array:
        """(nz + 1,) [m/s] largest at each face."""
        return np.maximum(self.axis_velocity(), self.u.max(axis=1))

    def shear(self) -> Array:
        """(nz + 1,) [Pa] at the wetted wall; nan near a flat inlet, where it is singular."""
        tau = self._shear_everywhere()
        return np.where(self.z < self._shear_from, np.nan, tau) if self.is_flat else tau

    def largest_shear(self) -> float | None:
        """[Pa] of the largest size from where the shear is reported; that place counts, also between two faces."""
        tau = self._shear_everywhere()
        if not self.is_flat:
            return float(tau[np.argmax(np.abs(tau))])
        if self.z[-1] < self._shear_from:
            return None
        begin = lines.at_points(self.z, tau, np.array([self._shear_from]))
        reported = np.append(begin, tau[self.z >= self._shear_from])
        return float(reported[np.argmax(np.abs(reported))])

    @property
    def _shear_from(self) -> float:
        return SHEAR_FROM * self.diameter

    def _shear_everywhere(self) -> Array:
        j1 = self.grid.streams[self.name][1]
        return self.viscosity_wall * self.u[:, -1] / (self.grid.r[j1] - self.grid.rc[j1 - 1])

    def axis_pressure_at_inlet(self) -> float:
        """[Pa] pressure in motion on the axis in the inlet plane."""
        return float(lines.to_axis(lines.to_first_plane(self.p, self.zc, 0.0)[None, :], self._rc)[0])

    @property
    def _rc(self) -> Array:
        j0, j1 = self.grid.streams[self.name]
        return self.grid.rc[j0:j1]


def stream_view(case: Case, solution: Solution, name: str) -> StreamView:
    """Turn a stream of a solution into its own direction."""
    grid, heat = solution.grid, solution.heat
    j0, j1 = grid.streams[name]
    stream, fluid = case.stream[name], case.fluid_of(name)
    mirrored = stream.direction == "-z"
    turn = -1.0 if mirrored else 1.0

    def own(values: NDArray) -> NDArray:
        return values[::-1] if mirrored else values

    z = own(grid.layout.length - grid.z if mirrored else grid.z)
    zc = own(grid.layout.length - grid.zc if mirrored else grid.zc)
    breaks = tuple(sorted(grid.nz - b if mirrored else b for b in grid.joints))
    fields = solution.streams.get(name)
    shape = (grid.nz + 1, j1 - j0)
    u = turn * own(fields.u) if fields else np.zeros(shape)
    mz = turn * own(fields.mz) if fields else np.zeros(shape)
    p = own(fields.p) if fields else np.zeros((grid.nz, j1 - j0))
    enthalpy = turn * own(heat.hz[:, j0:j1]).sum(axis=1)
    flow = mz.sum(axis=1)
    wall = own(heat.minus[:, j1])
    into = -own(heat.qr[:, j1]) / own(grid.area_r[:, j1])
    bare = own(grid.outer) == j1
    into = np.where(bare, own(heat.outside) / own(grid.area_r[:, j1]), into)
    wall_before, wall_after = lines.to_faces(wall, zc, z, breaks)
    flux_before, flux_after = lines.to_faces(into, zc, z, breaks)
    radius = grid.r[j1]
    return StreamView(
        case=case,
        grid=grid,
        name=name,
        fluid=fluid,
        t_in=stream.inlet_temperature,
        mirrored=mirrored,
        diameter=2.0 * radius,
        area=float(np.pi * (radius**2 - grid.r[j0] ** 2)),
        z=z,
        zc=zc,
        breaks=breaks,
        flow=flow,
        enthalpy=enthalpy,
        bulk=_bulk(fluid, stream.inlet_temperature, enthalpy, flow),
        wall=wall,
        wall_before=wall_before,
        wall_after=wall_after,
        flux=into,
        flux_before=flux_before,
        flux_after=flux_after,
        conducted=turn * own(heat.qz[:, j0:j1]).sum(axis=1),
        t=own(heat.t[:, j0:j1]),
        u=u,
        mz=mz,
        p=p,
        viscosity_wall=own(fields.viscosity_wall) if fields else np.zeros(grid.nz + 1),
    )


def stream_views(case: Case, solution: Solution) -> dict[str, StreamView]:
    """Every stream of a solution in its own direction, by name."""
    return {name: stream_view(case, solution, name) for name in solution.grid.streams}


def _bulk(fluid: UsedFluid, t_in: float, enthalpy: Array, flow: Array) -> Array:
    """(n,) temperature from the inlet temperature whose enthalpy is the convected one over the mass flow; nan at
    rest.
    """
    if not np.all(flow > 0.0):
        return np.full(len(flow), np.nan)
    wanted = enthalpy / flow
    cp = fluid.specific_heat
    t = wanted / float(cp(t_in))
    if cp.is_constant:
        return t
    for _ in range(30):
        change = (wanted - cp.integral(t_in, t + t_in)) / cp(t + t_in)
        t = t + change
        if np.abs(change).max() < 1e-12 * (1.0 + np.abs(t).max()):
            break
    return t


def _all_places(
    z: Array, zc: Array, breaks: tuple[int, ...], stations: Array, before: Array, after: Array
) -> tuple[Array, Array]:
    """Stations and faces in one row by z; a break stands twice, with the value of either side."""
    places, values = [], []
    for i in range(len(z)):
        places.append(z[i])
        values.append(before[i])
        if i in breaks and 0 < i < len(z) - 1:
            places.append(z[i])
            values.append(after[i])
        if i < len(zc):
            places.append(zc[i])
            values.append(stations[i])
    return np.array(places), np.array(values)


def stream_curves(view: StreamView) -> dict[str, Array]:
    """The columns of axial-STREAM.csv, rows by increasing z; nan where a quantity has no value."""
    span = temperature_span(view)
    wall = 0.5 * (view.wall_before + view.wall_after)
    flux = 0.5 * (view.flux_before + view.flux_after)
    difference = wall - view.bulk
    enough = np.abs(difference) > NO_DIFFERENCE * span
    forward = np.all(view.mz >= 0.0, axis=1) & (view.flow > 0.0)
    coefficient = np.where(enough & forward, flux / np.where(enough, difference, 1.0), np.nan)
    absolute = view.bulk + view.t_in
    conductivity = view.fluid.conductivity(np.where(np.isfinite(absolute), absolute, view.t_in))
    nusselt = coefficient * view.diameter / conductivity
    shear, g = view.shear(), view.mass_flow / view.area
    still = view.mass_flow == 0.0
    density = view.density
    pressure_before, _ = lines.to_faces(_area_means(view), view.zc, view.z, ())
    pressure = pressure_before.copy()
    pressure[-1] = 0.0
    with np.errstate(divide="ignore", invalid="ignore"):
        friction = 8.0 * shear * density / g**2
        drop = view.axis_pressure_at_inlet() - pressure
        apparent = 2.0 * density * drop * view.diameter / (g**2 * view.z)
    apparent[0] = np.nan
    if view.is_flat:
        apparent[np.isnan(shear)] = np.nan
        nusselt[0] = coefficient[0] = pressure[0] = np.nan
    if still:
        for column in (friction, apparent, shear):
            column[:] = np.nan
    columns = {
        "z_m": view.z,
        "bulk_temperature_K": absolute,
        "wetted_wall_temperature_K": wall + view.t_in,
        "wall_heat_flux_W_m2": flux,
        "heat_transfer_coefficient_W_m2K": coefficient,
        "nusselt": nusselt,
        "pressure_Pa": pressure + view.case.stream[view.name].outlet_pressure,
        "friction_factor_darcy": friction,
        "wall_shear_stress_Pa": shear,
        "axis_velocity_m_s": view.axis_velocity(),
        "peak_velocity_m_s": view.peak_velocity(),
        "apparent_friction_factor": apparent,
        "axial_conduction_W": view.conducted,
        "reverse": (~forward & (view.flow > 0.0)).astype(float),
    }
    if view.mirrored:
        columns = {name: column[::-1] for name, column in columns.items()}
        columns["z_m"] = view.grid.z
        columns["axial_conduction_W"] = -columns["axial_conduction_W"]
    return {name: np.array(column) for name, column in columns.items()}


def temperature_span(view: StreamView) -> float:
    """[K] largest distance of any wall or fluid temperature from the inlet temperature."""
    return float(max(np.abs(view.wall).max(), np.abs(view.t).max(), 1e-300))


def _area_means(view: StreamView) -> Array:
    """(nz,) [Pa] area means of the pressure in motion."""
    j0, j1 = view.grid.streams[view.name]
    area = view.grid.area_z[j0:j1]
    return (view.p * area).sum(axis=1) / area.sum()


def outside_curves(case: Case, solution: Solution) -> dict[str, Array]:
    """The columns of outside.csv: temperature and heat flux of the outer surface on axial faces."""
    grid, heat = solution.grid, solution.heat
    rows = np.arange(grid.nz)
    area = grid.area_r[rows, grid.outer]
    t_in = next(iter(case.stream.values())).inlet_temperature
    conducts = grid.kind[rows, grid.outer - 1] != NOTHING  # the outside of a void has no temperature
    surface = lines.to_faces(np.where(conducts, heat.minus[rows, grid.outer], np.nan), grid.zc, grid.z, grid.joints)
    flux = lines.to_faces(heat.outside / area, grid.zc, grid.z, grid.joints)
    return {
        "z_m": np.array(grid.z),
        "temperature_K": 0.5 * (surface[0] + surface[1]) + t_in,
        "heat_flux_W_m2": 0.5 * (flux[0] + flux[1]),
    }


def radial_profiles(case: Case, solution: Solution) -> dict[str, list]:
    """The columns of radial.csv: profiles at the stations asked for (by default the end of every section)."""
    grid, heat = solution.grid, solution.heat
    stations = case.results.stations or tuple(s.z1 for s in grid.layout.sections)
    (name,) = grid.streams
    j0, j1 = grid.streams[name]
    t_in = case.stream[name].inlet_temperature
    fields = solution.streams.get(name)
    rows: dict[str, list] = {
        key: [] for key in ("station_m", "layer", "r_m", "axial_velocity_m_s", "radial_velocity_m_s", "temperature_K")
    }
    for station in stations:
        z = min(max(station, float(grid.zc[0])), float(grid.zc[-1]))
        i = int(np.clip(np.searchsorted(grid.zc, z) - 1, 0, grid.nz - 2))
        w = (z - grid.zc[i]) / (grid.zc[i + 1] - grid.zc[i])
        k = int(np.clip(np.searchsorted(grid.zc, z), 0, grid.nz - 1))
        for j in range(grid.nr):
            piece = grid.piece[k, j]
            if grid.kind[k, j] == 0:
                continue
            u = v = float("nan")
            if j0 <= j < j1 and fields is not None:
                a = int(np.clip(np.searchsorted(grid.z, station) - 1, 0, grid.nz - 1))
                s = min(max((station - grid.z[a]) / (grid.z[a + 1] - grid.z[a]), 0.0), 1.0)
                u = float((1 - s) * fields.u[a, j - j0] + s * fields.u[a + 1, j - j0])
                vs = 0.5 * (fields.v[:, j - j0] + fields.v[:, j - j0 + 1])
                v = float((1 - w) * vs[i] + w * vs[i + 1])
            here, there = heat.t[i, j], heat.t[i + 1, j]
            same = grid.kind[i, j] != 0 and grid.kind[i + 1, j] != 0
            t = (1 - w) * here + w * there if same else heat.t[k, j]
            for key, value in zip(
                rows, (station, grid.pieces[piece].layer.name, float(grid.rc[j]), u, v, float(t) + t_in), strict=True
            ):
                rows[key].append(value)
    return rows
