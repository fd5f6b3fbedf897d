"""The conjugate energy equation on one mesh: residual, and steps of Newton's kind.

A step solves its linear system by GMRES with a multigrid cycle (`heat_cycle`), or by a sparse LU where that fails.

The unknown is the temperature of every cell measured from the inlet temperature (a heater of a few watts would drown in
the round-off of absolute temperatures).
"""

from typing import Any

import numpy as np

from axicfd.case.model import Case
from axicfd.kernels import energy as kernel
from axicfd.mesh.grid import NOTHING, Array, Grid
from axicfd.solver import boundary
from axicfd.solver.heat_cycle import DROP, HeatCycle
from axicfd.solver.properties import Conductors

UPWIND_REACH = 2  # stations on each side of a joint or inlet where linear upwind replaces Fromm's scheme
SLOW = 0.2  # a step that leaves more than this share of the residual makes the next one factorise anew
ONE_MILLIKELVIN = 1e-3  # smallest temperature change that the heat scale counts, times m cp
# Round-off leaves residuals of about 5e-17 of the sum of conductance times |T|: with a scale below this share of it, no
# solution could show 1e-8 (a tube at rest in a bath of one temperature exchanges no heat at all).
RESOLVABLE = 2e-8


class Energy:
    """Temperatures of one grid and the heat that flows between its cells.

    t            : (nz, nr) [K] from the inlet temperature
    mz, mr       : (nz + 1, nr), (nz, nr + 1) [kg/s] mass flow towards rising z and r, zero outside streams
    volume_heat  : (nz, nr) [W] viscous heat and pressure work, refreshed by the caller
    """

    def __init__(self, case: Case, grid: Grid, t_in: float, enthalpy, heat_capacity, inflow: Array, reverse: bool):
        """
        enthalpy, heat_capacity : functions of T - T_in on arrays [J/kg], [J/(kg K)]
        inflow                  : (nr,) temperature of entering fluid, through the first plane (last plane if `reverse`)
        """
        self.grid = grid
        self._h, self._cp = enthalpy, heat_capacity
        nz, nr = grid.shape
        self.generated = boundary.generation(grid)
        self.surroundings = boundary.Surroundings(case, grid, t_in)
        self.conductors = Conductors(case, grid, t_in, self.generated)
        self._inflow = (np.zeros(nr), inflow) if reverse else (inflow, np.zeros(nr))
        self.t = np.zeros(grid.shape)
        self.mz, self.mr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
        self.volume_heat = np.zeros(grid.shape)
        self._weights = np.zeros((nz + 1, nr, 4))
        self._behind_planes = np.zeros((2, nr, 4))
        drc = np.diff(grid.rc)
        self._g = np.zeros(nr + 1)
        self._g[1:-1] = (grid.r[1:-1] - grid.rc[:-1]) / drc
        self._upwind = np.zeros(nz + 1, dtype=bool)
        for i in grid.joints:
            self._upwind[max(i - UPWIND_REACH, 0) : i + UPWIND_REACH + 1] = True
        self._empty = grid.kind == NOTHING
        self.tz, self.tr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
        self.hz, self.hr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
        self.qz, self.qr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
        self.q_outside, self.q_first, self.q_last = np.zeros(nz), np.zeros(nr), np.zeros(nr)
        self._r = np.zeros(grid.shape)
        self.cycle: HeatCycle | None = HeatCycle(case, grid, t_in)
        self._lu: Any = None  # factors of the sparse LU, once it was needed
        self._stale = True

    def set_flow(self, mz: Array, mr: Array) -> None:
        """Take mass fluxes; the scheme's weights follow their directions."""
        self.mz, self.mr = mz, mr
        kernel.z_scheme(mz, self.grid.z, self.grid.zc, self._upwind, self._weights)
        self._behind_planes = self._weights[[1, -2]].copy()

    def _bound_first_faces(self, gz: Array) -> None:
        """Weights of the first face behind an inlet plane, for conductances gz.

        There is no second cell upstream. A central difference alone lets a hot cell beyond draw the first one below the
        inlet temperature once convection is more than twice the conduction through the face, so only that share of
        it is kept; the rest is linear upwind from the plane, half a cell upstream. There the fluid is warmer than
        what enters by what is conducted upstream: m cp (T_plane - T_in) = k A dT/dz.
        """
        if self.grid.nz == 1:
            return
        forward, backward = (self.mz[0] > 0.0) & (self.mz[1] > 0.0), (self.mz[-1] < 0.0) & (self.mz[-2] < 0.0)
        capacity = self._cp(np.zeros(self.grid.nr))
        for i, base, inward, near, beyond, plane in ((1, 0, forward, 1, 2, 0), (-2, 1, backward, 2, 1, 3)):
            ratio = 2.0 * gz[i] / np.maximum(np.abs(self.mz[i]) * capacity, 1e-300)
            central, upwind = np.minimum(1.0, ratio), 1.0 - np.minimum(1.0, ratio)
            entering = 1.0 / (1.0 + ratio)  # T_plane = entering T_in + (1 - entering) T of the first cell
            c, plain = self._weights[i], self._behind_planes[base]
            c[:, near] = np.where(inward, central * plain[:, near] + upwind * (1.0 + entering), c[:, near])
            c[:, beyond] = np.where(inward, central * plain[:, beyond], c[:, beyond])
            c[:, plane] = np.where(inward, -upwind * entering, c[:, plane])

    def residual(self) -> Array:
        """(nz, nr) [W] what each cell gains; refreshes every heat flow of the object."""
        grid, t = self.grid, self.t
        c = self._conduction = self.conductors.conduction(t, self.surroundings.outside)
        self._bound_first_faces(c.gz)
        kernel.face_temperatures(t, self._weights, self._g, *self._inflow, self.mz, self.tz, self.tr)
        np.multiply(self.mz, self._h(self.tz), out=self.hz)
        np.multiply(self.mr, self._h(self.tr), out=self.hr)
        kernel.conducted(t, c.rise_in, c.rise_out, c.gz, c.gr, self.qz, self.qr)
        rows, last = np.arange(grid.nz), grid.outer - 1
        around = self.surroundings
        a, b = around.at_outside(c.half_out)
        self.q_outside = a - b * (t + c.rise_out)[rows, last]
        a_first, b_first = around.first.linear(c.half_first)
        a_last, b_last = around.last.linear(c.half_last)
        self.q_first, self.q_last = a_first - b_first * t[0], a_last - b_last * t[-1]
        self._loss = around.losses(c.half_out, c.half_first, c.half_last)
        gain = self.generated + self.volume_heat
        gain[rows, last] += self.q_outside
        gain[0] += self.q_first
        gain[-1] += self.q_last
        gain[self._empty] = 0.0
        kernel.balance(self.hz, self.hr, self.qz, self.qr, gain, self._r)
        self._r[self._empty] = 0.0
        return self._r

    def scale(self) -> float:
        """[W] the largest of: absolute heats through all boundaries, generation, viscous heat, enthalpy change of the
        streams, m cp times one millikelvin, and what round-off lets see."""
        boundaries = np.abs(self.q_outside).sum() + np.abs(self.q_first).sum() + np.abs(self.q_last).sum()
        enthalpy = abs(self.hz[-1].sum() - self.hz[0].sum())
        trickle = 0.5 * float(np.abs(self._cp(self.tz[[0, -1]]) * self.mz[[0, -1]]).sum()) * ONE_MILLIKELVIN
        parts = boundaries, np.abs(self.generated).sum(), np.abs(self.volume_heat).sum(), enthalpy, trickle
        return float(max(*parts, self.resolvable(), 1e-300))

    def resolvable(self) -> float:
        """[W] smallest heat scale against which round-off lets the balance be judged."""
        c = self._conduction
        links = c.gz[:-1] + c.gz[1:] + c.gr[:, :-1] + c.gr[:, 1:] + self._loss
        return RESOLVABLE * float((links * np.abs(self.t)).sum())

    def error(self) -> float:
        """Sum of absolute residuals over the heat scale."""
        return float(np.abs(self.residual()).sum()) / self.scale()

    def step(self, drop: float = DROP) -> float:
        """One correction of all temperatures, to a share `drop` of the residual; returns the normalised residual
        after it.

        The linear system is kept while it still serves: properties and flow change little from step to step.
        """
        before = self.error()
        if not np.isfinite(before):
            return before
        try:
            change = self._correction(drop)
        except (RuntimeError, np.linalg.LinAlgError):  # singular or overflowing: what led here has diverged
            return float("nan")
        self.t = self.t + change
        after = self.error()
        self._stale = not (after <= SLOW * before or after <= 1e-12)  # also where it is not a number
        return after

    def _correction(self, drop: float) -> Array:
        """The solution of the linear system; by the sparse LU, slower and sure, where the cycle does not get there."""
        if self._stale:
            self._linearise()
        change = self.cycle.solve(self._r, drop) if self.cycle is not None else None
        if change is None:
            self.cycle = None
            self._lu = self._lu or factorised(self._links)
            change = self._lu.solve(self._r.ravel()).reshape(self.grid.shape)
        return change

    def _linearise(self) -> None:
        """The derivative of the residual, exact but for what properties change."""
        grid, c = self.grid, self._conduction
        wz, wr = self.mz * self._cp(self.tz), self.mr * self._cp(self.tr)
        self._links = np.empty((7, *grid.shape))
        kernel.stencil(c.gz, c.gr, wz, wr, self._weights, self._g, self._loss, self._empty, self._links)
        self._lu, self._stale = None, False
        if self.cycle is not None:
            try:
                self.cycle.refresh(self.t, c, self._loss, wz, wr, self._links)
            except RuntimeError:  # its coarsest mesh is singular
                self.cycle = None


def factorised(links: Array) -> Any:
    """Sparse LU of the system of `kernels.energy.stencil`, with an ordering for nearly symmetric patterns."""
    from scipy.sparse import coo_matrix
    from scipy.sparse.linalg import splu

    _, nz, nr = links.shape
    k, i, j = np.nonzero(links)
    index = i * nr + j
    shift = np.array([0, -2 * nr, -nr, nr, 2 * nr, -1, 1])[k]
    matrix = coo_matrix((links[k, i, j], (index, index + shift)), shape=(nz * nr, nz * nr)).tocsc()
    return splu(matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.1, options={"SymmetricMode": True})
