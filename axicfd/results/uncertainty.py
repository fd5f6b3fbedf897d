"""Mesh errors of reported quantities, from their values on nested meshes.

Each mesh halves the cells of the one before in both directions, so three values in a row tell how far the last one is
from the limit. Values are extrapolated with the fixed weights of second order (Richardson 1911, Phil. Trans. R. Soc.
A 210, 307) where the sequence behaves like second order; else the finest value stands, with Roache's grid convergence
index (Roache 1994, J. Fluids Eng. 116, 405; factors 1.25 and 3 as in Roache 1998). What a singular place
does to the orders is seen in the values: no quantity is told that it belongs to one.
"""

from dataclasses import dataclass
from math import isfinite
from typing import Any, TypeGuard

import numpy as np
from numpy.typing import NDArray

from axicfd.mesh.grid import Array

SECOND_ORDER = 3.2, 5.0  # ratio of successive changes that counts as second order (1.7 to 2.3); 4 is exact
SAFE, CAREFUL = 1.25, 3.0  # Roache's safety factors
LEAST_OF_CORRECTION = 0.1  # the half-width of an extrapolated value is at least this share of the correction
LEAST_OF_COARSER = 0.05  # and of the half-width that one mesh less would have given
LEAST_OF_SETTLED = 0.04  # share of the correction where all four meshes agree on second order
ROUND_OFF = 1e-11  # changes below this share of the value are round-off
# What the iteration may leave undone, as a multiple of the residual at which solves stop: a share of the scale of
# temperatures, heats and pressures; a share of the value for all else. Residuals are sums over the whole tube, so what
# is local, as the largest shear stress, may be off by more (validation/robustness/iterations).
UNDONE, UNDONE_ELSE = 5.0, 300.0

EXTRAPOLATED, FINEST, OSCILLATES, EXACT = "extrapolated", "finest", "oscillates", "exact"
SPACING = "spacing"  # a place: known to a cell of the finest mesh, or to the stretch where its curve is flat
TERMS = "sum of terms"  # a combination whose terms are known better than its own sequence tells
OPPOSED = "r and z opposed"  # added to a rule where the errors of the two directions cancel and widen the half-width
# Coarsening the medium mesh in one direction changes a value by three of its errors there, twelve of the finest mesh's
TWELVE = 12.0
CANCELS = 0.25  # the errors of r and z cancel where the smaller is this share of the larger; less hides too little


@dataclass(frozen=True)
class Estimate:
    """A value with its mesh error.

    value      : the one to report          half_width : of its mesh error; None where nothing can be said
    order      : observed order of the finest three meshes, None where there is none
    rule       : how value and half-width were found
    """

    value: float
    half_width: float | None
    order: float | None
    rule: str


@dataclass(frozen=True)
class Estimates:
    """The estimates of n values, as arrays (n,); half-width and order are nan where `Estimate` has None."""

    value: Array
    half_width: Array
    order: Array
    rule: NDArray[np.str_]


def estimate(values: list[float], floor: float = 0.0) -> Estimate:
    """The estimate from the values of one quantity on nested meshes, coarsest first; three of them, or more.

    floor : least half-width of what depends on the mesh at all
    """
    found = estimates(np.array(values)[:, None], floor)
    half_width, order = (float(x[0]) if np.isfinite(x[0]) else None for x in (found.half_width, found.order))
    return Estimate(float(found.value[0]), half_width, order, str(found.rule[0]))


def estimates(values: Array, floor: float = 0.0) -> Estimates:
    """The estimates from the values (meshes, n) of n quantities, or places of a curve, on nested meshes.

    floor : least half-width of what depends on the mesh at all
    """
    coarse, medium, fine = values[-3:]
    known = np.isfinite(values[-3:]).all(axis=0)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        older, last = medium - coarse, fine - medium
        size = np.abs(values[-3:]).max(axis=0)
        still = np.maximum(np.abs(older), np.abs(last)) <= ROUND_OFF * size
        monotone = older * last > 0.0
        order = np.where(monotone & known & ~still, np.log2(older / last), np.nan)
        mixed = SAFE * np.abs(-5.0 * fine + 6.0 * medium - coarse) / 3.0  # from the limit of value + a h + b h^2
        turning = CAREFUL * np.maximum(np.abs(last), np.abs(older) / 4.0)
        # where the order is not plausible first order of a place nobody knows of may hide behind it
        index = CAREFUL * np.abs(last) / (2.0 ** np.clip(order, 1.0, 2.0) - 1.0)
        extrapolated, close = _of_second_order(values, older, last)
    cases = [~known, still, ~monotone, _is_within(SECOND_ORDER, older, last)]
    # what changes at all is known to no less than round-off: a small pressure drop lies on top of an atmosphere
    round_off = np.where((older != 0.0) | (last != 0.0), ROUND_OFF * size, 0.0)
    widths = [
        np.full_like(fine, np.nan),
        round_off,
        *(np.maximum(w, floor) for w in (np.maximum(turning, mixed), close)),
    ]
    return Estimates(
        np.where(np.select(cases, [False, False, False, True], False), extrapolated, fine),
        np.select(cases, widths, np.maximum(np.maximum(index, mixed), floor)),
        order,
        np.select(cases, [FINEST, EXACT, OSCILLATES, EXTRAPOLATED], FINEST),
    )


def _of_second_order(values: Array, older: Array, last: Array) -> tuple[Array, Array]:
    """Extrapolated values and their half-widths, right where the last two changes are of second order."""
    coarse, medium, fine = values[-3:]
    value, before = (4.0 * fine - medium) / 3.0, (4.0 * medium - coarse) / 3.0
    moved, correction = np.abs(value - before), np.abs(value - fine)
    half = SAFE * np.maximum(moved, LEAST_OF_CORRECTION * correction)
    if len(values) == 3:
        return value, half
    coarsest = values[-4]
    coarser = np.nan_to_num(estimates(values[:-1]).half_width, nan=0.0)
    left = _left(before - (4.0 * coarse - coarsest) / 3.0, moved)
    settled = SAFE * np.maximum(left, LEAST_OF_SETTLED * correction)
    agree = _is_within(SECOND_ORDER, coarse - coarsest, older)
    return value, np.where(agree, settled, np.maximum(half, LEAST_OF_COARSER * coarser))


def _is_within(ratios: tuple[float, float], older: Array, last: Array) -> NDArray[np.bool_]:
    """Where two successive changes have a ratio in a range; written without a division, `last` may be zero."""
    older_size, size = np.abs(older), np.abs(last)
    return (older * last > 0.0) & (ratios[0] * size <= older_size) & (older_size <= ratios[1] * size)


def _left(moved_before: Array, moved: Array) -> Array:
    """What an extrapolated value has still to go, from how far its last two halvings moved it.

    As a geometric series of their ratio, which is not trusted to be more than 4 although 8 or 16 is what smooth fields
    give; and no more than the last move, where the ratio is 2 or less.
    """
    going = moved > 0.0
    ratio = np.abs(moved_before) / np.where(going, moved, 1.0)
    return np.where(going, moved / np.maximum(1.0, np.minimum(ratio, 4.0) - 1.0), 0.0)


def grid_convergence_index(values: tuple[float, float, float], ratios: tuple[float, float]) -> dict[str, float]:
    """Order, extrapolated value and index for unequal refinement ratios.

    Celik, Ghia, Roache, Freitas, Coleman & Raad 2008, J. Fluids Eng. 130, 078001.

    values : on the fine, medium and coarse mesh        ratios : medium / fine and coarse / medium cell size
    Returns order, extrapolated, relative_error, extrapolated_error, index (fine mesh, safety factor 1.25).
    """
    fine, medium, coarse = values
    r21, r32 = ratios
    e21, e32 = medium - fine, coarse - medium
    sign = 1.0 if e32 / e21 > 0.0 else -1.0
    order = 1.0
    for _ in range(200):
        q = np.log((r21**order - sign) / (r32**order - sign))
        new = float(abs(np.log(abs(e32 / e21)) + q) / np.log(r21))
        if abs(new - order) < 1e-13:
            break
        order = new
    factor = r21**order
    extrapolated = (factor * fine - medium) / (factor - 1.0)
    relative = abs((fine - medium) / fine)
    return {
        "order": order,
        "extrapolated": extrapolated,
        "relative_error": relative,
        "extrapolated_error": abs((extrapolated - fine) / extrapolated),
        "index": SAFE * relative / (factor - 1.0),
    }


def unit(path: tuple[str, ...]) -> str | None:
    """ "K", "W" or "Pa" where a quantity is counted of a scale that the case has for it, None where of its own size.

    path : its names in the tree, or the one of a column
    """
    for name in reversed(path):
        if name.endswith("_K_W"):
            break
        if name.endswith("_K"):
            return "K"
        if name.endswith("_W"):
            return "W"
        if name.endswith("_Pa") and "shear" not in name:
            return "Pa"
    return None


def scale(path: tuple[str, ...], value: float, of: dict[str, float]) -> float:
    """What a share of a quantity is counted of: the scale of its unit, or its own size."""
    counted = unit(path)
    return of[counted] if counted else abs(value)


PLACE = "_z_m"  # end of the name of a place; "_K" in its stead is the extreme that lies there


@dataclass(frozen=True)
class Floor:
    """The least half-widths in a solved case: what further iterations might change.

    scales   : "K", "W", "Pa" -> what shares of temperatures, heats and pressures are counted of
    residual : at which the solves stop
    """

    scales: dict[str, float]
    residual: float

    def of(self, path: tuple[str, ...], value: float) -> float:
        """Of a quantity, in its unit. path : its names in the tree, or the one that carries the unit"""
        return (UNDONE if unit(path) else UNDONE_ELSE) * self.residual * scale(path, value, self.scales)

    def of_curve(self, column: str, values: Array) -> float:
        """Of a whole curve, by its largest value."""
        return self.of((column,), float(np.abs(values).max(where=np.isfinite(values), initial=0.0)))


@dataclass(frozen=True)
class LeastWidths:
    """What the mesh errors of a tree need besides the values.

    z      : (nz + 1,) [m] axial faces of the finest mesh
    curves : names of each place, joined by dots -> (z, values) of the curve whose largest value lies there
    floor  : of every half-width
    """

    z: Array
    curves: dict[str, tuple[Array, Array]]
    floor: Floor

    def known_to(self, path: tuple[str, ...], places: list[float], extremes: list[float]) -> float:
        """[m] half-width of a place, from the places and the extremes there on the last meshes.

        At least the cell that it lies in and its last move; and it reaches as far as the curve of the finest mesh comes
        as near to its extreme as that is known: the true curve may have its extreme anywhere there.
        """
        place = places[-1]
        k = np.clip(np.searchsorted(self.z, place) - 1, 0, len(self.z) - 2)
        least = max(float(self.z[k + 1] - self.z[k]), abs(place - places[-2]))
        if ".".join(path) not in self.curves:
            return least
        found = estimate(extremes)
        floor = self.floor.of((*path[:-1], _extreme(path[-1])), extremes[-1])
        margin = max(found.half_width or 0.0, floor) + abs(found.value - extremes[-1])
        z, values = self.curves[".".join(path)]
        return max(least, float(np.abs(z[values >= values.max() - margin] - place).max()))


def _extreme(place: str) -> str:
    return place.removesuffix(PLACE) + "_K"


def estimate_tree(trees: list[Any], least: LeastWidths, path: tuple[str, ...] = ()) -> tuple[Any, Any, Any]:
    """(values, half-widths, how) of the trees of headline quantities on nested meshes, coarsest first.

    Leaves that are not numbers on all of the last three meshes are taken from the finest, without a half-width.
    """
    values, widths, hows = {}, {}, {}
    for key, leaf in trees[-1].items():
        below, here = [tree.get(key) if isinstance(tree, dict) else None for tree in trees], (*path, key)
        values[key], width, how = leaf, None, None
        if isinstance(leaf, dict) and key != "why":
            values[key], width, how = estimate_tree(below, least, here)
        elif all(_is_number(value) for value in below[-3:]):
            numbers = [float(value) for value in below if _is_number(value)]
            if key.endswith(PLACE):
                extremes = [tree.get(_extreme(key)) for tree in trees if isinstance(tree, dict)]
                width = least.known_to(here, numbers, [float(value) for value in extremes if _is_number(value)])
                how = {"observed_order": None, "rule": SPACING}
            else:
                found = estimate(numbers, least.floor.of(here, numbers[-1]))
                values[key], width = found.value, found.half_width
                how = {"observed_order": found.order, "rule": found.rule}
        if width is not None and width != {}:
            widths[key], hows[key] = width, how
    return values, widths, hows


@dataclass(frozen=True)
class Split:
    """Errors of the finest value [its unit] from the cells along r and along z, signed; second order is assumed."""

    r: float
    z: float

    @property
    def opposed(self) -> float:
        """The half-width that errors of opposite sign must not fall below: joint refinement sees only their sum."""
        small, large = sorted((abs(self.r), abs(self.z)))
        return large if self.r * self.z < 0.0 and small >= CANCELS * large else 0.0


def split(medium: Any, coarse_r: Any, coarse_z: Any) -> Split | None:
    """From the values on the medium mesh and on that mesh coarsened along r only and along z only."""
    if not all(_is_number(value) for value in (medium, coarse_r, coarse_z)):
        return None
    return Split((coarse_r - medium) / TWELVE, (coarse_z - medium) / TWELVE)


def _is_number(leaf: Any) -> TypeGuard[float]:
    return isinstance(leaf, int | float) and not isinstance(leaf, bool) and isfinite(leaf)


def curve_half_widths(z: list[Array], columns: list[Array], floor: float = 0.0) -> Array:
    """Half-widths along a curve on the finest faces, from the curves on nested meshes, coarsest first.

    z, columns : faces and values of each mesh; coarse faces are fine faces. nan where a mesh has no value.
    floor      : least half-width of what depends on the mesh at all
    Between the faces that all of the last three meshes share the half-width is interpolated.
    """
    shared = z[-3]
    picks = [
        column[np.searchsorted(faces, shared - 1e-12 * shared[-1])]
        for faces, column in zip(z[-3:], columns[-3:], strict=True)
    ]
    found = estimates(np.array(picks), floor)
    # the curves themselves stay those of the finest mesh
    widths = found.half_width + np.abs(found.value - picks[-1])
    good = np.isfinite(widths)
    if not good.any():
        return np.full(len(z[-1]), np.nan)
    filled = np.interp(z[-1], shared[good], widths[good])
    return np.where(np.isfinite(columns[-1]), filled, np.nan)
