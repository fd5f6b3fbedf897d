"""The Arnoldi step of GMRES on plain vectors. Threaded library routines would wait for busy cores longer than this takes."""

import numpy as np

from axicfd.kernels._jit import kernel


@kernel
def orthogonalise(basis, k, w, h):
    """Take the directions 0 .. k of `basis` (m + 1, n) out of w (n,), and store what is left, normed, as direction k + 1.

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
