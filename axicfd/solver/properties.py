"""Laws and regions -> property arrays, refreshed as temperatures change.

Temperatures come in from the inlet temperature; laws take absolute ones. Conductivity between two nodes of one
material is taken at the mean of their temperatures (exact for a conductivity linear in T, by Kirchhoff's transform); at
a face between materials, or a surface, at the mean of node and face. Viscosity is taken at the temperature of the
place where a stress lives, at walls that of the wall.
"""

from dataclasses import dataclass

import numpy as np

from axicfd.case.model import Case, Law
from axicfd.kernels.momentum import Viscosity
from axicfd.mesh.grid import NOTHING, SOLID, STREAM, Array, Grid
from axicfd.solver import boundary
from axicfd.solver.edges import edge_factors

FACE_PASSES = 2  # refreshes of the face temperatures per call; the outer iteration does the rest


@dataclass(frozen=True)
class _Material:
    """Cells of one material and how they conduct."""

    cells: Array  # (nz, nr) bool
    across: Law
    along: Law


@dataclass
class Conduction:
    """Conductances of one state of the temperatures [W/K], shapes as in `kernels.energy`."""

    gz: Array
    gr: Array
    half_in: Array  # (nz, nr) [K/W] node to inner face
    half_out: Array  # (nz, nr) [K/W] node to outer face
    rise_in: Array  # (nz, nr) [K]
    rise_out: Array
    half_first: Array  # (nr,) [K/W] node to the first plane
    half_last: Array


class Conductors:
    """Conductivities of all layers of a grid, with the face temperatures between them."""

    def __init__(self, case: Case, grid: Grid, t_in: float, generated: Array):
        self.grid, self.t_in, self.generated = grid, t_in, generated
        names: dict[tuple[str, str], int] = {}
        self._id = np.full(grid.shape, -1)
        for piece in grid.pieces:
            if piece.layer.kind == "void":
                continue
            self._id[piece.cells] = names.setdefault((piece.layer.kind, piece.layer.material), len(names))
        self.materials = []
        for (kind, material), n in names.items():
            if kind == "stream":
                law = case.fluid_of(material).conductivity
                laws = law, law
            else:
                solid = case.solid_of(material)
                laws = solid.conductivity_r, solid.conductivity_z
            self.materials.append(_Material(self._id == n, *laws))
        self.is_constant = all(m.across.is_constant and m.along.is_constant for m in self.materials)
        self._same_r = (self._id[:, 1:] == self._id[:, :-1]) & (self._id[:, 1:] >= 0)
        self._same_z = (self._id[1:] == self._id[:-1]) & (self._id[1:] >= 0)
        conducts = grid.kind != NOTHING
        if not case.physics.axial_conduction_in_streams:
            conducts &= grid.kind != STREAM
        self._linked_z = conducts[1:] & conducts[:-1]
        self._contact = boundary.contact(grid)
        self._same_r &= self._contact[:, 1:-1] == 0.0
        self._shape_in, self._shape_out = _radial_shapes(grid)
        self._rise_in, self._rise_out = _rise_shapes(grid)
        self._edges = edge_factors(case, grid, t_in)
        self.face_minus = np.zeros((grid.nz, grid.nr + 1))  # temperature on the inner side of each radial face
        self.face_plus = np.zeros((grid.nz, grid.nr + 1))
        # temperatures and outside that were last asked for, and what they gave
        self._last: tuple[Array, boundary.Exchange, Conduction] | None = None

    def conduction(self, t: Array, exchange: boundary.Exchange) -> Conduction:
        """Conductances at temperatures t (nz, nr), and the face temperatures that go with them."""
        if self._last is not None and exchange is self._last[1] and np.array_equal(t, self._last[0]):
            return self._last[2]  # viscosity, residual and step ask in turn at the same temperatures
        for _ in range(1 if self.is_constant else FACE_PASSES):
            now = self._last[2] if self._last is not None and self.is_constant else self._conductances(t)
            self._update_faces(t, now, exchange)
        self._last = t.copy(), exchange, now
        return now

    def _k(self, direction: str, t: Array) -> Array:
        """Conductivity of each cell's material at temperatures t; 1 where nothing conducts."""
        k = np.ones(self.grid.shape)
        for m in self.materials:
            law = getattr(m, direction)
            k[m.cells] = float(law(self.t_in)) if law.is_constant else law(t[m.cells] + self.t_in)
        return k

    def _conductances(self, t: Array) -> Conduction:
        grid = self.grid
        mean = 0.5 * (t[:, 1:] + t[:, :-1])
        at_in, at_out = 0.5 * (t + self.face_plus[:, :-1]), 0.5 * (t + self.face_minus[:, 1:])
        at_in[:, 1:] = np.where(self._same_r, mean, at_in[:, 1:])
        at_out[:, :-1] = np.where(self._same_r, mean, at_out[:, :-1])
        half_in = self._shape_in / self._k("across", at_in)
        half_out = self._shape_out / self._k("across", at_out)
        conducts = grid.kind != NOTHING
        gr = np.zeros((grid.nz, grid.nr + 1))
        linked = conducts[:, 1:] & conducts[:, :-1]
        total = half_out[:, :-1] + half_in[:, 1:] + self._contact[:, 1:-1]
        gr[:, 1:-1] = np.where(linked, 1.0 / total, 0.0)
        gz = np.zeros((grid.nz + 1, grid.nr))
        mean = 0.5 * (t[1:] + t[:-1])
        k_w, k_e = t.copy(), t.copy()
        k_w[:-1] = np.where(self._same_z, mean, t[:-1])
        k_e[1:] = np.where(self._same_z, mean, t[1:])
        half = 0.5 * grid.dz[:, None] / grid.area_z[None, :]
        # a wall that conducts nothing along z has k = 0: its links vanish
        with np.errstate(divide="ignore"):
            half_w, half_e = half / self._k("along", k_w), half / self._k("along", k_e)
            gz[1:-1] = np.where(self._linked_z, 1.0 / (half_w[:-1] + half_e[1:]), 0.0)
        if self._edges is not None:
            gz, gr = gz * self._edges.z, gr * self._edges.r
            rows, last = np.arange(grid.nz), grid.outer - 1
            half_out[rows, last] /= self._edges.r[rows, grid.outer]
        k = self._k("across", t)
        source = self.generated / grid.volume
        return Conduction(
            gz, gr, half_in, half_out, source * self._rise_in / k, source * self._rise_out / k, half_e[0], half_w[-1]
        )

    def _update_faces(self, t: Array, c: Conduction, exchange: boundary.Exchange) -> None:
        """Temperatures of both sides of every radial face, from the exact series of resistances."""
        grid = self.grid
        inner, outer = t + c.rise_in, t + c.rise_out
        heat = np.zeros((grid.nz, grid.nr + 1))
        heat[:, 1:-1] = c.gr[:, 1:-1] * (outer[:, :-1] - inner[:, 1:])
        rows, last = np.arange(grid.nz), grid.outer - 1
        half = np.where(grid.kind[rows, last] == NOTHING, 1.0, c.half_out[rows, last])
        a, b = exchange.linear(half)
        heat[rows, grid.outer] = -(a - b * outer[rows, last])
        self.face_minus[:, 1:] = outer - heat[:, 1:] * c.half_out
        self.face_plus[:, :-1] = inner + heat[:, :-1] * np.where(np.isfinite(c.half_in), c.half_in, 0.0)


def _radial_shapes(grid: Grid) -> tuple[Array, Array]:
    """Resistance times conductivity [1/m] from the node to the inner and to the outer face, (nz, nr).

    Solids: ln(r2 / r1) / (2 pi dz), exact for conduction without axial change. Streams: (r2 - r1) / (2 pi r_face dz),
    exact for the parabola at the axis, where the logarithm would be 9 % off in the first ring.
    """
    r, rc, dz = grid.r, grid.rc, grid.dz[:, None]
    with np.errstate(divide="ignore"):
        log_in, log_out = np.log(rc / r[:-1]), np.log(r[1:] / rc)
        straight_in, straight_out = (rc - r[:-1]) / r[:-1], (r[1:] - rc) / r[1:]
    stream = grid.kind == STREAM
    scale = 2.0 * np.pi * dz
    inner = np.where(stream, straight_in[None, :], log_in[None, :]) / scale
    outer = np.where(stream, straight_out[None, :], log_out[None, :]) / scale
    if r[0] == 0.0:
        inner[:, 0] = np.inf
    return inner, outer


def _rise_shapes(grid: Grid) -> tuple[Array, Array]:
    """What a uniform source of 1 W/m3 and conductivity 1 adds to the node temperature as seen from each face [m2],
    (nz, nr).

    T(r) = -s r^2 / (4 k) + C ln r + D: from the node at r_p to a face at r_f the flux at the face alone would give
    Q ln()/(2 pi k dz); the source in between adds s ( (r_p^2 - r_f^2)/4 - r_f^2 ln(r_p / r_f)/2 ) / k.
    """
    r, rc = grid.r, grid.rc
    inside, outside = r[:-1], r[1:]
    with np.errstate(divide="ignore", invalid="ignore"):
        log_in = np.where(inside > 0.0, inside**2 * np.log(rc / inside), 0.0)
    rise_in = (rc**2 - inside**2) / 4 - log_in / 2
    rise_out = outside**2 * np.log(outside / rc) / 2 - (outside**2 - rc**2) / 4
    solid = grid.kind == SOLID
    return np.where(solid, rise_in, 0.0), np.where(solid, rise_out, 0.0)


def viscosity(
    law: Law, t: Array, t_wall: Array | None, t_inner_wall: Array | None, gz: Array, gr: Array, t_in: float
) -> Viscosity:
    """Viscosity of a stream where its stresses live.

    t            : (nz, nr) temperatures of its cells, in its own direction, from the inlet temperature t_in [K]
    t_wall       : (nz,) wetted outer wall; t_inner_wall: (nz,) wetted inner wall of an annulus, None without one
    gz, gr       : weights of the downstream and of the outer cell at faces (`FlowMesh`)
    """
    nz, nr = t.shape
    wall = t[:, -1] if t_wall is None else t_wall
    radial = np.empty((nz, nr + 1))
    radial[:, 1:nr] = t[:, :-1] + gr[1:nr] * (t[:, 1:] - t[:, :-1])
    radial[:, 0] = t[:, 0] if t_inner_wall is None else t_inner_wall
    radial[:, nr] = wall
    corner = np.empty((nz + 1, nr + 1))
    corner[1:nz] = radial[:-1] + gz[1:nz, None] * (radial[1:] - radial[:-1])
    corner[0], corner[nz] = radial[0], radial[-1]
    return Viscosity(law(t + t_in), law(corner + t_in), law(radial + t_in))
