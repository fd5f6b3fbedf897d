"""Values between cells: interpolation along z that stops at joints, and extrapolation to planes and to the axis."""

import numpy as np

from axicfd.mesh.grid import Array

SAME_PLACE = 1e-12  # share of the length within which a place lies on a face


def to_faces(values: Array, zc: Array, z: Array, breaks: tuple[int, ...]) -> tuple[Array, Array]:
    """Values on the axial faces from those of the stations, by cubics that do not reach across the faces `breaks`.

    values (nz, ...) at zc; returns (before, after), both (nz + 1, ...): at a break the values from either side, else
    equal.
    At the first and the last plane both are the extrapolation from inside.
    """
    cuts = sorted({0, len(zc), *(b for b in breaks if 0 < b < len(zc))})
    before, after = np.empty((len(z), *values.shape[1:])), np.empty((len(z), *values.shape[1:]))
    for a, b in zip(cuts[:-1], cuts[1:], strict=True):
        inside = _without_overshoot(at_points(zc[a:b], values[a:b], z[a : b + 1]), values[a:b])
        after[a:b] = inside[:-1]
        before[a + 1 : b + 1] = inside[1:]
    before[0], after[-1] = after[0], before[-1]
    return before, after


def _without_overshoot(faces: Array, stations: Array) -> Array:
    """Face values kept as close to the range of the two stations beside them as the curvature there allows.

    A smooth extreme lies beyond both neighbours by up to an eighth of the second difference; at a kink, as at the
    end of a ramp, the second difference of one side vanishes and the cubic may not swing past. The end faces stay as
    they are.
    """
    if len(stations) < 4:
        return faces
    low, high = np.minimum(stations[1:], stations[:-1]), np.maximum(stations[1:], stations[:-1])
    bend = np.abs(np.diff(stations, n=2, axis=0))
    room = 0.25 * np.minimum(np.concatenate([bend[:1], bend]), np.concatenate([bend, bend[-1:]]))
    faces = faces.copy()
    faces[1:-1] = np.clip(faces[1:-1], low - room, high + room)
    return faces


def at_points(x: Array, y: Array, at: Array) -> Array:
    """Lagrange interpolation over the four nearest points (all of them, if there are fewer).

    x (n,) and y (n, ...); returns (len(at), ...)
    """
    n = len(x)
    width = min(4, n)
    k = np.clip(np.searchsorted(x, at) - width // 2, 0, n - width)
    result = np.zeros((len(at), *y.shape[1:]))
    for a in range(width):
        weight = np.ones(len(at))
        for b in range(width):
            if a != b:
                weight *= (at - x[k + b]) / (x[k + a] - x[k + b])
        result += weight.reshape(-1, *(1,) * (y.ndim - 1)) * y[k + a]
    return result


def to_axis(values: Array, rc: Array) -> Array:
    """Values on the axis from the two cells beside it, by a parabola in r^2; values (n, nr), returns (n,)."""
    if values.shape[1] == 1:
        return values[:, 0]
    share = rc[0] ** 2 / (rc[1] ** 2 - rc[0] ** 2)
    return values[:, 0] + share * (values[:, 0] - values[:, 1])


def to_first_plane(values: Array, zc: Array, z0: float) -> Array:
    """Values in the plane z0 before the first stations by a parabola along z; values (nz, nr), returns (nr,)."""
    n = min(3, len(zc))
    return at_points(zc[:n], values[:n], np.array([z0]))[0]


def last_crossing(z: Array, deviation: Array, limit: float) -> float | None:
    """The last z at which a deviation falls below the limit; 0-based on z[0]. None if it is never below at the end.

    `deviation` is taken as it comes (nan counts as above the limit). Returns z[0] where it never exceeds the limit.
    """
    above = ~(deviation <= limit)
    if above[-1]:
        return None
    if not above.any():
        return float(z[0])
    k = int(np.flatnonzero(above)[-1])
    if not np.isfinite(deviation[k]):
        return float(z[k + 1])
    return float(z[k] + (deviation[k] - limit) / (deviation[k] - deviation[k + 1]) * (z[k + 1] - z[k]))


def extreme(z: Array, values: Array, sign: float) -> tuple[float, float]:
    """(value, place) of the largest (sign 1) or smallest (sign -1) of values along z, refined by a parabola inside.

    z may repeat at joints, where the values of both sides stand; the parabola then is not used.
    """
    k = int(np.argmax(sign * values))
    value, place = float(values[k]), float(z[k])
    if 0 < k < len(z) - 1 and z[k - 1] < z[k] < z[k + 1]:
        h0, h1 = z[k] - z[k - 1], z[k + 1] - z[k]
        s0, s1 = (values[k] - values[k - 1]) / h0, (values[k + 1] - values[k]) / h1
        curve = (s1 - s0) / (h0 + h1)
        if sign * curve < 0.0:
            slope = s0 + curve * h0
            shift = -slope / (2.0 * curve)
            if -h0 < shift < h1:
                return value + float(slope * shift + curve * shift**2), place + float(shift)
    return value, place


def at_place(values: Array, zc: Array, z: Array, breaks: tuple[int, ...], place: float) -> float:
    """The value at a place along z, by the cubic of its own stretch between breaks; nan where values are.

    At a break itself the stretch before it counts.
    """
    cuts = sorted({0, len(zc), *(b for b in breaks if 0 < b < len(zc))})
    k = int(np.searchsorted([z[c] for c in cuts[1:-1]], place - SAME_PLACE * z[-1]))
    a, b = cuts[k], cuts[k + 1]
    return float(at_points(zc[a:b], values[a:b], np.array([place]))[0])
