"""Transfers between a stream's mesh and the next coarser one, whose faces are every `pair`-th face of the fine mesh.

Velocities on shared faces are averaged so that mass flows add up exactly; residuals are sums over control volumes.
pair_z, pair_r are 1 or 2; an odd last cell stays single.
"""

from axicfd.kernels._jit import kernel


@kernel
def restrict_velocity(u, v, p, area, dz, volume_p, pair_z, pair_r, cu, cv, cp):
    """Coarse u, v, p: flow-conserving means on faces, volume means in cells.

    area (nr,), dz (nz,), volume_p (nz, nr): fine axial face areas, cell lengths and open cell volumes
    """
    nz, nr = p.shape
    cnz, cnr = cp.shape
    for i in range(cnz + 1):
        fine = min(i * pair_z, nz)
        for j in range(cnr):
            flow, a = 0.0, 0.0
            for b in range(j * pair_r, min((j + 1) * pair_r, nr)):
                flow += u[fine, b] * area[b]
                a += area[b]
            cu[i, j] = flow / a
    for i in range(cnz):
        i0, i1 = i * pair_z, min((i + 1) * pair_z, nz)
        length = 0.0
        for a in range(i0, i1):
            length += dz[a]
        for j in range(cnr + 1):
            flow = 0.0
            for a in range(i0, i1):
                flow += v[a, j * pair_r] * dz[a]
            cv[i, j] = flow / length
        for j in range(cnr):
            s, w = 0.0, 0.0
            for a in range(i0, i1):
                for b in range(j * pair_r, (j + 1) * pair_r):
                    s += p[a, b] * volume_p[a, b]
                    w += volume_p[a, b]
            cp[i, j] = s / w if w > 0.0 else 0.0


@kernel
def restrict_residuals(ru, rv, rc, pair_z, pair_r, cru, crv, crc):
    """Sums of fine residuals over coarse control volumes; a fine velocity between two coarse ones is shared by them."""
    nz, nr = rc.shape
    cru[:, :] = 0.0
    crv[:, :] = 0.0
    crc[:, :] = 0.0
    cnz = crc.shape[0]
    for i in range(1, nz + 1):
        c = i // pair_z
        between = i % pair_z != 0 and i < nz
        if i == nz:
            c = cnz
        for j in range(nr):
            if between:
                cru[c, j // pair_r] += 0.5 * ru[i, j]
                cru[c + 1, j // pair_r] += 0.5 * ru[i, j]
            else:
                cru[c, j // pair_r] += ru[i, j]
    for j in range(cru.shape[1]):
        cru[0, j] = 0.0
    for i in range(nz):
        for j in range(1, nr):
            c = j // pair_r
            if j % pair_r != 0:
                crv[i // pair_z, c] += 0.5 * rv[i, j]
                crv[i // pair_z, c + 1] += 0.5 * rv[i, j]
            else:
                crv[i // pair_z, c] += rv[i, j]
        for j in range(nr):
            crc[i // pair_z, j // pair_r] += rc[i, j]
    for i in range(crv.shape[0]):
        crv[i, 0] = 0.0
        crv[i, crv.shape[1] - 1] = 0.0


@kernel
def prolong_add(coarse, zi, zw, ri, rw, open_, fine):
    """Add to `fine` the bilinear interpolation of `coarse`; zi, ri the lower coarse neighbour of each fine point,
    zw, rw
    the weight of the upper one."""
    n, m = fine.shape
    for i in range(n):
        a = zi[i]
        b = min(a + 1, coarse.shape[0] - 1)
        for j in range(m):
            c = ri[j]
            d = min(c + 1, coarse.shape[1] - 1)
            low = coarse[a, c] + rw[j] * (coarse[a, d] - coarse[a, c])
            high = coarse[b, c] + rw[j] * (coarse[b, d] - coarse[b, c])
            fine[i, j] += open_[i, j] * (low + zw[i] * (high - low))


@kernel
def sums(values, rows, columns, total):
    """Sums over joined cells: values (nz, nr); rows, columns: first fine station and ring of each coarse cell of
    `total`.
    """
    nz, nr = values.shape
    for a in range(len(rows)):
        i1 = rows[a + 1] if a + 1 < len(rows) else nz
        for b in range(len(columns)):
            total[a, b] = 0.0
        for i in range(rows[a], i1):
            for b in range(len(columns)):
                j1 = columns[b + 1] if b + 1 < len(columns) else nr
                for j in range(columns[b], j1):
                    total[a, b] += values[i, j]
