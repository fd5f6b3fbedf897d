"""Order of the conjugate heat balance: stream, two walls, what joins them, and every boundary."""

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.mesh.build import Family, Place, Segment
from axicfd.mesh.grid import Grid
from axicfd.mesh.spacing import graded_map
from axicfd.results import lines
from axicfd.solver.energy import Energy
from validation.common import Row
from validation.manufactured.exact import (
    Array,
    Errors,
    Field,
    by_r,
    by_z,
    errors,
    net_outflow,
    plot,
    rows,
    through_axial,
    through_radial,
)
from validation.manufactured.flow import check as flow

HERE = Path(__file__).parent
R1, R2, R3 = 5e-3, 6.5e-3, 8e-3  # bore, liner | shell, outer surface [m]
LENGTH, JOINT = flow.LENGTH * R1, flow.JOINT * R1
DENSITY, CAPACITY, K_FLUID = 1000.0, 2000.0, 0.2
CP_RISE = 0.01  # 1/K, of the specific heat where it varies
SWING = 20.0  # K
MESHES = 16, 32, 64, 128
SOLVED = 1e-11
AWAY = 0.5 * R1
BESIDE_JUMP = (
    "first order in the few stations beside the jump: the face there is not midway between nodes, so what is "
    "conducted along z is off by k T_zz (dz_2 - dz_1) / 4; chosen meshes have no jump (ratio 0.99 to 1.01 at the "
    "joints of the shipped cases)"
)
HELD_CORNER = "two held surfaces meet in a corner, where the heat of the half cells at both is of first order"
HELD_FLUX = "flux at the held surface, all of it"
HELD_END = "heat through the shell's held end"
BULK = "bulk T, all along"
SHOWN = {
    HELD_FLUX: {"mean": BESIDE_JUMP, "largest": BESIDE_JUMP},
    BULK: {"largest": BESIDE_JUMP},
    HELD_END: {"mean": HELD_CORNER, "largest": HELD_CORNER},
}


@dataclass(frozen=True)
class Tube:
    """One case of exact fields.

    liner, shell : (across, along) conductivities at the inlet temperature [W/m/K]
    contact      : between liner and shell [m2 K/W]
    peclet       : of mean velocity and diameter
    outside      : "film", "temperature" or "heat_flux"
    walls        : whether there are liner and shell
    fall         : 1/K, conductivities are k exp(-fall (T - T_in)); CP_RISE acts where it is not 0
    """

    liner: tuple[float, float]
    shell: tuple[float, float]
    contact: float
    peclet: float
    outside: str
    fall: float = 0.0
    walls: bool = True
    film: float = 80.0  # W/m2/K, of the outside and of the first end

    @property
    def speed(self) -> float:
        """Mean velocity [m/s]; the exact flow's is one."""
        return self.peclet * K_FLUID / (DENSITY * CAPACITY * 2.0 * R1)

    @property
    def cp_rise(self) -> float:
        return CP_RISE if self.fall else 0.0

    def k(self, reference: float, t):
        return reference * np.exp(-self.fall * t)

    def enthalpy(self, t):
        return CAPACITY * (t + 0.5 * self.cp_rise * t**2)

    def capacity(self, t):
        return CAPACITY * (1.0 + self.cp_rise * np.asarray(t))

    def of_enthalpy(self, h):
        return (np.sqrt(1.0 + 2.0 * self.cp_rise * h / CAPACITY) - 1.0) / self.cp_rise if self.cp_rise else h / CAPACITY

    def u(self, z, r):
        return self.speed * EXACT_FLOW.u(z / R1, r / R1)

    def v(self, z, r):
        return self.speed * EXACT_FLOW.v(z / R1, r / R1)

    # temperatures from the inlet temperature; each layer begins with what the one before hands over

    def t_stream(self, z, r):
        s, x2 = z / LENGTH, (r / R1) ** 2
        a, b, c = _along(s)
        return SWING * (a + b * (x2 - 0.25 * x2**2 + 0.1 * x2**3) + c * (1.0 - x2))

    def t_liner(self, z, r):
        start, slope = self._liner_start(z)
        y = r / R1 - 1.0
        return start + slope * (r - R1) + SWING * (0.5 + 0.3 * np.cos(3.0 * z / LENGTH)) * y**2

    def t_shell(self, z, r):
        start, slope = self._shell_start(z)
        y = (r - R2) / R1
        return start + slope * (r - R2) + SWING * (0.6 * np.sin(2.0 * z / LENGTH) - 0.9) * y**2

    def _liner_start(self, z):
        s = z / LENGTH
        a, b, c = _along(s)
        t = SWING * (a + 0.85 * b)
        heat = self.k(K_FLUID, t) * SWING * (b * (2.0 - 1.0 + 0.6) - 2.0 * c) / R1
        return t, heat / self.k(self.liner[0], t)

    def _shell_start(self, z):
        _, slope = self._liner_start(z)
        inner = self.t_liner(z, R2)
        slope = slope + SWING * (0.5 + 0.3 * np.cos(3.0 * z / LENGTH)) * 2.0 * (R2 / R1 - 1.0) / R1
        heat = self.k(self.liner[0], inner) * slope
        outer = inner + self.contact * heat
        return outer, heat / self.k(self.shell[0], outer)


def _along(s):
    """Factors of the stream's temperature: at the inlet only c has a slope, and it vanishes at the wall."""
    return 0.3 + 0.5 * s**2 + 0.1 * np.cos(2.0 * s), 0.4 + 0.3 * np.cos(2.0 * np.pi * s), 0.4 * np.sin(2.0 * s)


EXACT_FLOW = flow.CASES["Re 50"]
CASES = {
    "wall 1000 : 1, film": Tube((1000.0 * K_FLUID, 1000.0 * K_FLUID), (0.3, 3.0), 1e-3, 100.0, "film"),
    "properties of temperature": Tube((2.0, 2.0), (0.5, 0.5), 2e-3, 100.0, "temperature", fall=0.01),
    "Pe 10 000, given flux": Tube((16.0, 16.0), (0.25, 0.25), 1e-3, 1e4, "heat_flux"),
    "bare bore, given temperature": Tube((1.0, 1.0), (1.0, 1.0), 0.0, 100.0, "temperature", walls=False),
}
TEXT = """\
title = "Manufactured"
[stream.oil]
fluid = "oil"
inlet_temperature = "20 degC"
mean_velocity = "1 mm/s"
[fluid.oil]
outside_range = "extend"
density = "1000 kg/m^3"
specific_heat = "2000 J/kg/K"
viscosity = "10 mPa s"
conductivity = {fluid}
[[layer]]
stream = "oil"
diameter = "10 mm"
{walls}
[[section]]
name = "all"
length = "{length!r} m"
outside = {{ {outside} }}
"""
WALLS = """\
[solid.liner]
outside_range = "extend"
conductivity = {{ r = {liner_r}, z = {liner_z} }}
[solid.shell]
outside_range = "extend"
conductivity = {{ r = {shell_r}, z = {shell_z} }}
[[layer]]
name = "liner"
solid = "liner"
thickness = "1.5 mm"
[[layer]]
name = "shell"
solid = "shell"
thickness = "1.5 mm"
contact_resistance = "{contact} m^2 K/W"
[ends]
first = {{ film_coefficient = "{film} W/m^2/K", ambient = "20 degC" }}
last = {{ temperature = "20 degC" }}
"""
OUTSIDES = {
    "film": 'film_coefficient = "{film} W/m^2/K", ambient = "20 degC"',
    "temperature": 'temperature = "20 degC"',
    "heat_flux": 'heat_flux = "1 W/m^2"',
}


def case_of(tube: Tube) -> Case:
    def law(k: float) -> str:
        if tube.fall:
            return f'{{ at = "20 degC", value = "{k} W/m/K", exponent = "{tube.fall} 1/K" }}'
        return f'"{k} W/m/K"'

    walls = WALLS.format(
        liner_r=law(tube.liner[0]),
        liner_z=law(tube.liner[1]),
        shell_r=law(tube.shell[0]),
        shell_z=law(tube.shell[1]),
        contact=tube.contact,
        film=tube.film,
    )
    outside = OUTSIDES[tube.outside].format(film=tube.film)
    return load(
        TEXT.format(fluid=law(K_FLUID), walls=walls if tube.walls else "", length=float(LENGTH), outside=outside)
    )


def grid_of(case: Case, cells: int) -> Grid:
    """The meshes of the manufactured flow, and a quarter of the cells in each wall."""
    even = graded_map(1.0, False, False)
    radial: tuple[Segment, ...] = (Segment(0.0, R1, cells, flow.TO_WALL),)
    if len(case.layer) > 1:
        radial += Segment(R1, R2, cells // 4, even), Segment(R2, R3, cells // 4, even)
    axial = (
        Segment(0.0, JOINT, flow.TO_JOINT * cells, flow.TO_INLET),
        Segment(JOINT, LENGTH, cells, even),
    )
    places = tuple(Place(name, z, "joint", False) for name, z in (("inlet", 0.0), ("joint", JOINT)))
    return Family(layout(case), radial, axial, places).grid()


def layers(tube: Tube, grid: Grid) -> list[tuple[slice, Field, Callable, Callable]]:
    """(cells along r, exact temperature, heat conducted towards +z, towards +r [W/m2]) of each layer, axis outwards."""

    def conducted(t, across, along):
        t_z, t_r = by_z(t), by_r(t)
        return (
            lambda z, r: -tube.k(along, np.real(t(z, r))) * t_z(z, r),
            lambda z, r: -tube.k(across, np.real(t(z, r))) * t_r(z, r),
        )

    exact = (tube.t_stream, (K_FLUID, K_FLUID)), (tube.t_liner, tube.liner), (tube.t_shell, tube.shell)
    pieces = sorted(grid.pieces, key=lambda p: p.j0)
    return [(slice(p.j0, p.j1), t, *conducted(t, *k)) for p, (t, k) in zip(pieces, exact, strict=False)]


def set_up(tube: Tube, cells: int) -> Energy:
    """The energy object with the exact flow, sources and conditions."""
    case = case_of(tube)
    grid = grid_of(case, cells)
    z, r = grid.z, grid.r
    stream, *walls = layers(tube, grid)
    n = stream[0].stop
    area = grid.area_z

    def carried(z_, r_):
        return DENSITY * tube.u(z_, r_) * tube.enthalpy(tube.t_stream(z_, r_))

    def carried_out(z_, r_):
        return DENSITY * tube.v(z_, r_) * tube.enthalpy(tube.t_stream(z_, r_))

    # what enters: the enthalpy flux of the exact field less what it conducts along z in the inlet plane
    zero, rc = np.zeros(n), grid.rc[:n]
    entering = tube.enthalpy(tube.t_stream(zero, rc)) + stream[2](zero, rc) / (DENSITY * tube.u(zero, rc))
    inflow = np.zeros(grid.nr)
    inflow[:n] = tube.of_enthalpy(entering)

    t_in = case.stream["oil"].inlet_temperature
    energy = Energy(case, grid, t_in, tube.enthalpy, tube.capacity, inflow, False)
    psi = (
        2.0 * np.pi * DENSITY * tube.speed * R1**2 * EXACT_FLOW.stream_function(z[:, None] / R1, r[None, : n + 1] / R1)
    )
    mz, mr = np.zeros((grid.nz + 1, grid.nr)), np.zeros((grid.nz, grid.nr + 1))
    mz[:, :n], mr[:, : n + 1] = np.diff(psi, axis=1), -np.diff(psi, axis=0)
    energy.set_flow(mz, mr)

    along = through_axial(lambda a, b: carried(a, b) + stream[2](a, b), z, r[: n + 1])
    along[-1] = through_axial(carried, z[-1:], r[: n + 1])[0]  # nothing is conducted through the outlet plane
    across = through_radial(lambda a, b: carried_out(a, b) + stream[3](a, b), z, r[: n + 1])
    energy.volume_heat[:, :n] = net_outflow(along, across)
    first, last = energy.surroundings.first, energy.surroundings.last
    for here, t, to_z, to_r in walls:
        faces = r[here.start : here.stop + 1]
        energy.generated[:, here] = net_outflow(through_axial(to_z, z, faces), through_radial(to_r, z, faces))
        # the film at the first end lets in what is conducted away from it
        ambient = through_axial(t, z[:1], faces) + through_axial(to_z, z[:1], faces) / tube.film
        first.temperature[here] = ambient[0] / area[here]
        last.temperature[here] = through_axial(t, z[-1:], faces)[0] / area[here]
    surface, at, outside = r[-1:], grid.area_r[:, -1], energy.surroundings.outside
    _, t, _, to_r = (stream, *walls)[-1]
    if tube.outside == "film":
        ambient = through_radial(lambda a, b: np.real(t(a, b)) - to_r(a, b) / tube.film, z, surface)
        outside.temperature[:] = ambient[:, 0] / at
    elif tube.outside == "temperature":
        outside.temperature[:] = through_radial(t, z, surface)[:, 0] / at
    else:
        outside.brought[:] = -through_radial(to_r, z, surface)[:, 0]
    return energy


def solved(tube: Tube, cells: int) -> Energy:
    energy = set_up(tube, cells)
    error = energy.error()
    for _ in range(60):
        if error < SOLVED:
            return energy
        error = energy.step()
    raise RuntimeError(f"{cells} cells: residual {error:.1e}")


def away(z: Array) -> Array:
    """Where z is at least AWAY from the joint and both ends."""
    return np.min(np.abs(z[:, None] - [0.0, JOINT, LENGTH]), axis=1) > AWAY


@lru_cache
def quantities(name: str) -> list[Errors]:
    tube = CASES[name]
    parts: dict[str, tuple[list, list, list]] = {}

    def add(what, found, exact, weight):
        for row, x in zip(parts.setdefault(what, ([], [], [])), (found, exact, weight), strict=True):
            row.append(x)

    for cells in MESHES:
        energy = solved(tube, cells)
        grid, faces = energy.grid, energy.conductors
        zc, dz = grid.zc, grid.dz
        stream, *walls = layers(tube, grid)
        n, radius = stream[0].stop, np.full_like(zc, R1)
        for what, (here, t, _, _) in zip(("the stream", "the liner", "the shell"), (stream, *walls), strict=False):
            add(f"T of {what}", energy.t[:, here], t(zc[:, None], grid.rc[here]), grid.volume[:, here])
        add("T of the axis", lines.to_axis(energy.t[:, :n], grid.rc[:n]), tube.t_stream(zc, 0.0 * zc), dz)
        total = DENSITY * tube.speed * np.pi * R1**2
        carried = through_axial(
            lambda a, b: DENSITY * tube.u(a, b) * tube.enthalpy(tube.t_stream(a, b)), grid.z, grid.r[: n + 1]
        ).sum(axis=1)
        bulk = tube.of_enthalpy(energy.hz[:, :n].sum(axis=1) / total)
        exact, smooth = tube.of_enthalpy(carried / total), away(grid.z)
        add("bulk T, away from joint and ends", bulk[smooth], exact[smooth], np.ones(int(smooth.sum())))
        add(BULK, bulk[1:], exact[1:], dz)
        if walls:
            liner, shell = walls
            m = liner[0].stop
            add("flux at the bore", energy.qr[:, n] / grid.area_r[:, n], stream[3](zc, radius), dz)
            add("T of the bore", faces.face_minus[:, n], tube.t_stream(zc, radius), dz)
            radius = np.full_like(zc, R2)
            add("T before the contact", faces.face_minus[:, m], tube.t_liner(zc, radius), dz)
            add("T behind the contact", faces.face_plus[:, m], tube.t_shell(zc, radius), dz)
            held, exact = energy.q_last[m:].sum(), through_axial(shell[2], grid.z[-1:], grid.r[m:]).sum()
            add(HELD_END, np.array([held]), -np.array([exact]), np.ones(1))
            radius = np.full_like(zc, R3)
        _, t, _, to_r = (stream, *walls)[-1]
        if tube.outside == "temperature":
            flux, exact = -energy.q_outside / grid.area_r[:, -1], to_r(zc, radius)
            smooth = away(zc)
            add("flux at the held surface, away from joint and ends", flux[smooth], exact[smooth], dz[smooth])
            add(HELD_FLUX, flux, exact, dz)
        else:
            add("T of the outside", faces.face_minus[:, -1], t(zc, radius), dz)
    shown = dict(SHOWN)
    if tube.outside != "temperature":
        del shown[HELD_END]
    return [errors(what, list(MESHES), *three, shown.get(what)) for what, three in parts.items()]


def check() -> list[Row]:
    return [row for name in CASES for row in rows(name, quantities(name))]


def picture(folder: Path) -> None:
    names = (
        "T of the stream",
        "T of the shell",
        "T behind the contact",
        "bulk T, away from joint and ends",
        "flux at the bore",
        HELD_FLUX,
    )
    plot(folder / "orders.png", {name: quantities(name) for name in CASES}, names)
