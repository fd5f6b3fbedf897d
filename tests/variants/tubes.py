"""Small tubes whose walls matter or not, on coarse meshes."""

from functools import lru_cache

from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.variants.wall import WallEffect, wall_effect

TEXT = """\
title = "Small tube"
[stream.liquid]
fluid             = "liquid"
inlet_temperature = "20 degC"
mean_velocity     = "10 mm/s"
inlet_profile     = "developed"
[fluid.liquid]
density       = "1000 kg/m^3"
specific_heat = "1000 J/kg/K"
conductivity  = "1 W/m/K"
viscosity     = "50 mPa s"
[solid.metal]
conductivity = "100 W/m/K"
[[layer]]
stream   = "liquid"
diameter = "2 mm"
[[layer]]
name      = "tube"
solid     = "metal"
thickness = "0.4 mm"
[[section]]
name    = "lead-in"
length  = "20 mm"
outside = { insulated = true }
[[section]]
name    = "heated"
length  = "20 mm"
outside = { heat_flux = "1 kW/m^2" }
[sensor.skin]
z  = "30 mm"
at = "outside"
[mesh]
at_most = 3000
[physics]
viscous_heating = false
"""


@lru_cache
def tube() -> Case:
    return load(TEXT)


@lru_cache
def effect() -> WallEffect:
    return wall_effect(tube())
