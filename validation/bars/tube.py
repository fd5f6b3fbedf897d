"""Case files from numbers: one tube, one invented liquid, any stack of walls and any row of sections."""

from dataclasses import dataclass

from axicfd.case.model import Case
from axicfd.case.read import load

INSULATED = "insulated = true"


@dataclass(frozen=True)
class Liquid:
    """Conductivity [W/m/K], Prandtl number at the inlet, fall of viscosity per kelvin [1/K] (0: constant)."""

    conductivity: float = 0.5
    prandtl: float = 7.0
    falls: float = 0.0
    density: float = 1000.0
    specific_heat: float = 4000.0

    @property
    def viscosity(self) -> float:
        return self.prandtl * self.conductivity / self.specific_heat


@dataclass(frozen=True)
class Wall:
    """A solid layer: conductivity [W/m/K], thickness [mm], contact resistance at its inner face [m2 K/W]."""

    conductivity: float
    thickness: float
    contact: float = 0.0


@dataclass(frozen=True)
class Stretch:
    """A section: length [mm], what is outside, heat [W] generated in its outermost wall, ramp at its start [mm]."""

    length: float
    outside: str = INSULATED
    generated: float = 0.0
    joint: float = 0.0


def tube(
    title: str,
    liquid: Liquid,
    reynolds: float,
    diameter: float,
    sections: list[Stretch],
    walls: list[Wall] | None = None,
    *,
    inlet: float = 20.0,
    profile: str = "flat",
    direction: str = "+z",
    ends: str = "",
    dissipation: bool = False,
    at_most: int | None = None,
) -> Case:
    """A case; diameter [mm], inlet [degC]. Sensors on the axis, in the bulk, outside at 30, 55, 80 % of the length."""
    mu = liquid.viscosity
    law = f'{{ at = "{inlet} degC", value = "{mu:.8g} Pa s", exponent = "{liquid.falls:.8g} 1/K" }}'
    viscosity = law if liquid.falls else f'"{mu:.8g} Pa s"'
    lines = [
        f'title = "{title}"',
        "[stream.liquid]",
        f'inlet_temperature = "{inlet} degC"',
        f"reynolds = {reynolds:.8g}",
        f'inlet_profile = "{profile}"',
        f'direction = "{direction}"',
        "[fluid.liquid]",
        f'density = "{liquid.density:.8g} kg/m^3"',
        f'specific_heat = "{liquid.specific_heat:.8g} J/kg/K"',
        f'conductivity = "{liquid.conductivity:.8g} W/m/K"',
        f"viscosity = {viscosity}",
        'outside_range = "hold"',
    ]
    lines.insert(2, 'fluid = "liquid"')
    walls = walls or []
    for k, wall in enumerate(walls):
        lines += [
            f"[solid.solid{k}]",
            f'conductivity = "{wall.conductivity:.8g} W/m/K"',
        ]
    lines += ["[[layer]]", 'stream = "liquid"', f'diameter = "{diameter:.8g} mm"']
    for k, wall in enumerate(walls):
        lines += ["[[layer]]", f'name = "wall{k}"', f'solid = "solid{k}"', f'thickness = "{wall.thickness:.8g} mm"']
        if wall.contact:
            lines += [f'contact_resistance = "{wall.contact:.8g} m^2 K/W"']
    for k, section in enumerate(sections):
        lines += ["[[section]]", f'name = "part{k}"', f'length = "{section.length:.8g} mm"']
        if section.joint:
            lines += [f'joint_length = "{section.joint:.8g} mm"']
        lines += [f"outside = {{ {section.outside} }}"]
        if section.generated:
            lines += [f'generated = {{ wall{len(walls) - 1} = "{section.generated:.8g} W" }}']
    if ends:
        lines += ["[ends]", ends]
    whole = sum(s.length for s in sections)
    for place, share in (("axis", 0.3), ("bulk", 0.55), ("outside", 0.8)):
        lines += [f"[sensor.{place}]", f'z = "{share * whole:.8g} mm"', f'at = "{place}"']
    if not dissipation:
        lines += ["[physics]", "viscous_heating = false"]
    if at_most:
        lines += ["[mesh]", f"at_most = {at_most}"]
    return load("\n".join(lines) + "\n")


def film(coefficient: float, ambient: float) -> str:
    """coefficient [W/m2/K], ambient [degC]"""
    return f'film_coefficient = "{coefficient:.8g} W/m^2/K", ambient = "{ambient:.8g} degC"'


def heat(watts: float) -> str:
    return f'heat = "{watts:.8g} W"'


def held(temperature: float) -> str:
    """temperature [degC]"""
    return f'temperature = "{temperature:.8g} degC"'


def rising(coefficient: float, first: float, last: float, length: float) -> str:
    """A film whose ambient temperature [degC] rises along the section of that length [mm]."""
    ambient = f'{{ z = ["0 mm", "{length:.8g} mm"], value = ["{first:.8g} degC", "{last:.8g} degC"] }}'
    return f'film_coefficient = "{coefficient:.8g} W/m^2/K", ambient = {ambient}'
