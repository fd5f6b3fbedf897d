"""Line relaxation of a five-point system on the whole grid: the smoothers of the heat multigrid.

    (w + e + s + n + loss) x_P - w x_W - e x_E - s x_S - n x_N = b

w, e, s, n, loss, b, x are (nz, nr), d is the diagonal; a coefficient towards the outside of the grid must be zero.
"""

import numpy as np

from axicfd.kernels._jit import kernel


@kernel
def upwind_links(gz, gr, wz, wr, loss, open_, w, e, s, n, d):
    """Five-point coefficients with upwind convection; d (nz, nr) is the diagonal, 1 in cells without an equation.

    gz, gr : conductances; wz, wr : m cp at faces, as in `energy.stencil`; open_ : 0 in cells without an equation,
    else 1
    """
    nz, nr = loss.shape
    for i in range(nz):
        for j in range(nr):
            west, east = wz[i, j], wz[i + 1, j]
            inner, outer = wr[i, j], wr[i, j + 1]
            w[i, j] = gz[i, j] + (max(west, 0.0) if i > 0 else 0.0)
            e[i, j] = gz[i + 1, j] + (max(-east, 0.0) if i < nz - 1 else 0.0)
            s[i, j] = max(gr[i, j] + 0.5 * inner, inner, 0.0)
            n[i, j] = max(gr[i, j + 1] - 0.5 * outer, -outer, 0.0)
            a = gz[i, j] + gz[i + 1, j] + loss[i, j] + max(-west, 0.0) + max(east, 0.0)
            a += max(gr[i, j] - 0.5 * inner, -inner, 0.0) + max(gr[i, j + 1] + 0.5 * outer, outer, 0.0)
            d[i, j] = a if open_[i, j] > 0.0 else 1.0


@kernel
def factors(w, e, s, n, d, fr, fz):
    """Inverse pivots of all radial lines, fr, and all axial lines, fz, both (nz, nr): sweeps then need no divisions."""
    nz, nr = d.shape
    for i in range(nz):
        for j in range(nr):
            fr[i, j] = 1.0 / (d[i, j] - (s[i, j] * n[i, j - 1] * fr[i, j - 1] if j > 0 else 0.0))
            fz[i, j] = 1.0 / (d[i, j] - (w[i, j] * e[i - 1, j] * fz[i - 1, j] if i > 0 else 0.0))


@kernel
def r_sweep(w, e, s, n, d, fr, fz, b, x, rising):
    """Radial lines one after the other, by rising or falling station."""
    nz, nr = b.shape
    y = np.empty(nr)
    for k in range(nz):
        i = k if rising else nz - 1 - k
        for j in range(nr):
            y[j] = b[i, j]
        if i > 0:
            for j in range(nr):
                y[j] += w[i, j] * x[i - 1, j]
        if i < nz - 1:
            for j in range(nr):
                y[j] += e[i, j] * x[i + 1, j]
        below = 0.0
        for j in range(nr):
            below = (y[j] + s[i, j] * below) * fr[i, j]
            y[j] = below
        above = y[nr - 1]
        x[i, nr - 1] = above
        for j in range(nr - 2, -1, -1):
            above = y[j] + n[i, j] * fr[i, j] * above
            x[i, j] = above


@kernel
def z_sweep(w, e, s, n, d, fr, fz, b, x):
    """Axial lines, every second one first and then the others, so that stations are walked in the order of memory."""
    nz, nr = b.shape
    y = np.empty((nz, nr))
    for half in range(2):
        for i in range(nz):
            for j in range(half, nr, 2):
                r = b[i, j]
                if j > 0:
                    r += s[i, j] * x[i, j - 1]
                if j < nr - 1:
                    r += n[i, j] * x[i, j + 1]
                if i > 0:
                    r += w[i, j] * y[i - 1, j]
                y[i, j] = r * fz[i, j]
        for j in range(half, nr, 2):
            x[nz - 1, j] = y[nz - 1, j]
        for i in range(nz - 2, -1, -1):
            for j in range(half, nr, 2):
                x[i, j] = y[i, j] + e[i, j] * fz[i, j] * x[i + 1, j]


@kernel
def remainder(w, e, s, n, d, b, x, r):
    """r = b - A x."""
    nz, nr = b.shape
    for i in range(nz):
        for j in range(nr):
            q = b[i, j] - d[i, j] * x[i, j]
            if i > 0:
                q += w[i, j] * x[i - 1, j]
            if i < nz - 1:
                q += e[i, j] * x[i + 1, j]
            if j > 0:
                q += s[i, j] * x[i, j - 1]
            if j < nr - 1:
                q += n[i, j] * x[i, j + 1]
            r[i, j] = q


@kernel
def eliminate(w, e, s, n, d, band):
    """The LU factors of the system on a small grid, without exchange of rows: band (nz nr, 2 nr + 1), diagonal in the
    middle.

    Returns whether every pivot is a number other than zero. Diagonals outweigh rows, so pivots do not get small.
    """
    nz, nr = d.shape
    for i in range(nz):
        for j in range(nr):
            row = band[i * nr + j]
            for k in range(2 * nr + 1):
                row[k] = 0.0
            row[nr] = d[i, j]
            # one ring: both neighbours along r are outside, and a station apart is one column
            row[nr - 1] -= s[i, j]
            row[nr + 1] -= n[i, j]
            row[0] -= w[i, j]
            row[2 * nr] -= e[i, j]
    sound = True
    for p in range(nz * nr):
        pivot = band[p, nr]
        sound = sound and pivot != 0.0 and np.isfinite(pivot)
        for q in range(p + 1, min(p + nr + 1, nz * nr)):
            f = band[q, p - q + nr]
            if f != 0.0:
                f /= pivot
                band[q, p - q + nr] = f
                for k in range(1, nr + 1):
                    band[q, p - q + nr + k] -= f * band[p, nr + k]
    return sound


@kernel
def substitute(band, b, x):
    """x (nz, nr) of the system whose factors `eliminate` left in `band`."""
    nz, nr = b.shape
    for p in range(nz * nr):
        t = b[p // nr, p % nr]
        for k in range(max(nr - p, 0), nr):
            t -= band[p, k] * x[(p + k - nr) // nr, (p + k - nr) % nr]
        x[p // nr, p % nr] = t
    for p in range(nz * nr - 1, -1, -1):
        t = x[p // nr, p % nr]
        for k in range(1, min(nr + 1, nz * nr - p)):
            t -= band[p, nr + k] * x[(p + k) // nr, (p + k) % nr]
        x[p // nr, p % nr] = t / band[p, nr]
