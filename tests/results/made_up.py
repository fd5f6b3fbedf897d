"""A solution made up from closed forms, so that what is read off it is known: nobody's solution of any
equation.

Stream of 4 mm, wall to 6 mm; velocity a parabola, T - T_in = 100 z + 5 (r / R)^2 in the stream, constants of
z in the wall; wall flux 1 kW/m2 in the second section.
"""

from dataclasses import dataclass, replace

import numpy as np

from axicfd.case.layout import Layout, layout
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.mesh.build import family
from axicfd.mesh.grid import Grid
from axicfd.solver.state import HeatFields, Solution, StreamFields

RHO, CP, K, MU, MEAN, R = 1000.0, 4000.0, 0.5, 2e-3, 0.05, 2e-3
FLUX = 1000.0  # W/m2 into the stream in the second section
TEXT = """
title  = "Made up"
z_axis = "up"
[stream.water]
fluid             = "liquid"
inlet_temperature = "20 degC"
mean_velocity     = "0.05 m/s"
inlet_profile     = "developed"
direction         = "+z"
[fluid.liquid]
density       = "1000 kg/m^3"
specific_heat = "4000 J/kg/K"
conductivity  = "0.5 W/m/K"
viscosity     = "2 mPa s"
[[layer]]
stream   = "water"
diameter = "4 mm"
[[layer]]
name      = "tube"
solid     = "copper"
thickness = "1 mm"
[[section]]
name    = "lead-in"
length  = "40 mm"
outside = { insulated = true }
[[section]]
name    = "heater"
length  = "60 mm"
outside = { heat_flux = "1 kW/m^2" }
[sensor.on]
z  = "55 mm"
at = "outside"
[sensor.axis]
z  = "55 mm"
at = "axis"
[sensor.bulk]
z  = "55 mm"
at = "bulk"
[sensor.bore]
z  = "55 mm"
at = "tube inner"
[mesh]
radial           = 32
axial            = 160
stretch_to_walls = 1
stretch_to_ends  = 1
"""


@dataclass(frozen=True)
class MadeUp:
    case: Case
    layout: Layout
    solution: Solution

    @property
    def grid(self) -> Grid:
        return self.solution.grid

    def with_heat(self, **arrays: np.ndarray) -> "MadeUp":
        heat = replace(self.solution.heat, **arrays)
        return replace(self, solution=replace(self.solution, heat=heat))

    def with_flow(self, **arrays: np.ndarray) -> "MadeUp":
        flow = replace(self.solution.streams["water"], **arrays)
        return replace(self, solution=replace(self.solution, streams={"water": flow}))


def stream_temperature(z, r):
    """T - T_in [K]"""
    return 100.0 * z + 5.0 * (r / R) ** 2


def made_up(*changes: tuple[str, str]) -> MadeUp:
    """The solution of the text with parts replaced. A stream along -z is the mirror image."""
    text = TEXT
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    case = load(text)
    place = layout(case)
    grid = family(case, place).grid()
    back = case.stream["water"].direction == "-z"
    sign = -1.0 if back else 1.0
    j1 = grid.streams["water"][1]
    rc, zc = grid.rc, place.length - grid.zc if back else grid.zc
    z = place.length - grid.z if back else grid.z
    u = np.tile(2.0 * MEAN * (1.0 - (rc[:j1] / R) ** 2), (grid.nz + 1, 1))
    u *= MEAN * grid.area_z[:j1].sum() / (u[0] * grid.area_z[:j1]).sum()
    mz = np.zeros((grid.nz + 1, grid.nr))
    mz[:, :j1] = sign * RHO * u * grid.area_z[:j1]
    gradient = 8.0 * MU * MEAN / R**2
    p = np.tile(gradient * (place.length - zc)[:, None], (1, j1))
    t = np.tile(50.0 + 100.0 * zc[:, None], (1, grid.nr))
    t[:, :j1] = stream_temperature(zc[:, None], rc[:j1])
    faces = np.tile(50.0 + 100.0 * zc[:, None], (1, grid.nr + 1))
    faces[:, :j1] = stream_temperature(zc[:, None], grid.r[:j1])
    plus, minus = faces.copy(), faces.copy()
    minus[:, j1] = stream_temperature(zc, R)  # a contact between stream and tube
    minus[:, grid.nr] = 51.0 + 100.0 * zc
    tz = np.zeros((grid.nz + 1, grid.nr))
    tz[:, :j1] = stream_temperature(z[:, None], rc[:j1])
    heated = grid.section == (0 if back else 1)
    qr = np.zeros((grid.nz, grid.nr + 1))
    qr[:, j1] = np.where(heated, -FLUX, 0.0) * grid.area_r[:, j1]
    outside = np.where(heated, FLUX, 0.0) * grid.area_r[:, grid.nr]
    qz = np.zeros((grid.nz + 1, grid.nr))
    none, line = np.zeros(grid.shape), np.zeros(grid.nr)
    heat = HeatFields(
        t=t, tz=tz, tr=np.zeros((grid.nz, grid.nr + 1)), minus=minus, plus=plus, hz=mz * CP * tz,
        hr=np.zeros((grid.nz, grid.nr + 1)), qz=qz, qr=qr, outside=outside, first=line, last=line,
        generated=none, viscous=none, pressure_work=none,
    )  # fmt: skip
    flow = StreamFields(
        sign * u,
        np.zeros((grid.nz, j1 + 1)),
        p,
        mz[:, :j1],
        np.zeros((grid.nz, j1 + 1)),
        np.full(grid.nz + 1, MU),
    )
    return MadeUp(case, place, Solution(grid, {"water": flow}, heat, 7, 1e-9, "converged", 0.1))


BACKWARDS = (
    ('direction         = "+z"', 'direction         = "-z"'),
    ('name    = "lead-in"\nlength  = "40 mm"\noutside = { insulated = true }', "LEAD"),
    (
        'name    = "heater"\nlength  = "60 mm"\noutside = { heat_flux = "1 kW/m^2" }',
        'name    = "lead-in"\nlength  = "40 mm"\noutside = { insulated = true }',
    ),
    ("LEAD", 'name    = "heater"\nlength  = "60 mm"\noutside = { heat_flux = "1 kW/m^2" }'),
)
