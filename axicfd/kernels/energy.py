"""The conjugate energy balance of every cell, stream and solid alike, in one system.

    sum over faces of [ m h(T_face) - G (T_neighbour* - T_cell*) ]  =  sources  +  heat through the outside and the ends

T is measured from the inlet temperature. G are conductances in W/K between nodes (logarithmic across solids, contact
resistances inside); T* is the node temperature plus the exact term of a uniform source in the cell, so that a
one-dimensional wall of constant conductivity is exact on any mesh. h is the enthalpy from the inlet temperature.

Convected face temperatures: along z Fromm's scheme (half central, half linear upwind), linear upwind near joints and
inlets, where Fromm would undershoot; along r central. No scheme of first order is used in the interior.
"""

from axicfd.kernels._jit import kernel


@kernel
def z_scheme(mz, z, zc, upwind_only, c):
    """Weights of the cells i - 2, i - 1, i, i + 1 in the temperature of axial face i, c (nz + 1, nr, 4).

    upwind_only : (nz + 1,) faces where linear upwind replaces Fromm's scheme
    Inflow faces at the ends get zero weights (their temperature is given); outflow faces are extrapolated.
    """
    nz = len(zc)
    c[:, :, :] = 0.0
    for i in range(nz + 1):
        central = 0.0 if upwind_only[i] else 0.5
        for j in range(mz.shape[1]):
            if mz[i, j] > 0.0:
                if i == 0:
                    continue
                c[i, j, 1] = 1.0
                has_up = i >= 2
                w = central if has_up else 1.0
                if i < nz:
                    g = w * (z[i] - zc[i - 1]) / (zc[i] - zc[i - 1])
                    c[i, j, 1] -= g
                    c[i, j, 2] += g
                else:
                    w = 0.0
                if has_up:
                    g = (1.0 - w) * (z[i] - zc[i - 1]) / (zc[i - 1] - zc[i - 2])
                    c[i, j, 1] += g
                    c[i, j, 0] -= g
            elif mz[i, j] < 0.0:
                if i == nz:
                    continue
                c[i, j, 2] = 1.0
                has_up = i <= nz - 2
                w = central if has_up else 1.0
                if i > 0:
                    g = w * (zc[i] - z[i]) / (zc[i] - zc[i - 1])
                    c[i, j, 2] -= g
                    c[i, j, 1] += g
                else:
                    w = 0.0
                if has_up:
                    g = (1.0 - w) * (zc[i] - z[i]) / (zc[i + 1] - zc[i])
                    c[i, j, 2] += g
                    c[i, j, 3] -= g
            elif 0 < i < nz:
                g = (z[i] - zc[i - 1]) / (zc[i] - zc[i - 1])
                c[i, j, 1] = 1.0 - g
                c[i, j, 2] = g


@kernel
def face_temperatures(t, c, g, inflow_first, inflow_last, mz, tz, tr):
    """Convected temperatures of axial faces tz (nz + 1, nr) and radial faces tr (nz, nr + 1).

    A weight of a cell outside the grid counts for what enters through that plane.

    g                         : (nr + 1,) weight of the outer cell at a radial face
    inflow_first, inflow_last : (nr,) temperatures with which fluid enters through the first and the last plane
    """
    nz, nr = t.shape
    for i in range(nz + 1):
        for j in range(nr):
            s = 0.0
            for k in range(4):
                if c[i, j, k] != 0.0:
                    cell = i - 2 + k
                    if cell < 0:
                        s += c[i, j, k] * inflow_first[j]
                    elif cell >= nz:
                        s += c[i, j, k] * inflow_last[j]
                    else:
                        s += c[i, j, k] * t[cell, j]
            tz[i, j] = s
    for j in range(nr):
        if mz[0, j] > 0.0:
            tz[0, j] = inflow_first[j]
        if mz[nz, j] < 0.0:
            tz[nz, j] = inflow_last[j]
    for i in range(nz):
        tr[i, 0] = t[i, 0]
        tr[i, nr] = t[i, nr - 1]
        for j in range(1, nr):
            tr[i, j] = t[i, j - 1] + g[j] * (t[i, j] - t[i, j - 1])


@kernel
def conducted(t, rise_in, rise_out, gz, gr, qz, qr):
    """Heat conducted towards rising z and r through inner faces [W]: qz (nz + 1, nr), qr (nz, nr + 1).

    rise_in, rise_out : (nz, nr) [K] what a uniform source adds to the node temperature seen from the inner and the
                        outer face
    """
    nz, nr = t.shape
    qz[0] = 0.0
    qz[nz] = 0.0
    for i in range(1, nz):
        for j in range(nr):
            qz[i, j] = gz[i, j] * (t[i - 1, j] - t[i, j])
    for i in range(nz):
        qr[i, 0] = 0.0
        qr[i, nr] = 0.0
        for j in range(1, nr):
            qr[i, j] = gr[i, j] * (t[i, j - 1] + rise_out[i, j - 1] - t[i, j] - rise_in[i, j])


@kernel
def balance(hz, hr, qz, qr, gain, r):
    """Residual of each cell [W]: gain minus the net outflow of enthalpy (hz, hr) and conducted heat (qz, qr)."""
    nz, nr = r.shape
    for i in range(nz):
        for j in range(nr):
            r[i, j] = (
                gain[i, j]
                + (hz[i, j] - hz[i + 1, j])
                + (qz[i, j] - qz[i + 1, j])
                + (hr[i, j] - hr[i, j + 1])
                + (qr[i, j] - qr[i, j + 1])
            )


@kernel
def stencil(gz, gr, wz, wr, c, g, loss, empty, links):
    """Derivative of (net outflow - gain) by T, links (7, nz, nr): by the own cell, and by those at i - 2, i - 1, i + 1,
    i + 2, j - 1, j + 1.

    wz, wr : m cp at faces [W/K], (nz + 1, nr) and (nz, nr + 1)
    loss   : (nz, nr) [W/K] conductance to the outside and the end conditions
    empty  : (nz, nr) cells without an equation, which keep T = 0
    """
    nz, nr = loss.shape
    for i in range(nz):
        for j in range(nr):
            if empty[i, j]:
                for k in range(7):
                    links[k, i, j] = 0.0
                links[0, i, j] = 1.0
                continue
            west, east = wz[i, j], wz[i + 1, j]
            own = gz[i, j] + gz[i + 1, j] + gr[i, j] + gr[i, j + 1] + loss[i, j]
            own += east * c[i + 1, j, 1] - west * c[i, j, 2]
            inner, outer = -gr[i, j], -gr[i, j + 1]
            if j > 0:
                inner -= wr[i, j] * (1.0 - g[j])
                own -= wr[i, j] * g[j]
            if j < nr - 1:
                own += wr[i, j + 1] * (1.0 - g[j + 1])
                outer += wr[i, j + 1] * g[j + 1]
            links[0, i, j] = own
            # weights of cells outside the grid belong to what enters, which is given
            links[1, i, j] = -west * c[i, j, 0] if i > 1 else 0.0
            links[2, i, j] = east * c[i + 1, j, 0] - west * c[i, j, 1] - gz[i, j] if i > 0 else 0.0
            links[3, i, j] = east * c[i + 1, j, 2] - west * c[i, j, 3] - gz[i + 1, j] if i < nz - 1 else 0.0
            links[4, i, j] = east * c[i + 1, j, 3] if i < nz - 2 else 0.0
            links[5, i, j] = inner
            links[6, i, j] = outer


@kernel
def apply(links, x, y):
    """y = A x with the links of `stencil`; x, y (nz, nr)."""
    nz, nr = x.shape
    for i in range(nz):
        for j in range(nr):
            y[i, j] = links[0, i, j] * x[i, j]
        for j in range(1, nr):
            y[i, j] += links[5, i, j] * x[i, j - 1]
        for j in range(nr - 1):
            y[i, j] += links[6, i, j] * x[i, j + 1]
        for k, a in ((1, i - 2), (2, i - 1), (3, i + 1), (4, i + 2)):
            if 0 <= a < nz:
                for j in range(nr):
                    y[i, j] += links[k, i, j] * x[a, j]
