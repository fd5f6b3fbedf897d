"""Momentum equations of one stream on the staggered grid.

    d(rho u u)/dz + (1/r) d(r rho v u)/dr = -dp/dz + d(2 mu du/dz)/dz + (1/r) d(r mu (du/dr + dv/dz))/dr
    d(rho u v)/dz + (1/r) d(r rho v v)/dr = -dp/dr + d(mu (dv/dz + du/dr))/dz + (1/r) d(2 r mu dv/dr)/dr - 2 mu v / r^2

integrated over the control volume of each velocity: u (nz + 1, nr) on axial faces, v (nz, nr + 1) on radial faces,
p (nz, nr) in cells. The stream always runs towards +z here; a stream along -z is mirrored by its caller.

Convection: upwind in the coefficients, corrected to Fromm's scheme along z (half central, half linear upwind) and to
central differences along r by `explicit_terms`, which also holds the cross terms of the stress. Coefficients are in
advective form (a_P = sum of neighbours), equal to the conservative one where continuity holds.
Inlet plane: u given, v = 0. Outlet plane: no viscous normal stress, dv/dz = 0, p = 0 (pressure in motion).
"""

from typing import NamedTuple

import numpy as np

from axicfd.kernels._jit import kernel

# columns of a line's coefficients
P, N, S, W, E, R = 0, 1, 2, 3, 4, 5


class FlowMesh(NamedTuple):
    """Geometry of one stream's segment of the grid. `open_*` are 1 where the unknown is solved, 0 where it is
    blocked.
    """

    nz: int
    nr: int
    z: np.ndarray  # (nz + 1,) axial faces
    r: np.ndarray  # (nr + 1,) radial faces
    dz: np.ndarray  # (nz,)
    dzu: np.ndarray  # (nz + 1,) length of the control volume of u
    area: np.ndarray  # (nr,) axial face areas
    ring: np.ndarray  # (nr + 1,) 2 pi r of radial faces
    gr: np.ndarray  # (nr + 1,) weight of the outer cell at a radial face
    gz: np.ndarray  # (nz + 1,) weight of the downstream cell at an axial face
    du_up: np.ndarray  # (nz,) dz[c] / dz[c - 1]: slope ratio of linear upwind extrapolation of u, running +z
    du_down: np.ndarray  # (nz,) dz[c] / dz[c + 1]: the same, running -z
    dv_up: np.ndarray  # (nz + 1,) the same for v at axial faces
    dv_down: np.ndarray  # (nz + 1,)
    area_v: np.ndarray  # (nr + 1,) area of the axial faces of the control volume of v
    drc: np.ndarray  # (nr + 1,) distance of the cell nodes beside a radial face
    gu_z: np.ndarray  # (nz, nr) area / dz: axial diffusion of u through cells
    gu_r: np.ndarray  # (nz + 1, nr + 1) radial diffusion of u through corners
    gv_z: np.ndarray  # (nz + 1, nr + 1) axial diffusion of v through corners
    gv_r: np.ndarray  # (nz, nr) radial diffusion of v through cells
    hoop: np.ndarray  # (nz, nr + 1) volume of the control volume of v over r^2
    open_u: np.ndarray  # (nz + 1, nr)
    open_v: np.ndarray  # (nz, nr + 1)
    open_p: np.ndarray  # (nz, nr)


class Viscosity(NamedTuple):
    """Dynamic viscosity where stresses live [Pa s]."""

    cell: np.ndarray  # (nz, nr)
    corner: np.ndarray  # (nz + 1, nr + 1)
    radial_face: np.ndarray  # (nz, nr + 1)


@kernel
def mass_fluxes(m, rho, u, v, mz, mr):
    """Mass flow through axial faces mz (nz + 1, nr) and radial faces mr (nz, nr + 1) [kg/s]."""
    for i in range(m.nz + 1):
        for j in range(m.nr):
            mz[i, j] = rho * u[i, j] * m.area[j]
    for i in range(m.nz):
        for j in range(m.nr + 1):
            mr[i, j] = rho * v[i, j] * m.ring[j] * m.dz[i]


@kernel
def explicit_terms(m, mu, u, v, mz, mr, fu, fv, su, sv):
    """What is not in the coefficients: second-order convection minus upwind, the cross terms of the stress, and given
    sources fu, fv.

    su (nz + 1, nr), sv (nz, nr + 1) [N], to be added to the right-hand side.
    """
    nz, nr = m.nz, m.nr
    before = np.zeros(nr + 1)
    # u along z: faces are cell centres c, between u[c] and u[c + 1]
    for c in range(nz):
        inner_up = c >= 1
        inner_down = c + 1 < nz
        up = 0.5 * m.du_up[c] if inner_up else 0.0
        central_up = 0.5 if inner_up else 1.0
        down = 0.5 * m.du_down[c] if inner_down else 0.0
        central_down = 0.5 if inner_down else 1.0
        cu = c - 1 if inner_up else 0
        cd = c + 2 if inner_down else nz
        for j in range(nr):
            flow = 0.5 * (mz[c, j] + mz[c + 1, j])
            a, b = u[c, j], u[c + 1, j]
            if flow >= 0.0:
                extra = 0.5 * flow * (central_up * (b - a) + up * (a - u[cu, j]))
            else:
                extra = 0.5 * flow * (central_down * (a - b) + down * (b - u[cd, j]))
            su[c, j] = fu[c, j] + before[j] - extra
            before[j] = extra
    for j in range(nr):
        su[nz, j] = fu[nz, j] + before[j]
    # u along r, and the stress mu dv/dz on the same faces
    for i in range(1, nz + 1):
        west, east = i - 1, min(i, nz - 1)
        half_w, half_e = 0.5, 0.5 if i < nz else 0.0
        flux = 0.0
        for j in range(nr):
            su[i, j] += flux
            flux = 0.0
            if j < nr - 1:
                flow = half_w * mr[west, j + 1] + half_e * mr[east, j + 1]
                slope = u[i, j + 1] - u[i, j]
                g = m.gr[j + 1]
                flux = flow * (g if flow >= 0.0 else g - 1.0) * slope
                if i < nz:
                    flux -= m.ring[j + 1] * mu.corner[i, j + 1] * (v[i, j + 1] - v[i - 1, j + 1])
            su[i, j] -= flux
    # v along z, and the stress mu du/dr on the same faces
    for j in range(nr + 1):
        before[j] = 0.0
    for i in range(nz + 1):
        inner_up = i >= 2
        inner_down = i < nz - 1
        up = m.dv_up[i] if inner_up else 0.0
        central_up = m.gz[i] * (0.5 if inner_up else 1.0)
        down = m.dv_down[i] if inner_down else 0.0
        central_down = (1.0 - m.gz[i]) * (0.5 if inner_down else 1.0)
        iu = i - 2 if inner_up else 0
        idn = i + 1 if inner_down else nz - 1
        for j in range(1, nr):
            extra = -m.area_v[j] / m.drc[j] * mu.corner[i, j] * (u[i, j] - u[i, j - 1])
            if 0 < i < nz:
                flow = 0.5 * (mz[i, j - 1] + mz[i, j])
                a, b = v[i - 1, j], v[i, j]
                if flow >= 0.0:
                    extra += flow * (central_up * (b - a) + 0.5 * up * (a - v[iu, j]))
                else:
                    extra += flow * (central_down * (a - b) + 0.5 * down * (b - v[idn, j]))
            if i > 0:
                sv[i - 1, j] = fv[i - 1, j] + before[j] - extra
            before[j] = extra
    # v along r: faces are cells j - 1 and j
    for i in range(nz):
        sv[i, 0] = 0.0
        sv[i, nr] = 0.0
        for j in range(1, nr):
            inner = 0.5 * (mr[i, j - 1] + mr[i, j])
            outer = 0.5 * (mr[i, j] + mr[i, j + 1])
            sv[i, j] += 0.5 * abs(inner) * (v[i, j] - v[i, j - 1]) - 0.5 * abs(outer) * (v[i, j + 1] - v[i, j])


@kernel
def u_line(m, mu, u, p, mz, mr, su, i, k):
    """Coefficients and residual [N] of the u equations on axial face i (1 .. nz); k (nr + 1, 6)."""
    nz, nr = m.nz, m.nr
    last = i == nz
    east = nz - 1 if last else i
    here = 0.0 if last else 1.0
    for j in range(nr):
        open_ = m.open_u[i, j]
        west_flow = 0.5 * (mz[i - 1, j] + mz[i, j])
        a_w = 2.0 * mu.cell[i - 1, j] * m.gu_z[i - 1, j] + max(west_flow, 0.0)
        a_e = 0.0
        east_term = 0.0
        if not last:
            east_flow = 0.5 * (mz[i, j] + mz[i + 1, j])
            a_e = 2.0 * mu.cell[i, j] * m.gu_z[i, j] + max(-east_flow, 0.0)
            east_term = a_e * (u[i + 1, j] - u[i, j])
        inner = 0.5 * (mr[i - 1, j] + here * mr[east, j])
        outer = 0.5 * (mr[i - 1, j + 1] + here * mr[east, j + 1])
        a_s = mu.corner[i, j] * m.gu_r[i, j]
        a_n = mu.corner[i, j + 1] * m.gu_r[i, j + 1]
        u_s = 0.0
        u_n = 0.0
        if j > 0:
            a_s += max(inner, 0.0)
            u_s = u[i, j - 1]
        if j < nr - 1:
            a_n += max(-outer, 0.0)
            u_n = u[i, j + 1]
        push = (p[i - 1, j] - here * p[east, j]) * m.area[j]
        k[j, R] = open_ * (
            east_term + a_w * (u[i - 1, j] - u[i, j]) + a_n * (u_n - u[i, j]) + a_s * (u_s - u[i, j]) + push + su[i, j]
        )
        k[j, P] = open_ * (a_w + a_e + a_n + a_s) + (1.0 - open_)
        k[j, N] = open_ * a_n if j < nr - 1 else 0.0
        k[j, S] = open_ * a_s if j > 0 else 0.0
        k[j, W] = open_ * a_w
        k[j, E] = open_ * a_e


@kernel
def v_line(m, mu, v, p, mz, mr, sv, i, k):
    """Coefficients and residual [N] of the v equations of station i at faces 1 .. nr - 1; k (nr + 1, 6)."""
    nz, nr = m.nz, m.nr
    for j in range(1, nr):
        open_ = m.open_v[i, j]
        inner = 0.5 * (mr[i, j - 1] + mr[i, j])
        outer = 0.5 * (mr[i, j] + mr[i, j + 1])
        a_n = 2.0 * mu.cell[i, j] * m.gv_r[i, j] + max(-outer, 0.0)
        a_s = 2.0 * mu.cell[i, j - 1] * m.gv_r[i, j - 1] + max(inner, 0.0)
        hoop = 2.0 * mu.radial_face[i, j] * m.hoop[i, j]
        a_w = mu.corner[i, j] * m.gv_z[i, j] + max(0.5 * (mz[i, j - 1] + mz[i, j]), 0.0)
        v_w = v[i - 1, j] if i > 0 else 0.0
        a_e = 0.0
        v_e = 0.0
        if i < nz - 1:
            a_e = mu.corner[i + 1, j] * m.gv_z[i + 1, j] + max(-0.5 * (mz[i + 1, j - 1] + mz[i + 1, j]), 0.0)
            v_e = v[i + 1, j]
        a_p = a_e + a_w + a_n + a_s
        push = (p[i, j - 1] - p[i, j]) * m.ring[j] * m.dz[i]
        k[j, R] = open_ * (
            a_e * (v_e - v[i, j])
            + a_w * (v_w - v[i, j])
            + a_n * (v[i, j + 1] - v[i, j])
            + a_s * (v[i, j - 1] - v[i, j])
            - hoop * v[i, j]
            + push
            + sv[i, j]
        )
        k[j, P] = open_ * (a_p + hoop) + (1.0 - open_)
        k[j, N] = open_ * a_n if j < nr - 1 else 0.0
        k[j, S] = open_ * a_s if j > 1 else 0.0
        k[j, W] = open_ * a_w
        k[j, E] = open_ * a_e


@kernel
def residuals(m, mu, u, v, p, mz, mr, su, sv, ru, rv):
    """Residuals of both momentum equations, ru (nz + 1, nr), rv (nz, nr + 1) [N], with su, sv from `explicit_terms`."""
    k = np.zeros((m.nr + 1, 6))
    for j in range(m.nr):
        ru[0, j] = 0.0
    for i in range(1, m.nz + 1):
        u_line(m, mu, u, p, mz, mr, su, i, k)
        for j in range(m.nr):
            ru[i, j] = k[j, R]
    for i in range(m.nz):
        v_line(m, mu, v, p, mz, mr, sv, i, k)
        rv[i, 0] = 0.0
        rv[i, m.nr] = 0.0
        for j in range(1, m.nr):
            rv[i, j] = k[j, R]


@kernel
def predict(m, mu, u, v, p, mz, mr, su, sv, relax, consistent, du, dv):
    """One sweep of implicit radial lines downstream over u, then v, with implicit under-relaxation.

    relax      : under-relaxation of the momentum equations, 0 < relax < 1
    consistent : 1 for SIMPLEC (Van Doormaal & Raithby 1984), 0 for SIMPLE (Patankar & Spalding 1972)
    du, dv     : velocity change per unit of pressure-correction difference [m/(s Pa)], written
    """
    nz, nr = m.nz, m.nr
    k = np.zeros((nr + 1, 6))
    x = np.zeros(nr + 1)
    c = np.zeros(nr + 1)
    for i in range(1, nz + 1):
        u_line(m, mu, u, p, mz, mr, su, i, k)
        for j in range(nr):
            a_p = k[j, P] / relax
            du[i, j] = m.open_u[i, j] * m.area[j] / (a_p - consistent * k[j, P])
            if j > 0:
                f = 1.0 / (a_p - k[j, S] * c[j - 1])
                x[j] = (k[j, R] + k[j, S] * x[j - 1]) * f
            else:
                f = 1.0 / a_p
                x[j] = k[j, R] * f
            c[j] = k[j, N] * f
        u[i, nr - 1] += x[nr - 1]
        for j in range(nr - 2, -1, -1):
            x[j] += c[j] * x[j + 1]
            u[i, j] += x[j]
    for i in range(nz):
        v_line(m, mu, v, p, mz, mr, sv, i, k)
        for j in range(1, nr):
            a_p = k[j, P] / relax
            dv[i, j] = m.open_v[i, j] * m.ring[j] * m.dz[i] / (a_p - consistent * k[j, P])
            if j > 1:
                f = 1.0 / (a_p - k[j, S] * c[j - 1])
                x[j] = (k[j, R] + k[j, S] * x[j - 1]) * f
            else:
                f = 1.0 / a_p
                x[j] = k[j, R] * f
            c[j] = k[j, N] * f
        if nr > 1:
            v[i, nr - 1] += x[nr - 1]
        for j in range(nr - 2, 0, -1):
            x[j] += c[j] * x[j + 1]
            v[i, j] += x[j]


@kernel
def dissipation(m, mu, u, v, phi):
    """Viscous heat of each cell [W], phi (nz, nr): the stresses of the momentum equations times their strain rates.

    Phi = 2 mu ((du/dz)^2 + (dv/dr)^2 + (v/r)^2) + mu (du/dr + dv/dz)^2. Shear lives at corners, v/r at radial faces;
    the cells around where the stream flows share them equally.
    """
    nz, nr = m.nz, m.nr
    for i in range(nz):
        for j in range(nr):
            du = u[i + 1, j] - u[i, j]
            dv = v[i, j + 1] - v[i, j]
            phi[i, j] = 2.0 * mu.cell[i, j] * (m.gu_z[i, j] * du * du + m.gv_r[i, j] * dv * dv)
            for f in range(j, j + 2):
                phi[i, j] += mu.radial_face[i, f] * m.hoop[i, f] * v[i, f] * v[i, f]
    for i in range(nz + 1):
        first, last = max(i - 1, 0), min(i, nz - 1)
        for f in range(nr + 1):
            inner, outer = max(f - 1, 0), min(f, nr - 1)
            du = (u[i, f] if f < nr else 0.0) - (u[i, f - 1] if f > 0 else 0.0)
            dv = 0.0
            if i < nz:
                dv = v[i, f] - (v[i - 1, f] if i > 0 else 0.0)
            heat = mu.corner[i, f] * (m.gu_r[i, f] * du * du + 2.0 * m.ring[f] * du * dv + m.gv_z[i, f] * dv * dv)
            around = 0.0
            for a in range(first, last + 1):
                for b in range(inner, outer + 1):
                    around += m.open_p[a, b]
            if around == 0.0:
                continue
            for a in range(first, last + 1):
                for b in range(inner, outer + 1):
                    phi[a, b] += heat * m.open_p[a, b] / around
