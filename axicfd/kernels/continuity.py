"""Pressure correction: the velocity that continuity still lacks, as one symmetric system solved by line multigrid.

    sum over the faces of a cell of  rho A d (p'_neighbour - p'_cell) = mass defect of the cell

cz (nz + 1, nr) couples the cells beside an axial face (cz[nz]: outlet, p' = 0 there; cz[0] = 0), cr (nz, nr + 1) those
beside a radial face. The system is symmetric and positive; conjugate gradients solve it, with one symmetric multigrid
cycle as preconditioner. Smoother: implicit radial lines; coarse meshes join cells in pairs (an odd one stays
single); the sum over each station, solved exactly along z, carries pressure levels over the whole length at once.
"""

import numpy as np

from axicfd.kernels._jit import kernel

# Corrections constant over joined cells come out too small, by up to two per joined direction (Braess 1995,
# Computing 55, 379).
JOINED_GAIN = 1.6


@kernel
def mass_defect(mz, mr, open_p, fc, b):
    """Net inflow of each cell plus a source fc [kg/s], b (nz, nr); returns the sum of its absolute values."""
    nz, nr = b.shape
    total = 0.0
    for i in range(nz):
        for j in range(nr):
            b[i, j] = open_p[i, j] * (fc[i, j] + mz[i, j] - mz[i + 1, j] + mr[i, j] - mr[i, j + 1])
            total += abs(b[i, j])
    return total


@kernel
def coefficients(rho, area, ring, dz, du, dv, cz, cr):
    """Couplings of the pressure correction from the velocity changes per unit of pressure, du and dv."""
    nz, nr = len(dz), len(area)
    for i in range(1, nz + 1):
        for j in range(nr):
            cz[i, j] = rho * area[j] * du[i, j]
    for i in range(nz):
        for j in range(1, nr):
            cr[i, j] = rho * ring[j] * dz[i] * dv[i, j]


@kernel
def coarsen(cz, cr, pair_r, coarse_cz, coarse_cr):
    """Couplings of the mesh with cells joined in pairs along z and, if pair_r is 2, along r: sums over joined faces.

    That is the Galerkin product for corrections that are constant over joined cells, so it stays symmetric and positive
    on any mesh, however strongly stretched.
    """
    nz, nr = cr.shape[0], cz.shape[1]
    coarse_nz = coarse_cr.shape[0]
    coarse_cz[:, :] = 0.0
    coarse_cr[:, :] = 0.0
    for k in range(coarse_nz + 1):
        i = min(2 * k, nz)
        for j in range(nr):
            coarse_cz[k, j // pair_r] += cz[i, j]
    for i in range(nz):
        for j in range(0, nr + 1, pair_r):
            coarse_cr[i // 2, j // pair_r] += cr[i, j]


@kernel
def apply(cz, cr, x, y):
    """y = A x for the pressure-correction system."""
    nz, nr = x.shape
    for i in range(nz):
        for j in range(nr):
            s = (cz[i, j] + cz[i + 1, j] + cr[i, j] + cr[i, j + 1]) * x[i, j]
            if i > 0:
                s -= cz[i, j] * x[i - 1, j]
            if i < nz - 1:
                s -= cz[i + 1, j] * x[i + 1, j]
            if j > 0:
                s -= cr[i, j] * x[i, j - 1]
            if j < nr - 1:
                s -= cr[i, j + 1] * x[i, j + 1]
            y[i, j] = s


@kernel
def dot(a, b):
    """Sum of products; a threaded library routine would wait for cores longer than this takes."""
    s = 0.0
    for i in range(a.shape[0]):
        for j in range(a.shape[1]):
            s += a[i, j] * b[i, j]
    return s


@kernel
def factors(cz, cr, f):
    """Inverse pivots of all radial lines, f (nz, nr): sweeps then need no divisions. Zero in cells without
    couplings.
    """
    nz, nr = f.shape
    for i in range(nz):
        for j in range(nr):
            a = cz[i, j] + cz[i + 1, j] + cr[i, j] + cr[i, j + 1]
            if a == 0.0:
                f[i, j] = 0.0
            else:
                f[i, j] = 1.0 / (a - (cr[i, j] * cr[i, j] * f[i, j - 1] if j > 0 else 0.0))


@kernel
def line_sweep(cz, cr, f, b, x, downstream):
    """One Gauss-Seidel sweep over radial lines, each solved exactly; f from `factors`."""
    nz, nr = b.shape
    y = np.empty(nr)
    for k in range(nz):
        i = k if downstream else nz - 1 - k
        for j in range(nr):
            y[j] = b[i, j]
        if i > 0:
            for j in range(nr):
                y[j] += cz[i, j] * x[i - 1, j]
        if i < nz - 1:
            for j in range(nr):
                y[j] += cz[i + 1, j] * x[i + 1, j]
        below = 0.0
        for j in range(nr):
            below = (y[j] + cr[i, j] * below) * f[i, j]
            y[j] = below
        above = y[nr - 1]
        x[i, nr - 1] = above
        for j in range(nr - 2, -1, -1):
            above = y[j] + cr[i, j + 1] * f[i, j] * above
            x[i, j] = above


@kernel
def station_shift(cz, cr, b, x):
    """Add to x one value per station, such that the residual summed over each station vanishes."""
    nz, nr = b.shape
    low = np.zeros(nz)
    high = np.zeros(nz)
    rhs = np.zeros(nz)
    for i in range(nz):
        for j in range(nr):
            r = b[i, j] - (cz[i, j] + cz[i + 1, j] + cr[i, j] + cr[i, j + 1]) * x[i, j]
            if i > 0:
                r += cz[i, j] * x[i - 1, j]
            if i < nz - 1:
                r += cz[i + 1, j] * x[i + 1, j]
            if j > 0:
                r += cr[i, j] * x[i, j - 1]
            if j < nr - 1:
                r += cr[i, j + 1] * x[i, j + 1]
            rhs[i] += r
            low[i] += cz[i, j]
            high[i] += cz[i + 1, j]
    for i in range(nz):
        a = low[i] + high[i]
        if i > 0:
            a -= low[i] * high[i - 1]
            rhs[i] += low[i] * rhs[i - 1]
        if a == 0.0:
            a = 1.0
        high[i] /= a
        rhs[i] /= a
    for i in range(nz - 2, -1, -1):
        rhs[i] += high[i] * rhs[i + 1]
    for i in range(nz):
        for j in range(nr):
            x[i, j] += rhs[i]


@kernel
def restrict_residual(cz, cr, b, x, pair_r, coarse_b):
    """Residual summed over joined cells into coarse_b."""
    nz, nr = b.shape
    coarse_b[:, :] = 0.0
    for i in range(nz):
        for j in range(nr):
            r = b[i, j] - (cz[i, j] + cz[i + 1, j] + cr[i, j] + cr[i, j + 1]) * x[i, j]
            if i > 0:
                r += cz[i, j] * x[i - 1, j]
            if i < nz - 1:
                r += cz[i + 1, j] * x[i + 1, j]
            if j > 0:
                r += cr[i, j] * x[i, j - 1]
            if j < nr - 1:
                r += cr[i, j + 1] * x[i, j + 1]
            coarse_b[i // 2, j // pair_r] += r


@kernel
def extend(coarse_x, pair_r, x):
    """Add the correction of joined cells to each of them."""
    nz, nr = x.shape
    for i in range(nz):
        for j in range(nr):
            x[i, j] += JOINED_GAIN * coarse_x[i // 2, j // pair_r]


@kernel
def correct(x, du, dv, open_p, relax_p, u, v, p):
    """Apply a pressure correction x to u, v (in full) and p (times relax_p)."""
    nz, nr = p.shape
    for i in range(1, nz + 1):
        for j in range(nr):
            u[i, j] += du[i, j] * (x[i - 1, j] - (x[i, j] if i < nz else 0.0))
    for i in range(nz):
        for j in range(1, nr):
            v[i, j] += dv[i, j] * (x[i, j - 1] - x[i, j])
    for i in range(nz):
        for j in range(nr):
            p[i, j] += relax_p * open_p[i, j] * x[i, j]
