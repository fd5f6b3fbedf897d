"""Momentum and continuity of one stream, slow and plain: loops over control volumes, from the equations.

    d(rho u u)/dz + (1/r) d(r rho v u)/dr = -dp/dz + d(2 mu du/dz)/dz + (1/r) d(r mu (du/dr + dv/dz))/dr
    d(rho u v)/dz + (1/r) d(r rho v v)/dr = -dp/dr + d(mu (dv/dz + du/dr))/dz + (1/r) d(2 r mu dv/dr)/dr
                                            - 2 mu v / r^2

Each is integrated over the control volume of its velocity. What a control volume loses by convection is
counted as sum of m (phi_face - phi_here): the advective form, the same as the conservative one where mass is
conserved. It judges the kernels, so it shares nothing with them.
"""

from math import pi

import numpy as np


class PlainFlow:
    """Fields of one stream that runs towards +z.

    z (nz + 1,), r (nr + 1,)      : faces [m]
    fluid (nz, nr)                : 1 where the stream flows, 0 in blocked cells
    rho                           : density [kg/m3]
    u (nz + 1, nr), v (nz, nr + 1): velocities [m/s] on axial and radial faces
    p (nz, nr)                    : pressure in motion [Pa], zero in the outlet plane
    mu_cell (nz, nr), mu_corner (nz + 1, nr + 1), mu_face (nz, nr + 1): viscosity [Pa s] in cells, at corners
                                    and on radial faces
    """

    def __init__(self, z, r, fluid, rho, u, v, p, mu_cell, mu_corner, mu_face):
        self.z, self.r, self.fluid, self.rho = z, r, fluid, rho
        self.u, self.v, self.p = u, v, p
        self.mu_cell, self.mu_corner, self.mu_face = mu_cell, mu_corner, mu_face
        self.nz, self.nr = len(z) - 1, len(r) - 1
        self.zc = [(z[i] + z[i + 1]) / 2 for i in range(self.nz)]
        self.rc = [(r[j] + r[j + 1]) / 2 for j in range(self.nr)]

    # ------------------------------------------------------------------ geometry and flows

    def is_fluid(self, i, j):
        return 0 <= i < self.nz and 0 <= j < self.nr and self.fluid[i, j] == 1

    def solves_u(self, i, j):
        """Whether axial face i >= 1 is open: fluid on both sides, or the outlet plane."""
        return self.is_fluid(i - 1, j) and (i == self.nz or self.is_fluid(i, j))

    def solves_v(self, i, j):
        return self.is_fluid(i, j - 1) and self.is_fluid(i, j)

    def ring(self, j):
        """Area of axial faces of ring j [m2]."""
        return pi * (self.r[j + 1] ** 2 - self.r[j] ** 2)

    def mass_z(self, i, j):
        """[kg/s]"""
        return self.rho * self.u[i, j] * self.ring(j)

    def mass_r(self, i, j):
        """[kg/s]"""
        return self.rho * self.v[i, j] * 2 * pi * self.r[j] * (self.z[i + 1] - self.z[i])

    # ------------------------------------------------------------------ stresses

    def du_dr(self, i, j):
        """At corner (i, j). Where one of the two velocities lies in solid, the wall with u = 0 is at r_j."""
        inside = self.is_fluid(i - 1, j - 1) or self.is_fluid(i, j - 1)
        outside = self.is_fluid(i - 1, j) or self.is_fluid(i, j)
        if j == 0 and self.r[0] == 0.0:
            return 0.0
        if not outside:
            return (0.0 - self.u[i, j - 1]) / (self.r[j] - self.rc[j - 1])
        if not inside:
            return (self.u[i, j] - 0.0) / (self.rc[j] - self.r[j])
        return (self.u[i, j] - self.u[i, j - 1]) / (self.rc[j] - self.rc[j - 1])

    def dv_dz(self, i, j):
        """At corner (i, j): v = 0 in the inlet plane and on walls, dv/dz = 0 in the outlet plane."""
        if i == self.nz or j == 0 or j == self.nr:
            return 0.0
        before = i > 0 and (self.is_fluid(i - 1, j - 1) or self.is_fluid(i - 1, j))
        after = self.is_fluid(i, j - 1) or self.is_fluid(i, j)
        if not after:
            return (0.0 - self.v[i - 1, j]) / (self.z[i] - self.zc[i - 1])
        if not before:
            return (self.v[i, j] - 0.0) / (self.zc[i] - self.z[i])
        return (self.v[i, j] - self.v[i - 1, j]) / (self.zc[i] - self.zc[i - 1])

    def shear(self, i, j):
        """tau_rz at corner (i, j) [Pa]."""
        return self.mu_corner[i, j] * (self.du_dr(i, j) + self.dv_dz(i, j))

    def du_dz(self, i, j):
        return (self.u[i + 1, j] - self.u[i, j]) / (self.z[i + 1] - self.z[i])

    def dv_dr(self, i, j):
        return (self.v[i, j + 1] - self.v[i, j]) / (self.r[j + 1] - self.r[j])

    # ------------------------------------------------------------------ residuals

    def u_residual(self, i, j):
        """[N] over the control volume around axial face i >= 1 (half a cell at the outlet plane)."""
        if not self.solves_u(i, j):
            return 0.0
        last = i == self.nz
        here = self.u[i, j]
        west = (self.mass_z(i - 1, j) + self.mass_z(i, j)) / 2
        u_west = self.fromm(west, self.zc[i - 1], [(self.z[n], self.u[n, j]) for n in range(self.nz + 1)], i - 1, i)
        lost = -west * (u_west - here)
        if not last:
            east = (self.mass_z(i, j) + self.mass_z(i + 1, j)) / 2
            u_east = self.fromm(east, self.zc[i], [(self.z[n], self.u[n, j]) for n in range(self.nz + 1)], i, i + 1)
            lost += east * (u_east - here)
        for f, sign in ((j, -1), (j + 1, 1)):
            if f in (0, self.nr):
                continue  # axis or wall: nothing crosses
            flow = self.mass_r(i - 1, f) / 2 + (0.0 if last else self.mass_r(i, f) / 2)
            share = (self.r[f] - self.rc[f - 1]) / (self.rc[f] - self.rc[f - 1])
            u_face = (1 - share) * self.u[i, f - 1] + share * self.u[i, f]
            lost += sign * flow * (u_face - here)
        area = self.ring(j)
        force = (self.p[i - 1, j] - (0.0 if last else self.p[i, j])) * area
        force -= 2 * self.mu_cell[i - 1, j] * self.du_dz(i - 1, j) * area
        if not last:  # no viscous normal stress in the outlet plane
            force += 2 * self.mu_cell[i, j] * self.du_dz(i, j) * area
        length = (self.z[i] if last else self.zc[i]) - self.zc[i - 1]
        for f, sign in ((j, -1), (j + 1, 1)):
            force += sign * self.shear(i, f) * 2 * pi * self.r[f] * length
        return force - lost

    def v_residual(self, i, j):
        """[N] over the control volume around radial face 0 < j < nr."""
        if not self.solves_v(i, j):
            return 0.0
        here = self.v[i, j]
        lost = 0.0
        points = [(self.zc[n], self.v[n, j]) for n in range(self.nz)]
        for f, sign in ((i, -1), (i + 1, 1)):
            flow = (self.mass_z(f, j - 1) + self.mass_z(f, j)) / 2
            if f == 0:
                v_face = 0.0 if flow > 0 else here  # enters without radial velocity
            elif f == self.nz:
                v_face = here  # dv/dz = 0
            else:
                v_face = self.fromm(flow, self.z[f], points, f - 1, f)
            lost += sign * flow * (v_face - here)
        for c, sign in ((j - 1, -1), (j, 1)):
            flow = (self.mass_r(i, c) + self.mass_r(i, c + 1)) / 2
            lost += sign * flow * ((self.v[i, c] + self.v[i, c + 1]) / 2 - here)
        dz = self.z[i + 1] - self.z[i]
        thickness = self.rc[j] - self.rc[j - 1]
        force = (self.p[i, j - 1] - self.p[i, j]) * 2 * pi * self.r[j] * dz
        area = (self.ring(j - 1) + self.ring(j)) / 2
        force += (self.shear(i + 1, j) - self.shear(i, j)) * area
        for c, sign in ((j - 1, -1), (j, 1)):
            force += sign * 2 * self.mu_cell[i, c] * self.dv_dr(i, c) * 2 * pi * self.rc[c] * dz
        hoop_stress = 2 * self.mu_face[i, j] * here / self.r[j]
        force -= hoop_stress / self.r[j] * 2 * pi * self.r[j] * thickness * dz
        return force - lost

    def mass_residual(self, i, j):
        """Net inflow of a cell [kg/s]."""
        if not self.is_fluid(i, j):
            return 0.0
        return self.mass_z(i, j) - self.mass_z(i + 1, j) + self.mass_r(i, j) - self.mass_r(i, j + 1)

    def residuals(self):
        """(ru, rv, rc) in the shapes of u, v and p."""
        ru, rv, rc = np.zeros_like(self.u), np.zeros_like(self.v), np.zeros_like(self.p)
        for i in range(1, self.nz + 1):
            for j in range(self.nr):
                ru[i, j] = self.u_residual(i, j)
        for i in range(self.nz):
            for j in range(1, self.nr):
                rv[i, j] = self.v_residual(i, j)
            for j in range(self.nr):
                rc[i, j] = self.mass_residual(i, j)
        return ru, rv, rc

    # ------------------------------------------------------------------ viscous heat

    def dissipation(self):
        """Viscous heat of the whole stream [W].

        2 mu (du_dz^2 + dv_dr^2 + (v/r)^2) + mu (du/dr + dv/dz)^2, each over the volumes where it lives.
        """
        total = 0.0
        for i in range(self.nz):
            dz = self.z[i + 1] - self.z[i]
            for j in range(self.nr):
                if self.is_fluid(i, j):
                    axial, radial = self.du_dz(i, j), self.dv_dr(i, j)
                    total += 2 * self.mu_cell[i, j] * axial**2 * self.ring(j) * dz
                    ring = 2 * pi * self.rc[j] * (self.r[j + 1] - self.r[j])
                    total += 2 * self.mu_cell[i, j] * radial**2 * ring * dz
            for j in range(1, self.nr):
                if self.solves_v(i, j):
                    around = self.v[i, j] / self.r[j]
                    ring = 2 * pi * self.r[j] * (self.rc[j] - self.rc[j - 1])
                    total += 2 * self.mu_face[i, j] * around**2 * ring * dz
        for i in range(self.nz + 1):
            for j in range(self.nr + 1):
                total += self.corner_heat(i, j)
        return total

    def corner_heat(self, i, j):
        """[W] of the shear stress in the volume around corner (i, j), between nearest nodes or the wall."""
        z = [self.zc[i - 1] if i > 0 else self.z[0], self.zc[i] if i < self.nz else self.z[-1]]
        r = [self.rc[j - 1] if j > 0 else self.r[0], self.rc[j] if j < self.nr else self.r[-1]]
        if not any(self.is_fluid(a, b) for a in (i - 1, i) for b in (j - 1, j)):
            return 0.0
        if not any(self.is_fluid(i, b) for b in (j - 1, j)):
            z[1] = self.z[i]
        if not any(self.is_fluid(i - 1, b) for b in (j - 1, j)):
            z[0] = self.z[i]
        if not any(self.is_fluid(a, j) for a in (i - 1, i)):
            r[1] = self.r[j]
        if not any(self.is_fluid(a, j - 1) for a in (i - 1, i)):
            r[0] = self.r[j]
        dz, dr = z[1] - z[0], r[1] - r[0]
        along = self.dv_dz(i, j)
        across = self.du_dr(i, j)
        # the ring around the corner, told by its radius for du/dr and by its half cells for dv/dz
        by_radius = 2 * pi * self.r[j] * dr * dz
        by_cells = sum(self.ring(b) / 2 for b in (j - 1, j) if 0 <= b < self.nr) * dz
        squares = across**2 * by_radius + 2 * across * along * by_radius + along**2 * by_cells
        return self.mu_corner[i, j] * squares

    # ------------------------------------------------------------------ the convection scheme along z

    @staticmethod
    def fromm(flow, x, points, before, after):
        """Half central interpolation, half linear extrapolation from upstream; central at the first face.

        points: (place, value) along z; x lies between number `before` and number `after`.
        """
        (x1, a), (x2, b) = points[before], points[after]
        central = a + (b - a) * (x - x1) / (x2 - x1)
        up, far = (before, before - 1) if flow >= 0 else (after, after + 1)
        if not 0 <= far < len(points):
            return central
        (xu, near), (xf, distant) = points[up], points[far]
        return (central + near + (near - distant) * (x - xu) / (xu - xf)) / 2
