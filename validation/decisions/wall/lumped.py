"""Wall and stream as one temperature each along z: an independent estimate of what the wall changes.

Independent computation, not published: finite differences of
    k_w A_w Tw'' = (Tw - Tf) / R_in - q' - (T_out - Tw) / R_out,    m cp Tf' = (Tw - Tf) / R_in + k_f A_f Tf''
with the developed Nusselt number 48/11 everywhere; nothing of the solver is used. Too low a coefficient near the start
of a heater makes its walls too hot by some tens of per cent, which a verdict bears where it is not close.
"""

import math
from dataclasses import dataclass

import numpy as np
from scipy.linalg import solve_banded

from axicfd.case.layout import PlacedSection, layout
from axicfd.case.model import Case
from axicfd.solver.boundary import mass_flow

NUSSELT = 48 / 11
CELLS = 6000


@dataclass(frozen=True)
class Lumped:
    """Hottest wall, outlet, largest of all [K above the inlet]; heat upstream of the heated part, into sections [W]."""

    hottest: float
    outlet: float
    upstream: float
    heat_in: dict[str, float]
    span: float


def solve(case: Case, radial: bool, axial: bool) -> Lumped:
    """With the wall's radial resistance or none, and with its conduction along z or none."""
    tube = layout(case)
    name = next(iter(case.stream))
    stream, fluid = case.stream[name], case.fluid_of(name)
    t_in, bore = stream.inlet_temperature, tube.bore_diameter
    k = float(fluid.conductivity(t_in))
    capacity = mass_flow(case, tube, name) * float(fluid.specific_heat(t_in))
    dz = tube.length / CELLS
    z = (np.arange(CELLS) + 0.5) * dz
    inner, outer, wall, heat, around = np.empty((5, CELLS))
    for section in tube.sections:
        here = (z >= section.z0) & (z < section.z1)
        to_bore, to_outside, conducts = _resistances(case, section, t_in)
        inner[here] = 1 / (math.pi * k * NUSSELT) + (to_bore if radial else 0.0)
        film, around[here] = _outside(section, t_in)
        outer[here] = film + (to_outside if radial else 0.0)
        wall[here] = conducts if axial else 0.0
        heat[here] = _heat(section)
    # unknowns w0 f0 w1 f1 ...: a band of two on either side
    band, right = np.zeros((5, 2 * CELLS)), np.empty(2 * CELLS)
    right[0::2], right[1::2] = heat + around / outer, 0.0
    band[2, 0::2], band[2, 1::2] = 1 / inner + 1 / outer, 1 / inner + capacity / dz
    band[1, 1::2] = -1 / inner  # of f in the row of w
    band[3, 0::2] = -1 / inner  # of w in the row of f
    band[4, 1:-2:2] = -capacity / dz
    for first, conducted in ((0, 2 / (1 / np.maximum(wall[1:], 1e-30) + 1 / np.maximum(wall[:-1], 1e-30))),
                             (1, np.full(CELLS - 1, k * math.pi * bore**2 / 4))):  # fmt: skip
        link = conducted / dz**2
        band[2, first:-2:2] += link
        band[2, first + 2 :: 2] += link
        band[0, first + 2 :: 2] -= link
        band[4, first:-2:2] -= link
    x = solve_banded((2, 2), band, right)
    w, f = x[0::2], x[1::2]
    into, taken = (w - f) / inner * dz, ((around - w) / outer + heat) * dz
    driven = [s for s in tube.sections if np.any(heat[_at(z, s)]) or np.any(around[_at(z, s)] != 0.0)]
    return Lumped(
        float(w.max()),
        float(f[-1]),
        float(into[z < driven[0].z0].sum()),
        {s.name: float(taken[_at(z, s)].sum()) for s in tube.sections},
        float(max(np.abs(w).max(), np.abs(f).max())),
    )


def _at(z: np.ndarray, section: PlacedSection) -> np.ndarray:
    return (z >= section.z0) & (z < section.z1)


def _resistances(case: Case, section: PlacedSection, t_in: float) -> tuple[float, float, float]:
    """Bore to the middle of the layer that conducts most along z, from there outward [m K/W]; all k A [W m/K]."""
    solids = [p for p in section.layers if p.kind == "solid"]
    k = [float(case.solid_of(p.material).conductivity_r(t_in)) for p in solids]
    best = max(range(len(solids)), key=lambda i: k[i] * solids[i].area)
    below = above = 0.0
    for i, p in enumerate(solids):
        whole = math.log(p.r_outer / p.r_inner) / (2 * math.pi * k[i])
        share = 1.0 if i < best else 0.5 if i == best else 0.0
        below, above = below + share * whole, above + (1 - share) * whole
    return below, above, sum(a * p.area for a, p in zip(k, solids, strict=True))


def _outside(section: PlacedSection, t_in: float) -> tuple[float, float]:
    """[m K/W] of film or contact, and [K] above the inlet of what lies behind it."""
    outside, around = section.outside, 2 * math.pi * section.layers[-1].r_outer
    if outside.film_coefficient is not None:
        return 1 / (outside.film_coefficient * around), outside.ambient - t_in
    if outside.temperature is not None:
        return outside.contact_resistance / around, outside.temperature - t_in
    return 1e12, 0.0


def _heat(section: PlacedSection) -> float:
    """[W/m]"""
    outside = section.outside
    if outside.heat_flux is not None:
        return outside.heat_flux * 2 * math.pi * section.layers[-1].r_outer
    return (outside.heat or 0.0) / section.length
