"""Full approximation multigrid for the flow of one stream (Brandt 1977, Math. Comput. 31, 333-390).

Coarse meshes join cells in pairs and discretise again with the same kernels; they carry the full fields, and a source
that makes the restricted fine solution their own where the fine equations are met. The smoother solves momentum and
pressure correction of one station together (`kernels.station`). While cells are thinner along z than along r only
z is coarsened: radial lines are implicit, so what is strongly coupled along r is solved, and the rest has to get
coarse first.
"""

import numpy as np
from numpy.typing import NDArray

from axicfd.kernels import transfer
from axicfd.kernels.momentum import FlowMesh, Viscosity
from axicfd.mesh.grid import Array
from axicfd.solver.flow import Flow, flow_mesh, neighbours

SMOOTH_BEFORE, SMOOTH_AFTER = 2, 2
SMOOTH_COARSEST = 10
COARSEST_ALONG = 6  # cells along z of the coarsest mesh
COARSEST_ACROSS = 4


class _Link:
    """How a level hangs on the next coarser one."""

    def __init__(self, mesh: FlowMesh):
        dr = np.diff(mesh.r)
        thick = mesh.dz.min() >= 0.5 * dr.max()
        self.pair_r = 2 if thick and mesh.nr % 2 == 0 and mesh.nr // 2 >= COARSEST_ACROSS else 1
        self.pair_z = 2
        z = mesh.z[::2] if mesh.nz % 2 == 0 else np.append(mesh.z[::2], mesh.z[-1])
        r = mesh.r[:: self.pair_r]
        rows, columns = np.arange(0, mesh.nz, 2), np.arange(0, mesh.nr, self.pair_r)
        fluid = np.add.reduceat(np.add.reduceat(mesh.open_p, rows, axis=0), columns, axis=1)
        self.coarse = flow_mesh(z, r, (fluid > 0.0).astype(float))
        zc, rc = 0.5 * (mesh.z[1:] + mesh.z[:-1]), 0.5 * (mesh.r[1:] + mesh.r[:-1])
        czc, crc = 0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1])
        # u vanishes at the walls: interpolate towards them through a zero beyond the last node
        self.to_u = (*neighbours(mesh.z, z), *neighbours(rc, crc))
        self.to_v = (*neighbours(zc, czc), *neighbours(mesh.r, r))
        self.to_p = (*neighbours(zc, czc), *neighbours(rc, crc))
        self.rows, self.columns = rows, columns

    def viscosity(self, mu: Viscosity) -> Viscosity:
        """Viscosity of the coarse mesh: means over joined cells and faces, values at shared corners."""
        i = np.minimum(np.arange(self.coarse.nz + 1) * 2, mu.corner.shape[0] - 1)
        j = np.arange(self.coarse.nr + 1) * self.pair_r
        lengths = np.diff(np.append(self.rows, mu.cell.shape[0]))
        cell = np.add.reduceat(np.add.reduceat(mu.cell, self.rows, axis=0), self.columns, axis=1)
        faces = np.add.reduceat(mu.radial_face[:, j], self.rows, axis=0)
        return Viscosity(
            cell / (lengths[:, None] * self.pair_r),
            np.ascontiguousarray(mu.corner[np.ix_(i, j)]),
            faces / lengths[:, None],
        )


class FlowCycle:
    """Multigrid cycles for a Flow, over coarse meshes of its own."""

    def __init__(self, top: Flow):
        self.flows = [top]
        self.links: list[_Link] = []
        while self.flows[-1].mesh.nz > COARSEST_ALONG:
            fine = self.flows[-1]
            link = _Link(fine.mesh)
            u_in = _sums(fine.u[0] * fine.mesh.area, link.columns) / _sums(fine.mesh.area, link.columns)
            self.links.append(link)
            self.flows.append(Flow(link.coarse, fine.density, u_in, link.viscosity(fine.viscosity), fine.consistent))

    def refresh_viscosity(self) -> None:
        """Take the finest mesh's viscosity to all coarse ones."""
        for k, link in enumerate(self.links):
            self.flows[k + 1].viscosity = link.viscosity(self.flows[k].viscosity)

    def cycle(self) -> None:
        """One V-cycle from the finest mesh."""
        self._visit(0)

    def _visit(self, k: int) -> None:
        fine = self.flows[k]
        if k == len(self.flows) - 1:
            fine.smooth(SMOOTH_COARSEST)
            return
        fine.smooth(SMOOTH_BEFORE)
        link, coarse, m = self.links[k], self.flows[k + 1], fine.mesh
        volume = m.area[None, :] * m.dz[:, None] * m.open_p
        transfer.restrict_velocity(
            fine.u, fine.v, fine.p, m.area, m.dz, volume, link.pair_z, link.pair_r, coarse.u, coarse.v, coarse.p
        )
        coarse.u *= np.maximum(coarse.mesh.open_u, np.arange(coarse.mesh.nz + 1)[:, None] == 0)
        coarse.v *= coarse.mesh.open_v
        coarse.refresh_mass()
        for f in (coarse.fu, coarse.fv, coarse.fc):
            f[...] = 0.0
        own = [x.copy() for x in coarse.residuals()]
        transfer.restrict_residuals(*fine.residuals(), link.pair_z, link.pair_r, coarse.fu, coarse.fv, coarse.fc)
        for f, r, open_ in zip((coarse.fu, coarse.fv, coarse.fc), own, _open(coarse.mesh), strict=True):
            f -= r
            f *= open_
        before = [x.copy() for x in (coarse.u, coarse.v, coarse.p)]
        self._visit(k + 1)
        changes = [a - b for a, b in zip((coarse.u, coarse.v, coarse.p), before, strict=True)]
        for change, way, open_, field in zip(
            changes, (link.to_u, link.to_v, link.to_p), _open(m), (fine.u, fine.v, fine.p), strict=True
        ):
            transfer.prolong_add(change, *way, open_, field)
        fine.refresh_mass()
        fine.smooth(SMOOTH_AFTER)


def _open(mesh: FlowMesh) -> tuple[Array, Array, Array]:
    return mesh.open_u, mesh.open_v, mesh.open_p


def _sums(values: Array, starts: NDArray[np.int64]) -> Array:
    return np.add.reduceat(values, starts)
