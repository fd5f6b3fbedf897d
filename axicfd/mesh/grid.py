"""The r-z grid: THE statement of shapes, index order and areas.

Cell arrays are (nz, nr): axial station first, radius last and contiguous, so that radial lines walk memory in order.
Axial faces are (nz + 1, nr), radial faces (nz, nr + 1). Areas and volumes are those of the full ring (2 pi included),
so that a flux times an area is in W or kg/s. Velocity is zero outside streams.
"""

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from axicfd.case.layout import Layout, PlacedLayer

Array = NDArray[np.float64]
NOTHING, STREAM, SOLID = 0, 1, 2


def frozen(array: NDArray) -> NDArray:
    """The same array without its write flag."""
    array.setflags(write=False)
    return array


@dataclass(frozen=True)
class Piece:
    """One layer within one section: the cells [i0, i1) x [j0, j1) of the grid."""

    section: int
    layer: PlacedLayer
    i0: int
    i1: int
    j0: int
    j1: int

    @property
    def cells(self) -> tuple[slice, slice]:
        return slice(self.i0, self.i1), slice(self.j0, self.j1)


@dataclass(frozen=True)
class Grid:
    """One mesh of one case.

    z      : (nz + 1,) [m] axial faces          r     : (nr + 1,) [m] radial faces
    pieces : every layer of every section, with the cells it covers
    piece  : (nz, nr) index into `pieces`; -1 outside the tube
    kind   : (nz, nr) NOTHING (void or outside the tube), STREAM or SOLID
    section: (nz,) index of the section of each station
    outer  : (nz,) number of the radial face that is the outer surface of the station
    streams: stream name -> (j0, j1), its radial cells
    joints : axial faces towards which cells are graded (inlet, heater edges, changes of the stack)
    """

    layout: Layout
    z: Array
    r: Array
    pieces: tuple[Piece, ...]
    piece: NDArray[np.int64]
    kind: NDArray[np.int8]
    section: NDArray[np.int64]
    outer: NDArray[np.int64]
    streams: dict[str, tuple[int, int]]
    joints: tuple[int, ...] = field(default=())

    @property
    def nz(self) -> int:
        return len(self.z) - 1

    @property
    def nr(self) -> int:
        return len(self.r) - 1

    @property
    def shape(self) -> tuple[int, int]:
        return self.nz, self.nr

    @property
    def cells(self) -> int:
        return self.nz * self.nr

    @cached_property
    def zc(self) -> Array:
        """(nz,) [m] cell centres."""
        return frozen(0.5 * (self.z[1:] + self.z[:-1]))

    @cached_property
    def rc(self) -> Array:
        """(nr,) [m] radius of the node of each cell, midway between its faces."""
        return frozen(0.5 * (self.r[1:] + self.r[:-1]))

    @cached_property
    def dz(self) -> Array:
        return frozen(np.diff(self.z))

    @cached_property
    def area_z(self) -> Array:
        """(nr,) [m2] area of the axial faces."""
        return frozen(np.pi * np.diff(self.r**2))

    @cached_property
    def area_r(self) -> Array:
        """(nz, nr + 1) [m2] area of the radial faces."""
        return frozen(2.0 * np.pi * self.r[None, :] * self.dz[:, None])

    @cached_property
    def volume(self) -> Array:
        """(nz, nr) [m3]."""
        return frozen(self.area_z[None, :] * self.dz[:, None])
