"""The heat balance of every cell, slow and plain: loops over cells, written from the equations.

    sum over faces of [ m h(T_face) + conducted heat ]  =  sources + heat through the outside and the ends

Conduction between two nodes is a row of resistances: the rest of the one cell, a contact resistance, the
start of the other. Across a solid the rest is ln(r_2/r_1)/(2 pi k dz), in a stream
(r_2 - r_1)/(2 pi r_face k dz). A uniform source in a solid adds the exact particular solution -s r^2/(4 k).
It judges the kernels and the solver, so it shares nothing with them.
"""

from dataclasses import dataclass, field
from math import log, pi

import numpy as np

NOTHING, STREAM, SOLID = 0, 1, 2


@dataclass
class PlainEnergy:
    """One grid with its temperatures.

    z (nz + 1,), r (nr + 1,) : faces [m]
    kind (nz, nr)            : NOTHING, STREAM or SOLID
    t (nz, nr)               : temperatures [K]
    k_r, k_z                 : function of (cell, other cell or None) -> conductivity [W/(m K)] of `cell`
    contact (nz, nr + 1)     : [m2 K/W] at radial faces
    source (nz, nr)          : generated [W/m3];  extra (nz, nr): other heat, no shape within the cell [W]
    mz (nz + 1, nr), mr (nz, nr + 1) : mass flow [kg/s] towards rising z and r
    h                        : enthalpy [J/kg] of a temperature
    inflow_first, inflow_last: (nr,) [K] of fluid that enters through the first and last plane
    upwind                   : axial faces with linear upwind in place of Fromm's scheme
    capacity                 : [J/(kg K)] of the fluid: the first face behind an inlet takes the share of a central
                               difference that conduction bears, min(1, 2 k A / (dz m cp)), and for the rest
                               extrapolates from the plane; None takes the central difference alone
    flux, surroundings, film : (nz,) [W/m2], [K], [m2 K/W or None] of the outside
    outer                    : (nz,) number of the radial face that is the outer surface
    """

    z: np.ndarray
    r: np.ndarray
    kind: np.ndarray
    t: np.ndarray
    k_r: object
    k_z: object
    contact: np.ndarray
    source: np.ndarray
    extra: np.ndarray
    mz: np.ndarray
    mr: np.ndarray
    h: object
    inflow_first: np.ndarray
    inflow_last: np.ndarray
    upwind: set = field(default_factory=set)
    flux: object = None
    surroundings: object = None
    film: object = None
    outer: object = None
    capacity: object = None

    def __post_init__(self):
        self.nz, self.nr = len(self.z) - 1, len(self.r) - 1
        self.zc = [(self.z[i] + self.z[i + 1]) / 2 for i in range(self.nz)]
        self.rc = [(self.r[j] + self.r[j + 1]) / 2 for j in range(self.nr)]

    def dz(self, i):
        return self.z[i + 1] - self.z[i]

    def ring(self, j):
        return pi * (self.r[j + 1] ** 2 - self.r[j] ** 2)

    # ------------------------------------------------------------------ conduction

    def half_across(self, i, j, face, other):
        """[K/W] between the node of cell (i, j) and its radial face."""
        k = self.k_r((i, j), other)
        low, high = sorted((self.rc[j], self.r[face]))
        if self.kind[i, j] == SOLID:
            return log(high / low) / (2 * pi * k * self.dz(i))
        return (high - low) / (2 * pi * self.r[face] * k * self.dz(i))

    def rise(self, i, j, face):
        """[K] by which the source of a solid cell lifts its face over what node and face flux alone say."""
        if self.kind[i, j] != SOLID:
            return 0.0
        a, b = self.r[face], self.rc[j]
        # T = -s r^2/(4k) + C ln r + D with -k T' r = (flux at the face) a: difference to the pure logarithm
        s, k = self.source[i, j], self.k_r((i, j), None)
        log_part = 0.0 if a == 0.0 else a**2 / 2 * log(a / b)
        return s / k * (log_part - (a**2 - b**2) / 4)

    def across(self, i, f):
        """[W] conducted outward through radial face f between cells f - 1 and f."""
        if f in (0, self.nr) or NOTHING in (self.kind[i, f - 1], self.kind[i, f]):
            return 0.0
        inner = self.t[i, f - 1] + self.rise(i, f - 1, f)
        outer = self.t[i, f] + self.rise(i, f, f)
        resistance = self.half_across(i, f - 1, f, (i, f)) + self.half_across(i, f, f, (i, f - 1))
        resistance += self.contact[i, f] / (2 * pi * self.r[f] * self.dz(i))
        return (inner - outer) / resistance

    def along(self, f, j):
        """[W] conducted towards +z through axial face f."""
        if f in (0, self.nz) or NOTHING in (self.kind[f - 1, j], self.kind[f, j]):
            return 0.0
        k1, k2 = self.k_z((f - 1, j), (f, j)), self.k_z((f, j), (f - 1, j))
        if k1 == 0.0 or k2 == 0.0:
            return 0.0
        resistance = (self.dz(f - 1) / 2 / k1 + self.dz(f) / 2 / k2) / self.ring(j)
        return (self.t[f - 1, j] - self.t[f, j]) / resistance

    def from_outside(self, i):
        """[W] through the outer surface of station i."""
        j = self.outer[i] - 1
        if self.kind[i, j] == NOTHING:
            return 0.0
        area = 2 * pi * self.r[j + 1] * self.dz(i)
        heat = self.flux[i] * area
        if self.film[i] is None:
            return heat
        # heat = flux A + (surroundings - T_face) A / film  and  heat = (T_face - T*) / half
        film, half = self.film[i] / area, self.half_across(i, j, j + 1, None)
        node = self.t[i, j] + self.rise(i, j, j + 1)
        return (heat * film + self.surroundings[i] - node) / (film + half)

    # ------------------------------------------------------------------ convection

    def carried_along(self, f, j):
        """[W] of enthalpy through axial face f."""
        m = self.mz[f, j]
        if m == 0.0:
            return 0.0
        forward = m > 0.0
        up = f - 1 if forward else f
        if not 0 <= up < self.nz:
            return m * self.h((self.inflow_first if forward else self.inflow_last)[j])
        far, down = (up - 1, up + 1) if forward else (up + 1, up - 1)
        x, near = self.z[f], self.t[up, j]
        has_far, has_down = 0 <= far < self.nz, 0 <= down < self.nz
        if not has_far and not has_down:
            return m * self.h(near)
        if has_far:
            extrapolated = near + (near - self.t[far, j]) * (x - self.zc[up]) / (self.zc[up] - self.zc[far])
        if has_down:
            share = (x - self.zc[up]) / (self.zc[down] - self.zc[up])
            central = near + share * (self.t[down, j] - near)
            if not has_far and self.capacity is not None:
                per_kelvin = self.along(f, j) / (self.t[f - 1, j] - self.t[f, j])
                ratio = 2.0 * per_kelvin / (abs(m) * self.capacity)
                # m cp (T_plane - T_in) = k A (T - T_plane) / (dz / 2)
                entering = (self.inflow_first if forward else self.inflow_last)[j]
                at_plane = (entering + ratio * near) / (1.0 + ratio)
                slope = (near - at_plane) / (self.zc[up] - (self.z[0] if forward else self.z[-1]))
                borne = min(1.0, ratio)
                return m * self.h(borne * central + (1.0 - borne) * (near + slope * (x - self.zc[up])))
        if not has_down or (has_far and f in self.upwind):
            return m * self.h(extrapolated)
        return m * self.h((central + extrapolated) / 2 if has_far else central)

    def carried_across(self, i, f):
        """[W] of enthalpy through radial face f."""
        if f in (0, self.nr) or self.mr[i, f] == 0.0:
            return 0.0
        share = (self.r[f] - self.rc[f - 1]) / (self.rc[f] - self.rc[f - 1])
        return self.mr[i, f] * self.h((1 - share) * self.t[i, f - 1] + share * self.t[i, f])

    # ------------------------------------------------------------------ the balance

    def residual(self):
        """(nz, nr) [W] what each cell gains."""
        gain = np.zeros((self.nz, self.nr))
        for i in range(self.nz):
            for j in range(self.nr):
                if self.kind[i, j] == NOTHING:
                    continue
                gain[i, j] = self.source[i, j] * self.ring(j) * self.dz(i) + self.extra[i, j]
                gain[i, j] += self.along(i, j) - self.along(i + 1, j)
                gain[i, j] += self.across(i, j) - self.across(i, j + 1)
                gain[i, j] += self.carried_along(i, j) - self.carried_along(i + 1, j)
                gain[i, j] += self.carried_across(i, j) - self.carried_across(i, j + 1)
            if self.outer is not None:
                gain[i, self.outer[i] - 1] += self.from_outside(i)
        return gain
