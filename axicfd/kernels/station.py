"""Momentum and continuity of one station solved together: the coupled smoother of the flow's multigrid.

At station i the unknowns of every ring j are the changes of u on both faces of the station (east i + 1 and west
i), of v on the ring's outer face and of p: a block-tridiagonal system in r with blocks of four, eliminated by hand.
Stations are visited downstream. After each one all pressures further downstream are shifted by one value that makes
the section's mass flow exact, which takes pressure levels over any length in one sweep.

Second-order convection along z and the cross stresses stay frozen during a sweep (`momentum.explicit_terms`): live, the
march would be unstable.
"""

import numpy as np

from axicfd.kernels._jit import kernel
from axicfd.kernels.momentum import E, N, P, R, S, W, explicit_terms, mass_fluxes, u_line, v_line

WEST_HOLD = 0.3  # share of the upstream coefficient added to the diagonal: 13 cycles become 8


@kernel
def sweep(m, mu, rho, u, v, p, mz, mr, su, sv, fc):
    """One downstream sweep; u, v, p and the mass fluxes mz, mr are changed in place.

    su, sv : explicit terms of both momentum equations [N]      fc : mass source of each cell [kg/s]
    """
    nz, nr = m.nz, m.nr
    ka = np.zeros((nr + 1, 6))
    kb = np.zeros((nr + 1, 6))
    kc = np.zeros((nr + 1, 6))
    # what is kept of each ring for the way back: responses to U, W, and (V, P) of the next ring, to the residual,
    # to the shift
    x = np.empty((nr, 20))
    inflow = 0.0
    for j in range(nr):
        inflow += mz[0, j]
    shift = 0.0
    for i in range(nz):
        first = i == 0
        u_line(m, mu, u, p, mz, mr, su, i + 1, ka)
        if not first:
            # pressures from here on carry the shift that is not yet added to them
            for j in range(nr):
                p[i, j] += shift
            u_line(m, mu, u, p, mz, mr, su, i, kb)
            for j in range(nr):
                p[i, j] -= shift
        v_line(m, mu, v, p, mz, mr, sv, i, kc)
        west = 0.0 if first else 1.0
        # responses of the previous ring to the next one's U, W, V, P (columns), and its y and z
        au = aw = av = ap = 0.0
        bu = bw = bv = bp = 0.0
        cu = cw = cv = cp = 0.0
        du = dw = dv = 0.0
        yu = yw = yv = yp = 0.0
        zu = zw = zv = zp = 0.0
        for j in range(nr):
            inflow += fc[i, j] * m.open_p[i, j]
            area = m.area[j]
            ring_n, ring_s = m.ring[j + 1] * m.dz[i], m.ring[j] * m.dz[i]
            open_p = m.open_p[i, j]
            open_e, open_w = m.open_u[i + 1, j], west * m.open_u[i, j]
            open_n = m.open_v[i, j + 1] if j < nr - 1 else 0.0
            lower_a, lower_b, lower_c = -ka[j, S], -west * kb[j, S], -kc[j + 1, S]
            lower_d = -rho * ring_s * open_p
            diagonal_b = kb[j, P] + WEST_HOLD * kb[j, W] if not first else 1.0
            diagonal_c = kc[j + 1, P] + WEST_HOLD * kc[j + 1, W] if j < nr - 1 else 1.0
            # rows: u east, u west, v, continuity; columns: U, W, V, P
            p00 = ka[j, P] + WEST_HOLD * ka[j, W] - lower_a * au
            p01 = -ka[j, W] * open_w - lower_a * bu
            q00 = -lower_a * cu
            q01 = -area * open_e - lower_a * du
            p10 = -west * kb[j, E] * open_e - lower_b * aw
            p11 = diagonal_b - lower_b * bw
            q10 = -lower_b * cw
            q11 = area * open_w - lower_b * dw
            r00 = -lower_c * av
            r01 = -lower_c * bv
            s00 = diagonal_c - lower_c * cv
            s01 = -ring_n * open_n - lower_c * dv
            r10 = rho * area * open_p - lower_d * av
            r11 = -rho * area * open_p - lower_d * bv
            s10 = rho * ring_n * open_p - lower_d * cv
            s11 = 1.0 - open_p - lower_d * dv
            f0 = ka[j, R] - lower_a * yu
            f1 = (west * kb[j, R]) - lower_b * yw
            f2 = (kc[j + 1, R] if j < nr - 1 else 0.0) - lower_c * yv
            f3 = open_p * (fc[i, j] + mz[i, j] - mz[i + 1, j] + mr[i, j] - mr[i, j + 1]) - lower_d * yv
            h0 = -area * open_e - lower_a * zu
            h1 = -lower_b * zw
            h2 = -lower_c * zv
            h3 = -lower_d * zv
            # inverse of [P Q; R S] by 2 x 2 blocks
            t = 1.0 / (p00 * p11 - p01 * p10)
            i00, i01, i10, i11 = p11 * t, -p01 * t, -p10 * t, p00 * t
            e00, e01 = r00 * i00 + r01 * i10, r00 * i01 + r01 * i11
            e10, e11 = r10 * i00 + r11 * i10, r10 * i01 + r11 * i11
            t00, t01 = i00 * q00 + i01 * q10, i00 * q01 + i01 * q11
            t10, t11 = i10 * q00 + i11 * q10, i10 * q01 + i11 * q11
            n00, n01 = s00 - e00 * q00 - e01 * q10, s01 - e00 * q01 - e01 * q11
            n10, n11 = s10 - e10 * q00 - e11 * q10, s11 - e10 * q01 - e11 * q11
            t = 1.0 / (n00 * n11 - n01 * n10)
            n00, n01, n10, n11 = n11 * t, -n01 * t, -n10 * t, n00 * t
            # responses: to U of the next ring (through row 0), to W (row 1), to V and P (row 2)
            upper = -ka[j, N]
            av = -(n00 * e00 + n01 * e10)
            ap = -(n10 * e00 + n11 * e10)
            au = (i00 - t00 * av - t01 * ap) * upper
            aw = (i10 - t10 * av - t11 * ap) * upper
            av *= upper
            ap *= upper
            upper = -west * kb[j, N]
            bv = -(n00 * e01 + n01 * e11)
            bp = -(n10 * e01 + n11 * e11)
            bu = (i01 - t00 * bv - t01 * bp) * upper
            bw = (i11 - t10 * bv - t11 * bp) * upper
            bv *= upper
            bp *= upper
            cv, cp = n00, n10
            cu, cw = -(t00 * cv + t01 * cp), -(t10 * cv + t11 * cp)
            g2, g3 = f2 - e00 * f0 - e01 * f1, f3 - e10 * f0 - e11 * f1
            yv, yp = n00 * g2 + n01 * g3, n10 * g2 + n11 * g3
            yu = i00 * f0 + i01 * f1 - t00 * yv - t01 * yp
            yw = i10 * f0 + i11 * f1 - t10 * yv - t11 * yp
            g2, g3 = h2 - e00 * h0 - e01 * h1, h3 - e10 * h0 - e11 * h1
            zv, zp = n00 * g2 + n01 * g3, n10 * g2 + n11 * g3
            zu = i00 * h0 + i01 * h1 - t00 * zv - t01 * zp
            zw = i10 * h0 + i11 * h1 - t10 * zv - t11 * zp
            x[j, 0], x[j, 1], x[j, 2], x[j, 3] = au, aw, av, ap
            x[j, 4], x[j, 5], x[j, 6], x[j, 7] = bu, bw, bv, bp
            x[j, 8], x[j, 9], x[j, 10], x[j, 11] = cu, cw, cv, cp
            x[j, 12], x[j, 13], x[j, 14], x[j, 15] = yu, yw, yv, yp
            x[j, 16], x[j, 17], x[j, 18], x[j, 19] = zu, zw, zv, zp
            to_v, to_p = -kc[j + 1, N], ring_n * open_n
            du, dw, dv = cu * to_p, cw * to_p, cv * to_p
            cu, cw, cv, cp = cu * to_v, cw * to_v, cv * to_v, cp * to_v
        for j in range(nr - 2, -1, -1):
            to_v, to_p = -kc[j + 1, N], m.ring[j + 1] * m.dz[i] * m.open_v[i, j + 1]
            y, z = x[j], x[j + 1]
            a, b, c = z[12], z[13], to_v * z[14] + to_p * z[15]
            y[12] -= y[0] * a + y[4] * b + y[8] * c
            y[13] -= y[1] * a + y[5] * b + y[9] * c
            y[14] -= y[2] * a + y[6] * b + y[10] * c
            y[15] -= y[3] * a + y[7] * b + y[11] * c
            a, b, c = z[16], z[17], to_v * z[18] + to_p * z[19]
            y[16] -= y[0] * a + y[4] * b + y[8] * c
            y[17] -= y[1] * a + y[5] * b + y[9] * c
            y[18] -= y[2] * a + y[6] * b + y[10] * c
            y[19] -= y[3] * a + y[7] * b + y[11] * c
        more = 0.0
        if not first:
            have, gain = 0.0, 0.0
            for j in range(nr):
                have += mz[i + 1, j] + rho * m.area[j] * x[j, 12]
                gain += rho * m.area[j] * x[j, 16]
            more = (inflow - have) / gain
        for j in range(nr):
            u[i + 1, j] += x[j, 12] + more * x[j, 16]
            mz[i + 1, j] = rho * u[i + 1, j] * m.area[j]
            if not first:
                u[i, j] += x[j, 13] + more * x[j, 17]
                mz[i, j] = rho * u[i, j] * m.area[j]
            if j < nr - 1:
                v[i, j + 1] += x[j, 14] + more * x[j, 18]
                mr[i, j + 1] = rho * v[i, j + 1] * m.ring[j + 1] * m.dz[i]
            p[i, j] += shift + x[j, 15] + more * x[j, 19]
        shift += more
    for i in range(nz):
        for j in range(nr):
            p[i, j] -= shift * m.open_p[i, j]


@kernel
def smooth(m, mu, rho, u, v, p, mz, mr, fu, fv, fc, su, sv, old_u, old_v, old_p, share, times):
    """Sweeps with refreshed explicit terms and mass fluxes, of each of which only a share of the change is taken.

    One call for all of it: handing over the mesh costs as much as a sweep over a few hundred cells.
    fu, fv [N], fc [kg/s] : given sources        old_u, old_v, old_p : work space of the shapes of u, v, p
    """
    for _ in range(times):
        keep(u, old_u)
        keep(v, old_v)
        keep(p, old_p)
        explicit_terms(m, mu, u, v, mz, mr, fu, fv, su, sv)
        sweep(m, mu, rho, u, v, p, mz, mr, su, sv, fc)
        damp(u, old_u, share)
        damp(v, old_v, share)
        damp(p, old_p, share)
        mass_fluxes(m, rho, u, v, mz, mr)


@kernel
def keep(field, old):
    """Copy a field to `old`, both (n, m).

    One array assigned to another as a whole takes four seconds to compile: it may fail, with a formatted message.
    """
    for i in range(field.shape[0]):
        for j in range(field.shape[1]):
            old[i, j] = field[i, j]


@kernel
def damp(field, old, share):
    """Keep only a share of the change of a field from `old`; both of one shape (n, m)."""
    for i in range(field.shape[0]):
        for j in range(field.shape[1]):
            field[i, j] = old[i, j] + share * (field[i, j] - old[i, j])
