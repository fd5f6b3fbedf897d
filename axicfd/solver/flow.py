"""The velocity and pressure of one stream: SIMPLE-type iterations over the kernels of momentum and continuity.

A stream is solved in coordinates of its own that run with it, so a stream along -z is the mirror image of one along +z
to round-off. Pressure is the pressure in motion, zero at the outlet plane.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from axicfd.kernels import continuity, momentum, station
from axicfd.kernels.momentum import FlowMesh, Viscosity
from axicfd.mesh.grid import STREAM, Array, Grid

RELAX_MOMENTUM = 0.92  # between 0.8 and 0.97 every case tried converges; the best value moves little with the mesh
DAMPING = 0.7  # share of a coupled sweep's change that is taken, up to a Reynolds number of DAMPED_FROM
DAMPED_FROM, DAMPED_MORE, DAMPED_MOST = 60.0, 0.075, 0.55  # beyond: less by so much per decade, down to the last
RELAX_SIMPLE = 0.7, 0.3  # momentum and pressure, if SIMPLEC is not wanted
CORRECTION_DROP = 0.05  # the pressure correction is solved until its residual fell to this share
CORRECTION_CYCLES = 12
CLOSED = 1e-12  # share of the mass flow that may be missing in all cells together, before heat is carried by it
CLOSING_PASSES = 6
COARSEST = 4  # cells along z where the pressure multigrid stops


def stream_mesh(grid: Grid, stream: str, mirrored: bool) -> FlowMesh:
    """The radial segment of `stream` on a grid, turned so that the stream runs towards +z."""
    j0, j1 = grid.streams[stream]
    z = grid.layout.length - grid.z[::-1] if mirrored else grid.z
    fluid = (grid.kind[:, j0:j1] == STREAM).astype(float)
    return flow_mesh(z, grid.r[j0 : j1 + 1], np.ascontiguousarray(fluid[::-1] if mirrored else fluid))


def flow_mesh(z: Array, r: Array, fluid: Array) -> FlowMesh:
    """Geometry for the kernels.

    z (nz + 1,), r (nr + 1,) : faces [m]        fluid : (nz, nr) 1 in cells where the stream flows, 0 in blocked ones
    """
    z, r = np.array(z), np.array(r)  # own copies of one layout: kernels are compiled once
    nz, nr = fluid.shape
    zc, rc = 0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1])
    dz, dr = np.diff(z), np.diff(r)
    area, ring = np.pi * np.diff(r**2), 2.0 * np.pi * r

    dzu = np.empty(nz + 1)
    dzu[1:nz], dzu[0], dzu[nz] = np.diff(zc), zc[0] - z[0], z[nz] - zc[-1]
    drc = np.empty(nr + 1)
    drc[1:nr], drc[0], drc[nr] = np.diff(rc), rc[0] - r[0], r[nr] - rc[-1]
    gr = np.zeros(nr + 1)
    gr[1:nr] = (r[1:nr] - rc[:-1]) / drc[1:nr]
    gz = np.zeros(nz + 1)
    gz[1:nz] = (z[1:nz] - zc[:-1]) / dzu[1:nz]
    ratio = np.ones(nz)
    ratio[1:] = dz[1:] / dz[:-1]
    ratio_down = np.ones(nz)
    ratio_down[:-1] = dz[:-1] / dz[1:]
    dv_up, dv_down = np.zeros(nz + 1), np.zeros(nz + 1)
    dv_up[2:nz] = (z[2:nz] - zc[1:-1]) / (zc[1:-1] - zc[:-2])
    dv_down[1 : nz - 1] = (zc[1:-1] - z[1 : nz - 1]) / (zc[2:] - zc[1:-1])
    area_v = np.zeros(nr + 1)
    area_v[1:nr] = 0.5 * (area[1:] + area[:-1])

    open_u = np.zeros((nz + 1, nr))
    open_u[1:nz], open_u[nz] = fluid[1:] * fluid[:-1], fluid[-1]
    open_v = np.zeros((nz, nr + 1))
    open_v[:, 1:nr] = fluid[:, 1:] * fluid[:, :-1]

    # where one side of a corner is solid, the wall stands half way between the two velocities
    padded = np.vstack([fluid[:1], fluid, fluid[-1:]])
    solid_u = padded[1:] + padded[:-1] == 0.0
    dist_r = np.broadcast_to(drc, (nz + 1, nr + 1)).copy()
    dist_r[:, 1:nr] = np.where(solid_u[:, 1:] & ~solid_u[:, :-1], r[1:nr] - rc[:-1], dist_r[:, 1:nr])
    dist_r[:, 1:nr] = np.where(solid_u[:, :-1] & ~solid_u[:, 1:], rc[1:] - r[1:nr], dist_r[:, 1:nr])
    padded = np.hstack([fluid[:, :1], fluid, fluid[:, -1:]])
    solid_v = padded[:, 1:] + padded[:, :-1] == 0.0
    dist_z = np.broadcast_to(dzu[:, None], (nz + 1, nr + 1)).copy()
    face, before = z[1:nz, None], zc[:-1, None]
    dist_z[1:nz] = np.where(solid_v[1:] & ~solid_v[:-1], face - before, dist_z[1:nz])
    dist_z[1:nz] = np.where(solid_v[:-1] & ~solid_v[1:], zc[1:, None] - face, dist_z[1:nz])
    gv_z = area_v[None, :] / dist_z
    gv_z[nz] = 0.0  # dv/dz = 0 at the outlet

    hoop = np.zeros((nz, nr + 1))
    hoop[:, 1:nr] = 2.0 * np.pi * dz[:, None] * (drc[1:nr] / r[1:nr])[None, :]
    return FlowMesh(
        nz=nz,
        nr=nr,
        z=z,
        r=r,
        dz=dz,
        dzu=dzu,
        area=area,
        ring=ring,
        gr=gr,
        gz=gz,
        du_up=ratio,
        du_down=ratio_down,
        dv_up=dv_up,
        dv_down=dv_down,
        area_v=area_v,
        drc=drc,
        gu_z=area[None, :] / dz[:, None],
        gu_r=ring[None, :] * dzu[:, None] / dist_r,
        gv_z=gv_z,
        gv_r=2.0 * np.pi * rc[None, :] * dz[:, None] / dr[None, :],
        hoop=hoop,
        open_u=open_u,
        open_v=open_v,
        open_p=fluid,
    )


@dataclass
class _Level:
    """One mesh of the pressure multigrid; pair_r cells are joined along r on the way to the next one."""

    cz: Array
    cr: Array
    pivots: Array
    b: Array
    x: Array
    pair_r: int = 1


class PressureCorrection:
    """Conjugate gradients with a line multigrid cycle, for the pressure correction on the mesh of one stream."""

    def __init__(self, mesh: FlowMesh):
        nz, nr = mesh.nz, mesh.nr
        self.levels: list[_Level] = []
        while True:
            pivots, b, x = (np.zeros((nz, nr)) for _ in range(3))
            level = _Level(np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1)), pivots, b, x)
            self.levels.append(level)
            if nz <= COARSEST:
                break
            level.pair_r = 2 if nr % 2 == 0 and nr > 4 else 1
            nz, nr = (nz + 1) // 2, nr // level.pair_r
        self._x, self._ap = np.zeros((mesh.nz, mesh.nr)), np.zeros((mesh.nz, mesh.nr))

    def solve(self, drop: float = CORRECTION_DROP, cycles: int = CORRECTION_CYCLES) -> Array:
        """Solve the finest level's cz, cr, b to a share `drop` of the starting defect; its b is used up."""
        for fine, coarse in zip(self.levels[:-1], self.levels[1:], strict=True):
            continuity.coarsen(fine.cz, fine.cr, fine.pair_r, coarse.cz, coarse.cr)
        for level in self.levels:
            continuity.factors(level.cz, level.cr, level.pivots)
        top, x, ap = self.levels[0], self._x, self._ap
        r = top.b
        x[...] = 0.0
        start = np.abs(r).sum()
        old, p = 0.0, np.zeros_like(x)
        for k in range(cycles):
            if np.abs(r).sum() <= drop * start:
                break
            z = self._preconditioned()
            new = continuity.dot(r, z)
            if not new > 0.0:
                break
            p = z + (new / old) * p if k else z.copy()
            old = new
            continuity.apply(top.cz, top.cr, p, ap)
            bottom = continuity.dot(p, ap)
            if not bottom > 0.0:
                break  # nothing left but round-off
            step = new / bottom
            x += step * p
            r -= step * ap
        return x

    def _preconditioned(self) -> Array:
        """One symmetric cycle on the finest level's b, from zero."""
        top = self.levels[0]
        top.x[...] = 0.0
        continuity.station_shift(top.cz, top.cr, top.b, top.x)
        self._cycle(0)
        continuity.station_shift(top.cz, top.cr, top.b, top.x)
        return top.x

    def _cycle(self, k: int) -> None:
        level = self.levels[k]
        continuity.line_sweep(level.cz, level.cr, level.pivots, level.b, level.x, True)
        if k < len(self.levels) - 1:
            coarse = self.levels[k + 1]
            continuity.restrict_residual(level.cz, level.cr, level.b, level.x, level.pair_r, coarse.b)
            coarse.x[...] = 0.0
            self._cycle(k + 1)
            continuity.extend(coarse.x, level.pair_r, level.x)
        continuity.line_sweep(level.cz, level.cr, level.pivots, level.b, level.x, False)


def neighbours(fine: Array, coarse: Array) -> tuple[NDArray[np.int64], Array]:
    """For each fine centre the lower coarse neighbour and the weight of the upper one; constant beyond the ends."""
    lower = np.clip(np.searchsorted(coarse, fine) - 1, 0, max(len(coarse) - 2, 0))
    if len(coarse) == 1:
        return lower, np.zeros(len(fine))
    weight = (fine - coarse[lower]) / (coarse[lower + 1] - coarse[lower])
    return lower, np.clip(weight, 0.0, 1.0)


class Flow:
    """Velocity and pressure of one stream on one mesh, and the iteration that solves them.

    mesh      : geometry, in the stream's own direction
    density   : [kg/m3], held at its inlet value
    u_in      : (nr,) [m/s] axial velocity in the inlet plane
    viscosity : refreshed by the caller as temperatures change
    """

    def __init__(self, mesh: FlowMesh, density: float, u_in: Array, viscosity: Viscosity, consistent: bool = True):
        self.mesh, self.density, self.viscosity = mesh, density, viscosity
        self.consistent = consistent
        self.relax, self.relax_p = (RELAX_MOMENTUM, 1.0) if consistent else RELAX_SIMPLE
        self.u = np.zeros((mesh.nz + 1, mesh.nr))
        self.v = np.zeros((mesh.nz, mesh.nr + 1))
        self.p = np.zeros((mesh.nz, mesh.nr))
        self.u[0] = u_in * mesh.open_p[0]
        self.mass_flow = float(density * (self.u[0] * mesh.area).sum())
        sections = (mesh.open_u * mesh.area).sum(axis=1)
        self.u[1:] = mesh.open_u[1:] * (self.mass_flow / density / sections[1:])[:, None]
        self.mz, self.mr = np.zeros_like(self.u), np.zeros_like(self.v)
        self._su, self._sv = np.zeros_like(self.u), np.zeros_like(self.v)
        self._ru, self._rv, self._rc = np.zeros_like(self.u), np.zeros_like(self.v), np.zeros_like(self.p)
        # sources of the coarse-mesh equations of a multigrid cycle (N, N, kg/s); zero on the finest mesh
        self.fu, self.fv, self.fc = np.zeros_like(self.u), np.zeros_like(self.v), np.zeros_like(self.p)
        self.refresh_mass()

    # The coarse meshes of a multigrid cycle never need these.
    @cached_property
    def _correction(self) -> PressureCorrection:
        return PressureCorrection(self.mesh)

    @cached_property
    def _per_pressure(self) -> tuple[Array, Array]:
        """Velocity changes per unit of pressure correction, of u and v."""
        return np.zeros_like(self.u), np.zeros_like(self.v)

    def start_from(self, u: Array, v: Array, p: Array) -> None:
        """Take fields carried over from another mesh; the inlet plane stays, and each section's flow is made exact."""
        m = self.mesh
        self.u[1:] = u[1:] * m.open_u[1:]
        flow = self.density * (self.u * m.area).sum(axis=1)
        sections = (m.open_u * m.area).sum(axis=1)
        self.u[1:] += m.open_u[1:] * ((self.mass_flow - flow[1:]) / self.density / sections[1:])[:, None]
        self.v[...] = v * m.open_v
        self.p[...] = p * m.open_p
        self.refresh_mass()

    def smooth(self, times: int = 1) -> None:
        """Sweeps of coupled stations downstream, for a multigrid cycle.

        The damping takes modes that are smooth along r and oscillate along z, which the sweep alone leaves near
        the inlet; the more convection there is, the more of it is needed (with 0.7 throughout, a flat inlet at Re 2000
        takes 15 cycles for 10; with 0.55 throughout, Re 10 takes 14 for 9).
        """
        share = max(DAMPED_MOST, DAMPING - DAMPED_MORE * max(0.0, np.log10(self.reynolds() / DAMPED_FROM)))
        station.smooth(
            self.mesh, self.viscosity, self.density, self.u, self.v, self.p, self.mz, self.mr,
            self.fu, self.fv, self.fc, self._su, self._sv, self._ru, self._rv, self._rc, share, times,
        )  # fmt: skip

    def step(self) -> None:
        """One iteration: momentum with the present pressure, then the pressure correction."""
        m, mu = self.mesh, self.viscosity
        du, dv = self._per_pressure
        self._explicit_terms()
        momentum.predict(
            m,
            mu,
            self.u,
            self.v,
            self.p,
            self.mz,
            self.mr,
            self._su,
            self._sv,
            self.relax,
            1.0 if self.consistent else 0.0,
            du,
            dv,
        )
        self.refresh_mass()
        top = self._correction.levels[0]
        continuity.mass_defect(self.mz, self.mr, m.open_p, self.fc, top.b)
        continuity.coefficients(self.density, m.area, m.ring, m.dz, du, dv, top.cz, top.cr)
        x = self._correction.solve()
        continuity.correct(x, du, dv, m.open_p, self.relax_p, self.u, self.v, self.p)
        self.refresh_mass()

    def close_continuity(self, to: float = CLOSED) -> None:
        """Correct the velocities until no more than a share `to` of the mass flow is missing, by the gradient of a
        potential.

        The pressure is left as it is; what is missing is of the size of the residual.
        """
        m = self.mesh
        top = self._correction.levels[0]
        du, dv = m.open_u / m.dzu[:, None], m.open_v / m.drc
        du[0] = 0.0
        for _ in range(CLOSING_PASSES):
            defect = continuity.mass_defect(self.mz, self.mr, m.open_p, self.fc, top.b)
            if defect <= to * self.mass_flow:
                return
            continuity.coefficients(self.density, m.area, m.ring, m.dz, du, dv, top.cz, top.cr)
            x = self._correction.solve(drop=1e-4, cycles=30)
            continuity.correct(x, du, dv, m.open_p, 0.0, self.u, self.v, self.p)
            self.refresh_mass()

    def residuals(self) -> tuple[Array, Array, Array]:
        """What is left of the momentum equations [N] and of continuity [kg/s]; shapes of u, v, p; overwritten later."""
        m = self.mesh
        self._explicit_terms()
        momentum.residuals(
            m, self.viscosity, self.u, self.v, self.p, self.mz, self.mr, self._su, self._sv, self._ru, self._rv
        )
        continuity.mass_defect(self.mz, self.mr, m.open_p, self.fc, self._rc)
        return self._ru, self._rv, self._rc

    def residual(self) -> float:
        """Largest of the three normalised residuals: momenta over inlet momentum flux + wall friction, mass over
        flow.
        """
        ru, rv, rc = self.residuals()
        scale = self.momentum_scale()
        parts = np.abs(ru).sum() / scale, np.abs(rv).sum() / scale, np.abs(rc).sum() / self.mass_flow
        return float(np.max(parts))

    def reynolds(self) -> float:
        """With the hydraulic diameter and the mean viscosity."""
        m = self.mesh
        return 4.0 * self.mass_flow / float((m.ring[0] + m.ring[-1]) * self.viscosity.cell.mean())

    def momentum_scale(self) -> float:
        """Inlet momentum flux plus total wall friction [N]."""
        return float((self.mz[0] * self.u[0]).sum() + np.abs(self.wall_friction()).sum())

    def wall_friction(self) -> Array:
        """(nz + 1,) [N] friction of the outer wall on the control volume of u around each axial face."""
        m = self.mesh
        return self.viscosity.corner[:, m.nr] * m.gu_r[:, m.nr] * self.u[:, -1]

    def _explicit_terms(self) -> None:
        momentum.explicit_terms(
            self.mesh, self.viscosity, self.u, self.v, self.mz, self.mr, self.fu, self.fv, self._su, self._sv
        )

    def refresh_mass(self) -> None:
        """Mass fluxes from the velocities."""
        momentum.mass_fluxes(self.mesh, self.density, self.u, self.v, self.mz, self.mr)
