"""A case that uses every kind of table, and a way to change its text."""

from __future__ import annotations

import pytest

from axicfd.case.read import load
from axicfd.errors import InputError

BASE = """\
title  = "Oil line"
z_axis = "horizontal"

[stream.oil]
fluid             = "oil"
inlet_temperature = "20 degC"
mass_flow         = "4 g/s"
inlet_profile     = "flat"
direction         = "+z"
outlet_pressure   = "1 atm"

[fluid.oil]
density       = "880 kg/m^3"
specific_heat = "1900 J/kg/K"
conductivity  = "0.14 W/m/K"
viscosity     = { temperature = ["0 degC", "50 degC", "150 degC"], value = ["0.4 Pa s", "40 mPa s", "4 cP"] }
outside_range = "refuse"

[solid.liner]
conductivity  = { r = "0.25 W/m/K", z = "1 W/m/K" }
density       = "2200 kg/m^3"
specific_heat = "1000 J/kg/K"
outside_range = "refuse"

[[layer]]
stream   = "oil"
diameter = "6 mm"

[[layer]]
name               = "tube"
solid              = "copper"
thickness          = "1 mm"
contact_resistance = "1e-5 m^2 K/W"
heat_per_volume    = "1 kW/m^3"
cells_across       = 8

[[layer]]
solid          = "liner"
outer_diameter = "12 mm"

[[section]]
name    = "lead-in"
length  = "0.2 m"
outside = { insulated = true }

[[section]]
name      = "heater"
length    = "0.5 m"
outside   = { heat_flux = "2 kW/m^2", film_coefficient = "10 W/m^2/K", ambient = "20 degC" }
generated = { tube = "5 W" }

[[section]]
name    = "plate"
length  = "0.3 m"
outside = { temperature = "60 degC", contact_resistance = "1e-4 m^2 K/W" }

[[section]]
name         = "hotter"
length       = "0.3 m"
joint_length = "10 mm"
outside      = { temperature = { z = ["0 m", "0.3 m"], value = ["70 degC", "80 degC"] } }

[ends]
first = { insulated = true }
last.tube = { heat = "0.1 W" }
last.liner = { film_coefficient = "5 W/m^2/K", ambient = "20 degC" }

[sensor.case]
z  = "0.6 m"
at = "outside"

[mesh]
at_most          = 30000
axial            = 400
stretch_to_walls = 4
stretch_to_ends  = 20

[physics]
viscous_heating = false

[solve]
stop_below = 1e-9

[results]
stations = ["0.2 m", "0.7 m"]

[quantity.warmth]
plus  = ["stream.oil.outlet_temperature"]
minus = ["stream.oil.inlet_temperature"]

[limits]
"stream.oil.hottest_wetted_wall" = { below = "90 degC" }
"quantity.warmth"                = { above = "0.5 K", below = "60 K" }

[accept]
free-convection = "seen on the rig"
"""


def changed(*changes: tuple[str, str], text: str = BASE) -> str:
    """The text with parts replaced; each must stand there exactly once."""
    for old, new in changes:
        assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times"
        text = text.replace(old, new)
    return text


def without(*starts: str, text: str = BASE) -> str:
    """The text without the lines that begin so."""
    lines = text.splitlines()
    for start in starts:
        assert any(line.startswith(start) for line in lines), start
    return "\n".join(line for line in lines if not line.startswith(starts)) + "\n"


def mistakes_in(text: str) -> tuple:
    """The mistakes found in a case that must have some."""
    with pytest.raises(InputError) as caught:
        load(text)
    assert caught.value.mistakes
    return caught.value.mistakes
