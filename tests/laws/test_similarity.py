"""Tubes of equal dimensionless groups have equal dimensionless fields, whatever their size and fluid.

Equal: lengths and radii over the bore, Reynolds, Prandtl and Brinkman number, conductivities over the
fluid's, contact and film resistances over the fluid's, the exponent of viscosity times the temperature scale.
A constant hidden in the solver, or a temperature taken from an absolute zero, would break it.
"""

import numpy as np
import pytest

from tests.laws import tubes

PRANDTL, REYNOLDS, BRINKMAN = 25.0, 40.0, 0.05
MESH = (8, 4, 4), (8, 16, 16)


def tube(bore, k, density, cp, scale, inlet) -> str:
    """bore [m], k [W/m/K], density [kg/m3], cp [J/kg/K], temperature scale [K], inlet [K]; viscosity from
    Prandtl."""
    viscosity = PRANDTL * k / cp
    velocity = REYNOLDS * viscosity / (density * bore)
    # Brinkman number mu U^2 / (k scale) is set by the bore that goes with the fluid
    assert viscosity * velocity**2 / (k * scale) == pytest.approx(BRINKMAN, rel=1e-9)

    def length(x):
        return f'"{x * bore:.17g} m"'

    def temperature(x):
        return f'"{inlet + x * scale:.17g} K"'

    fluid = f"""
density       = "{density:.17g} kg/m^3"
specific_heat = "{cp:.17g} J/kg/K"
conductivity  = "{k:.17g} W/m/K"
[fluid.liquid.viscosity]
at       = "{inlet:.17g} K"
value    = "{viscosity:.17g} Pa s"
exponent = "{1.5 / scale:.17g} 1/K"
"""
    solids = f"""
[solid.metal]
conductivity = {{ r = "{20 * k:.17g} W/m/K", z = "{35 * k:.17g} W/m/K" }}
[solid.plastic]
conductivity = "{0.7 * k:.17g} W/m/K"
"""
    layers = f"""
[[layer]]
stream   = "water"
diameter = {length(1)}
[[layer]]
name      = "inner wall"
solid     = "metal"
thickness = {length(0.2)}
contact_resistance = "{0.01 * bore / k:.17g} m^2 K/W"
[[layer]]
name      = "sleeve"
solid     = "plastic"
thickness = {length(0.3)}
contact_resistance = "{0.05 * bore / k:.17g} m^2 K/W"
heat_per_volume = "{0.6 * k * scale / bore**2:.17g} W/m^3"
"""
    sections = f"""
[[section]]
name    = "lead-in"
length  = {length(3)}
outside = {{ insulated = true }}
[[section]]
name    = "heater"
length  = {length(8)}
[section.outside]
heat             = "{9.0 * k * bore * scale:.17g} W"
film_coefficient = "{2 * k / bore:.17g} W/m^2/K"
ambient          = {temperature(0.1)}
[[section]]
name    = "plate"
length  = {length(6)}
outside = {{ temperature = {temperature(1)}, contact_resistance = "{0.2 * bore / k:.17g} m^2 K/W" }}
"""
    ends = f"""
[ends.last.sleeve]
temperature        = {temperature(0.5)}
contact_resistance = "{bore / k:.17g} m^2 K/W"
"""
    return tubes.text(
        f'mean_velocity = "{velocity:.17g} m/s"',
        fluid,
        layers,
        sections,
        solids,
        ends,
        viscous=True,
        inlet="X",
    ).replace('"X"', f'"{inlet:.17g} K"')


def bore_for(k, density, cp, scale):
    """The bore at which the Brinkman number is the wanted one."""
    viscosity = PRANDTL * k / cp
    return REYNOLDS * viscosity / density * np.sqrt(viscosity / (BRINKMAN * k * scale))


def test_equal_groups_equal_fields():
    water_like = {"k": 0.6, "density": 1000.0, "cp": 4000.0, "scale": 30.0}
    other = {"k": 3.1, "density": 47.0, "cp": 613.0, "scale": 0.7}
    runs = []
    for fluid, inlet in (water_like, 290.0), (other, 431.0):
        bore = bore_for(**fluid)
        found = tubes.run(tube(bore, inlet=inlet, **fluid), *MESH, stop_below=1e-12)
        u = REYNOLDS * PRANDTL * fluid["k"] / (fluid["cp"] * fluid["density"] * bore)
        runs.append((found, bore, u, fluid))
    (a, bore_a, u_a, f_a), (b, bore_b, u_b, f_b) = runs
    assert bore_b / bore_a > 10.0 and f_a["scale"] / f_b["scale"] > 10.0
    assert tubes.relative(b.t / f_b["scale"], a.t / f_a["scale"]) < 1e-10
    assert tubes.relative(b.flow.u / u_b, a.flow.u / u_a) < 1e-10
    assert tubes.relative(b.flow.v / u_b, a.flow.v / u_a) < 1e-10
    pressures = (b.flow.p / (f_b["density"] * u_b**2), a.flow.p / (f_a["density"] * u_a**2))
    assert tubes.relative(*pressures) < 1e-10
    heats = (
        b.heat.viscous / (f_b["k"] * bore_b * f_b["scale"]),
        a.heat.viscous / (f_a["k"] * bore_a * f_a["scale"]),
    )
    assert tubes.relative(*heats) < 1e-10
    stream_a, stream_b = a.summary["stream"]["water"], b.summary["stream"]["water"]
    for key in "reynolds", "prandtl", "peclet", "graetz", "largest_reynolds":
        assert stream_b[key] == pytest.approx(stream_a[key], rel=1e-9), key
    assert stream_b["hottest_wetted_wall_z_m"] / bore_b == pytest.approx(
        stream_a["hottest_wetted_wall_z_m"] / bore_a, rel=1e-6
    )
