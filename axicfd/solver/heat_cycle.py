"""Multigrid for the linear heat system: the correction of all temperatures for a given residual.

Every coarse mesh keeps layers and sections apart (`mesh.build.coarser`) and discretises conduction anew with the same
resistances, so walls a thousand times more conductive than the fluid, contact resistances and thin layers look the same
on every level; corrections are interpolated within layers, never across an interface. Lines along r and z are
relaxed in turn; the coarsest mesh, a few hundred cells, is solved directly. The cycle's operator has upwind
convection; it preconditions GMRES (Saad & Schultz 1986, SIAM J. Sci. Stat. Comput. 7, 856) for the true one. Alone it
takes 5 to 9 cycles for eight digits over conductivity ratios 0.1 to 1e4, walls of 0.02 to 2 radii and Peclet numbers
0.1 to 1e6; the difference between upwind and Fromm's convection makes that up to 15 steps, 20 on coarse meshes.
"""

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from axicfd.case.model import Case
from axicfd.kernels import energy, heat_lines, krylov, transfer
from axicfd.mesh.build import coarser
from axicfd.mesh.grid import NOTHING, Array, Grid
from axicfd.solver import boundary
from axicfd.solver.properties import Conduction, Conductors

DROP = 1e-8  # share of the residual a solve leaves
STEPS = 30  # GMRES steps before a restart
ROUND_OFF = 1e-14  # of a product of matrix and vector, relative to that of their absolute values
RESTARTS = 2  # before the cycle counts as failed


@dataclass
class _Level:
    """One mesh of the cycle: five-point links of the upwind system, and the way to the next coarser mesh.

    rows, columns : first fine station and ring of each coarse one
    way           : interpolation within layers: lower coarse station and weight of the upper, the same for rings
    """

    grid: Grid
    open_: Array
    conductors: Conductors | None = None
    surroundings: boundary.Surroundings | None = None
    rows: NDArray[np.int64] = field(default_factory=lambda: np.zeros(0, np.int64))
    columns: NDArray[np.int64] = field(default_factory=lambda: np.zeros(0, np.int64))
    way: tuple = ()
    links: tuple[Array, ...] = ()
    pivots: tuple[Array, ...] = ()
    left: Array = field(default_factory=lambda: np.zeros((0, 0)))


class HeatCycle:
    """The cycle of one grid; `refresh` it when conductances or flow have changed, then `solve`."""

    def __init__(self, case: Case, grid: Grid, t_in: float):
        self.levels = [_level(grid)]
        while (coarse := coarser(grid)) is not None:
            fine = self.levels[-1]
            level = _level(coarse)
            level.conductors = Conductors(case, coarse, t_in, boundary.generation(coarse))
            level.surroundings = boundary.Surroundings(case, coarse, t_in)
            fine.rows, fine.columns = _starts(grid.z, coarse.z), _starts(grid.r, coarse.r)
            interfaces = sorted({p.j0 for p in grid.pieces} | {p.j1 for p in grid.pieces})
            fine.way = (
                *_within(grid.zc, coarse.zc, grid.z, coarse.z, [0, grid.nz]),
                *_within(grid.rc, coarse.rc, grid.r, coarse.r, interfaces),
            )
            self.levels.append(level)
            grid = coarse
        self._links: Any = None
        self._coarsest = np.zeros((grid.cells, 2 * grid.nr + 1))  # its LU factors
        self.steps = 0  # GMRES steps of the last solve

    def refresh(self, t: Array, c: Conduction, loss: Array, wz: Array, wr: Array, links: Array) -> None:
        """Take the state of the finest mesh.

        t (nz, nr) temperatures; c, loss its conductances; wz, wr : m cp through faces [W/K]; links : the true system,
        of `kernels.energy.stencil`. Raises `RuntimeError` where the coarsest mesh is singular.
        """
        self._links = links
        gz, gr = c.gz, c.gr
        for k, level in enumerate(self.levels):
            if k > 0:
                fine = self.levels[k - 1]
                t = _means(t, fine)
                wz = np.add.reduceat(wz, fine.columns, axis=1)[np.append(fine.rows, len(wz) - 1)]
                wr = np.add.reduceat(wr, fine.rows, axis=0)[:, np.append(fine.columns, wr.shape[1] - 1)]
                assert level.conductors is not None and level.surroundings is not None
                coarse = level.conductors.conduction(t, level.surroundings.outside)
                gz, gr, loss = (
                    coarse.gz,
                    coarse.gr,
                    level.surroundings.losses(coarse.half_out, coarse.half_first, coarse.half_last),
                )
            shape = level.grid.shape
            level.links = tuple(np.zeros(shape) for _ in range(5))
            level.left = np.zeros(shape)
            heat_lines.upwind_links(
                gz, gr, np.ascontiguousarray(wz), np.ascontiguousarray(wr), loss, level.open_, *level.links
            )
            level.pivots = np.empty(shape), np.empty(shape)
            heat_lines.factors(*level.links, *level.pivots)
        if not heat_lines.eliminate(*self.levels[-1].links, self._coarsest):
            raise RuntimeError("singular heat system on the coarsest mesh")

    def solve(self, residual: Array, drop: float = DROP) -> Array | None:
        """The correction (nz, nr) that leaves `drop` of the residual's norm; None if the cycle does not get there."""
        shape = residual.shape
        x: Any = np.zeros(shape)
        r: Any = residual.copy()
        start = krylov.norm(r)
        self.steps = 0
        for _ in range(RESTARTS):
            if start == 0.0 or krylov.norm(r) <= drop * start:
                break
            x = x + self._gmres(r, drop * start)
            r = residual - self._times(self._links, x)
        # less than the round-off of A x cannot be asked for: a tube that loses its heat only by a trickle gets very hot
        left = krylov.norm(r)
        if left <= 2.0 * drop * start or left <= ROUND_OFF * krylov.norm(self._times(np.abs(self._links), np.abs(x))):
            return x
        return None

    @staticmethod
    def _times(links: Array, x: Array) -> Array:
        y = np.empty_like(x)
        energy.apply(links, x, y)
        return y

    def _gmres(self, r: Array, goal: float) -> Array:
        """One run of right-preconditioned GMRES from zero, until its residual norm is below the goal."""
        size = krylov.norm(r)
        basis = [r / size]
        columns: list[list[float]] = []
        turns: list[tuple[float, float]] = []
        g = [size]
        while len(columns) < STEPS:
            w = self._times(self._links, self._visit(0, basis[-1]))
            column = [krylov.take_out(v, w) for v in basis]
            column.append(krylov.norm(w))
            if column[-1] > 0.0:
                w /= column[-1]
            basis.append(w)
            self.steps += 1
            columns.append(column)
            if not krylov.rotate(column, turns, g) > goal:
                break
        triangle = np.zeros((len(columns), len(columns)))
        for k, column in enumerate(columns):
            triangle[: k + 1, k] = column[: k + 1]
        if not np.isfinite(triangle).all():  # LAPACK would say so on the terminal
            raise np.linalg.LinAlgError("the heat system overflows")
        u = np.zeros_like(r)
        for factor, v in zip(np.linalg.lstsq(triangle, g[:-1], rcond=None)[0], basis[:-1], strict=True):
            krylov.add(factor, v, u)
        return self._visit(0, u)

    def _visit(self, k: int, b: Array) -> Array:
        level = self.levels[k]
        if k == len(self.levels) - 1:
            x = np.empty_like(b)
            heat_lines.substitute(self._coarsest, b, x)
            return x
        x = np.zeros_like(b)
        # against the stream and with it again: at Peclet numbers of a million a step less than with lines along z here
        heat_lines.r_sweep(*level.links, *level.pivots, b, x, True)
        heat_lines.r_sweep(*level.links, *level.pivots, b, x, False)
        heat_lines.r_sweep(*level.links, *level.pivots, b, x, True)
        heat_lines.remainder(*level.links, b, x, level.left)
        coarse = self._visit(k + 1, _sums(level.left, level))
        transfer.prolong_add(coarse, *level.way, level.open_, x)
        heat_lines.z_sweep(*level.links, *level.pivots, b, x)
        heat_lines.r_sweep(*level.links, *level.pivots, b, x, False)
        heat_lines.r_sweep(*level.links, *level.pivots, b, x, True)
        return x


def _level(grid: Grid) -> _Level:
    return _Level(grid, (grid.kind != NOTHING).astype(float))


def _starts(fine: Array, coarse: Array) -> NDArray[np.int64]:
    """Number of the first fine cell in each coarse one; coarse faces are fine faces to the last digit."""
    return np.searchsorted(fine, coarse[:-1])


def _within(
    fine: Array, coarse: Array, fine_faces: Array, coarse_faces: Array, ends: list[int]
) -> tuple[NDArray[np.int64], Array]:
    """Linear interpolation from coarse to fine centres within each stretch of fine cells between `ends`.

    Returns the lower coarse neighbour and the weight of the upper one; constant where a stretch has one coarse cell.
    """
    lower, weight = np.zeros(len(fine), dtype=np.int64), np.zeros(len(fine))
    for a, b in zip(ends[:-1], ends[1:], strict=True):
        first, last = np.searchsorted(coarse_faces, [fine_faces[a], fine_faces[b]])
        x, at = coarse[first:last], fine[a:b]
        if len(x) == 1:
            lower[a:b] = first
            continue
        k = np.clip(np.searchsorted(x, at) - 1, 0, len(x) - 2)
        lower[a:b] = first + k
        weight[a:b] = np.clip((at - x[k]) / (x[k + 1] - x[k]), 0.0, 1.0)
    return lower, weight


def _sums(values: Array, level: _Level) -> Array:
    """Sums over the fine cells of each coarse cell."""
    total = np.empty((len(level.rows), len(level.columns)))
    transfer.sums(values, level.rows, level.columns, total)
    return total


def _means(values: Array, level: _Level) -> Array:
    """Means over the fine cells of each coarse cell."""
    counts = np.diff(np.append(level.rows, len(values)))[:, None] * np.diff(np.append(level.columns, values.shape[1]))
    return _sums(values, level) / counts
