"""Small tubes for tests of the solver: one stream of round numbers, walls as asked."""

from __future__ import annotations

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.mesh.build import family
from axicfd.mesh.grid import Grid

TEXT = """\
title = "Tube"
[stream.oil]
fluid = "oil"
inlet_temperature = "20 degC"
{flow}
inlet_profile = "{profile}"
direction = "{direction}"
[fluid.oil]
density = {density}
specific_heat = {specific_heat}
conductivity = {conductivity}
viscosity = {viscosity}
outside_range = "extend"
[[layer]]
stream = "oil"
diameter = "10 mm"
{layers}
{sections}
{tail}
[mesh]
radial = {radial}
axial = {axial}
{mesh}
[physics]
viscous_heating = {heating}
"""
ONE_SECTION = '[[section]]\nname = "all"\nlength = "{length}"\noutside = {{ {outside} }}'


def tube(
    flow: str = "reynolds = 50",
    outside: str = "insulated = true",
    length: str = "0.1 m",
    layers: str = "",
    sections: str = "",
    tail: str = "",
    mesh: str = "",
    radial: int = 8,
    axial: int = 32,
    profile: str = "flat",
    direction: str = "+z",
    density: str = '"1000 kg/m^3"',
    specific_heat: str = '"2000 J/kg/K"',
    conductivity: str = '"0.2 W/m/K"',
    viscosity: str = '"10 mPa s"',
    heating: bool = False,
) -> Case:
    """A case from parts of its text; `sections` replaces the one section that `length` and `outside` make."""
    return load(
        TEXT.format(
            flow=flow,
            layers=layers,
            sections=sections or ONE_SECTION.format(length=length, outside=outside),
            tail=tail,
            mesh=mesh,
            radial=radial,
            axial=axial,
            profile=profile,
            direction=direction,
            density=density,
            specific_heat=specific_heat,
            conductivity=conductivity,
            viscosity=viscosity,
            heating=str(heating).lower(),
        )
    )


def grid_of(case: Case, level: int = 0) -> Grid:
    return family(case, layout(case)).grid(level)
