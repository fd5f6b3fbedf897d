"""The text of a case to start from: every key that is open, explained where it stands."""

from __future__ import annotations

# ruff: noqa: E501
# The lines below are laid out as the user sees them.

TEXT = """\
# What is the outlet temperature of a water tube with a heater around it, and how hot does its wall get?
#
# A quantity is text with a unit: "6 mm", "20 degC", "4 g/s", "1.2 kW/m^2". Lines that begin with # are explanations,
# or other ways of saying the same thing. `axicfd keys` lists all keys.

title  = "Heated water tube"
z_axis = "horizontal"               # or "up", "down"

# ---- what flows ----------------------------------------------------------------------------------------------------

[stream.water]
fluid             = "water"         # built in (`axicfd materials` lists them), or the NAME of a [fluid.NAME] below
inlet_temperature = "20 degC"
mass_flow         = "1.5 g/s"       # or one of: volume_flow = "90 mL/min", mean_velocity = "0.12 m/s", reynolds = 500,
                                    # pressure_drop = "50 Pa"
inlet_profile     = "flat"          # or "developed", or { file = "inlet.csv" } with columns r_m, velocity, temperature_K
direction         = "+z"            # or "-z"
outlet_pressure   = "1 atm"         # absolute

# [fluid.oil]                       # a fluid of your own; each property is a constant or a law of temperature
# density       = "880 kg/m^3"
# specific_heat = "1900 J/kg/K"
# conductivity  = { temperature = ["0 degC", "100 degC"], value = ["0.135 W/m/K", "0.128 W/m/K"] }
# viscosity     = { at = "20 degC", value = "0.1 Pa s", exponent = "0.03 1/K" }   # value exp(-exponent (T - at))
# outside_range = "refuse"          # where a table is left: "refuse", "hold" its end value, or "extend" it

# [solid.liner]                     # a solid of your own
# conductivity  = "0.25 W/m/K"      # or a law of temperature, or { r = "0.25 W/m/K", z = "1 W/m/K" }

# ---- the layers, from the axis outward -----------------------------------------------------------------------------

[[layer]]
stream   = "water"
diameter = "4 mm"                   # the layer on the axis is given by its diameter: the bore

[[layer]]
name      = "tube"
solid     = "stainless steel 316"   # built in, or the NAME of a [solid.NAME]
thickness = "1 mm"                  # or outer_diameter = "6 mm"
# contact_resistance = "1e-4 m^2 K/W"   # at the layer's inner face; on a wetted face: fouling
# heat_per_volume    = "1 MW/m^3"       # generated in this layer, everywhere

# ---- the sections, along the tube ----------------------------------------------------------------------------------

[[section]]
name    = "lead-in"                 # long enough that the heater is not felt at the inlet
length  = "100 mm"
outside = { insulated = true }

[[section]]
name    = "heater"
length  = "300 mm"
outside = { heat = "40 W" }         # total over the section. Other choices:
# outside = { heat_flux = "7 kW/m^2" }                                 per outer area
# outside = { heat_per_length = "130 W/m" }
# outside = { film_coefficient = "900 W/m^2/K", ambient = "60 degC" }  may stand beside one of the heats
# outside = { temperature = "60 degC", contact_resistance = "2e-4 m^2 K/W" }
# a value may change along the section: heat_flux = { z = ["0 mm", "300 mm"], value = ["5 kW/m^2", "9 kW/m^2"] }
# generated = { tube = "40 W" }     # heat generated in the named layer within this section
# joint_length = "2 mm"             # a ramp where the prescribed temperatures of two sections meet

[[section]]
name    = "lead-out"
length  = "200 mm"
outside = { insulated = true }

[ends]                              # the end faces of the solids
first = { insulated = true }        # or a condition as in `outside`; or one per layer: first.tube = { ... }
last  = { insulated = true }

# ---- what to read --------------------------------------------------------------------------------------------------

[sensor."heater end"]
z  = "390 mm"                       # from the tube's start
at = "outside"                      # or "axis", "bulk", "tube inner", "tube outer"

[results]
stations = ["100 mm", "400 mm"]     # places of radial profiles

[quantity.warming]                  # results added and taken away, with a mesh error of its own
plus  = ["stream.water.outlet_temperature"]     # a result is named by its path in summary.json, without unit
minus = ["stream.water.inlet_temperature"]

[limits]                            # pass, fail, or too close to call against the mesh error; `below`, `above` or both
"stream.water.hottest_wetted_wall" = { below = "90 degC" }

# [accept]                          # cautions that may stand, each with the reason
# free-convection = "checked on the rig"

# ---- how to solve it: best left alone ------------------------------------------------------------------------------

[physics]
viscous_heating = true
axial_conduction_in_streams = true  # heat conducted along z in the fluid, which matters at low flow

[mesh]
# at_most = 40000                   # cells in all
# radial = 48                       # cells from the axis to the bore's wall
# axial  = 600                      # cells along the tube
# stretch_to_walls = 4              # largest over smallest cell across a layer
# stretch_to_ends  = 20             # largest over smallest cell along a section

[solve]
stop_below = 1e-8                   # the residual at which the solve ends
# accuracy = "0.5 %"                # refine the mesh until the mesh errors are within this share of their scales
"""
