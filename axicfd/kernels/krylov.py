"""The Arnoldi step of GMRES on fields (nz, nr). Threaded library routines would wait for busy cores longer than this
takes.
"""

import math

import numpy as np

from axicfd.kernels._jit import kernel


@kernel
def take_out(v, w):
    """Take the direction v, of norm 1, out of w; returns how much of it there was."""
    nz, nr = v.shape
    s = 0.0
    for i in range(nz):
        for j in range(nr):
            s += v[i, j] * w[i, j]
    for i in range(nz):
        for j in range(nr):
            w[i, j] -= s * v[i, j]
    return s


@kernel
def add(factor, v, x):
    """Add a multiple of v to x."""
    nz, nr = v.shape
    for i in range(nz):
        for j in range(nr):
            x[i, j] += factor * v[i, j]


@kernel
def norm(x):
    """Euclidean norm."""
    s = 0.0
    for i in range(x.shape[0]):
        for j in range(x.shape[1]):
            s += x[i, j] * x[i, j]
    return np.sqrt(s)


def rotate(column: list[float], turns: list[tuple[float, float]], g: list[float]) -> float:
    """Bring the next column of the Hessenberg matrix to triangular form by plane rotations, and the right-hand side g
    with it.

    column is overwritten; turns holds cosine and sine of every rotation so far and receives one more, g one number.
    Returns the norm of the residual. A few dozen numbers: plain Python is as fast as compiled code.
    """
    for i, (c, s) in enumerate(turns):
        column[i], column[i + 1] = c * column[i] + s * column[i + 1], c * column[i + 1] - s * column[i]
    size = math.hypot(column[-2], column[-1])
    c, s = (column[-2] / size, column[-1] / size) if size > 0.0 else (1.0, 0.0)
    turns.append((c, s))
    column[-2:] = size, 0.0
    g[-1:] = c * g[-1], -s * g[-1]
    return abs(g[-1])
