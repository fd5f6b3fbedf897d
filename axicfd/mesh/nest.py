"""Carrying fields from one mesh of a case to another."""

import numpy as np

from axicfd.mesh.grid import Array


def carry(values: Array, z_from: Array, r_from: Array, z_to: Array, r_to: Array) -> Array:
    """Bilinear interpolation of values (len(z_from), len(r_from)) to the points z_to x r_to; constant beyond the
    ends.
    """
    along = _interpolate(values, z_from, z_to)
    return np.ascontiguousarray(_interpolate(along.T, r_from, r_to).T)


def _interpolate(values: Array, x_from: Array, x_to: Array) -> Array:
    if len(x_from) == 1:
        return np.repeat(values, len(x_to), axis=0)
    k = np.clip(np.searchsorted(x_from, x_to) - 1, 0, len(x_from) - 2)
    w = np.clip((x_to - x_from[k]) / (x_from[k + 1] - x_from[k]), 0.0, 1.0)[:, None]
    return values[k] + w * (values[k + 1] - values[k])
