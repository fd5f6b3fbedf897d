"""The Arnoldi step of GMRES on plain vectors. Threaded library routines would wait for busy cores longer than this
takes.
"""

import numpy as np

from axicfd.kernels._jit import kernel


@kernel
def orthogonalise(basis, k, w, h):
    """Take the directions 0 .. k of `basis` (m + 1, n) out of w (n,), and store what is left, normed, as direction
    k + 1.

    h (m + 1,) receives the projections and the norm of what was left (modified Gram-Schmidt).
    """
    n = len(w)
    for i in range(k + 1):
        v = basis[i]
        s = 0.0
        for j in range(n):
            s += v[j] * w[j]
        for j in range(n):
            w[j] -= s * v[j]
        h[i] = s
    s = 0.0
    for j in range(n):
        s += w[j] * w[j]
    s = np.sqrt(s)
    h[k + 1] = s
    if s > 0.0:
        for j in range(n):
            basis[k + 1, j] = w[j] / s


@kernel
def rotate(column, turns, k, g):
    """Bring column k of the Hessenberg matrix to triangular form by plane rotations, and the right-hand side g with it.

    column (m + 1,) is overwritten; turns (m, 2) holds cosine and sine of every rotation so far and receives one more.
    Returns the norm of the residual.
    """
    for i in range(k):
        c, s = turns[i, 0], turns[i, 1]
        column[i], column[i + 1] = c * column[i] + s * column[i + 1], c * column[i + 1] - s * column[i]
    size = np.sqrt(column[k] ** 2 + column[k + 1] ** 2)
    c, s = (column[k] / size, column[k + 1] / size) if size > 0.0 else (1.0, 0.0)
    turns[k, 0], turns[k, 1] = c, s
    column[k], column[k + 1] = size, 0.0
    g[k], g[k + 1] = c * g[k], -s * g[k]
    return abs(g[k + 1])


@kernel
def combine(basis, y, k, x):
    """x = the sum of y[i] times direction i, for i < k."""
    for j in range(len(x)):
        x[j] = 0.0
    for i in range(k):
        for j in range(len(x)):
            x[j] += y[i] * basis[i, j]


@kernel
def norm(x):
    """Euclidean norm."""
    s = 0.0
    for j in range(len(x)):
        s += x[j] * x[j]
    return np.sqrt(s)
