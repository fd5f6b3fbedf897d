"""One-dimensional smooth maps from [0, 1] to [0, 1] that grade cells towards ends.

A mesh line of n cells has its faces at X(i / n) of one smooth map X, so that the faces of n cells are contained
in those of 2 n cells and doubling the cells refines the same map (a fixed ratio of neighbouring cells would not).

The maps are hyperbolic tangents (Vinokur 1983, J. Comput. Phys. 50, 215-234, the one-parameter forms). `stretch` is the
ratio dX/dxi(largest) / dX/dxi(smallest) = cosh^2(delta); 1 is a uniform line.
"""

from dataclasses import dataclass
from math import acosh, asinh, sqrt

import numpy as np
from numpy.typing import NDArray

# Beyond this ratio round-off of the map would show in the smallest cells.
LARGEST_STRETCH = 1e8
# Cells that grow faster than this from one to the next resolve nothing, and nothing converges on them.
LARGEST_GROWTH = 4.0
PRECISION = 1e-7  # of the logarithm of a stretch


@dataclass(frozen=True)
class Map:
    """What `graded_map` makes: a function that compares by its values and can travel between processes."""

    stretch: float
    at_start: bool
    at_end: bool

    def __call__(self, x: NDArray[np.float64]) -> NDArray[np.float64]:
        x = np.asarray(x, dtype=float)
        if self.stretch <= 1.0 or not (self.at_start or self.at_end):
            return x
        delta = acosh(sqrt(self.stretch))
        t = np.tanh(delta)
        if self.at_start and self.at_end:
            return 0.5 * (1.0 + np.tanh(delta * (2.0 * x - 1.0)) / t)
        if self.at_start:
            return 1.0 + np.tanh(delta * (x - 1.0)) / t
        return np.tanh(delta * x) / t


def graded_map(stretch: float, at_start: bool, at_end: bool) -> Map:
    """Smooth map of [0, 1] onto itself with small cells at the chosen ends.

    stretch  : largest over smallest slope of the map, >= 1
    at_start : small cells at 0
    at_end   : small cells at 1
    """
    return Map(stretch, at_start, at_end)


def stretch_for_end_cell(cells: int, length: float, end_cell: float, at_start: bool, at_end: bool) -> float:
    """The stretch with which the cell at a graded end has the size `end_cell`.

    cells    : number of cells on the line
    length   : length of the line [m]
    end_cell : wanted size of the first cell [m]
    Returns 1 where uniform cells are already as small as wanted; too few cells leave a larger one.
    """
    if not (at_start or at_end) or length / cells <= end_cell:
        return 1.0

    def excess(log_stretch: float) -> float:
        x = graded_map(float(np.exp(log_stretch)), at_start, at_end)(
            np.array([0.0, 1.0 / cells, 1.0 - 1.0 / cells, 1.0])
        )
        return float(np.log(length * min(x[1] - x[0], x[3] - x[2]) / end_cell))

    # beside a graded end the slope of the map grows by (4 stretch)^(1/n) from one of n cells to the next
    per_end = cells / 2 if at_start and at_end else cells
    high = min(float(np.log(LARGEST_STRETCH)), per_end * float(np.log(LARGEST_GROWTH)) - float(np.log(4.0)))
    if excess(high) > 0.0:
        return float(np.exp(high))
    low = 0.0
    while high - low > PRECISION:  # by halves: it happens once per line, and a root finder takes long to import
        middle = 0.5 * (low + high)
        low, high = (middle, high) if excess(middle) > 0.0 else (low, middle)
    return float(np.exp(0.5 * (low + high)))


def length_weight(length: float, scale: float, graded_ends: int) -> float:
    """Share of the cells that a graded line deserves: it grows with the logarithm of its length.

    A field that develops from an end has a scale proportional to the distance from it, so equal accuracy takes
    an equal number of cells per decade of distance.
    """
    return (0.5 + graded_ends) * asinh(length / scale)
