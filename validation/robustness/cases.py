"""The cases that the solver has to get through without being told how: flow alone, and flow with heat."""

from axicfd.case.model import Case
from axicfd.case.read import load

FLOW = """
title = "Flow alone"

[stream.oil]
fluid             = "oil"
inlet_temperature = "20 degC"
reynolds          = {reynolds}

[fluid.oil]
density       = "900 kg/m^3"
specific_heat = "2000 J/kg/K"
conductivity  = "0.14 W/m/K"
viscosity     = "9 mPa s"

[[layer]]
stream   = "oil"
diameter = "10 mm"

[[section]]
name    = "tube"
length  = "{length} mm"
outside = {{ insulated = true }}
"""

HEATED = """
title = "Flow with heat"

[stream.oil]
fluid             = "oil"
inlet_temperature = "{inlet} degC"
reynolds          = {reynolds}
inlet_profile     = "{profile}"

[fluid.oil]
density       = "900 kg/m^3"
specific_heat = "{specific_heat} J/kg/K"
conductivity  = "0.14 W/m/K"
viscosity     = {{ at = "{inlet} degC", value = "{viscosity} Pa s", exponent = "{exponent} 1/K" }}
outside_range = "hold"

[solid.wall]
conductivity  = "{wall} W/m/K"
density       = "8000 kg/m^3"
specific_heat = "500 J/kg/K"

[[layer]]
stream   = "oil"
diameter = "10 mm"
{stack}
"""

WALL = """
[[layer]]
name      = "tube"
solid     = "wall"
thickness = "{thickness} mm"
"""

SECTION = """
[[section]]
name    = "{name}"
length  = "{length} mm"
outside = {{ {outside} }}
"""

INSULATED = "insulated = true"
HOT = 'film_coefficient = "2000 W/m^2/K", ambient = "80 degC"'
COLD = 'film_coefficient = "2000 W/m^2/K", ambient = "20 degC"'
TWENTYFOLD = 0.05  # 1/K: exp(0.05 x 60) = 20

REYNOLDS = 1, 10, 100, 500, 1000, 2000
LENGTHS = 5, 20, 100, 1000  # diameters


def flow_cases() -> dict[str, Case]:
    """Flat inlet, constant properties."""
    return {
        f"flow, Re {reynolds}, L/D {length}": load(FLOW.format(reynolds=reynolds, length=10 * length))
        for reynolds in REYNOLDS
        for length in LENGTHS
    }


def heated(
    sections: list[tuple[str, float, str]],
    reynolds: float,
    prandtl: float = 1000.0,
    *,
    inlet: float = 20.0,
    profile: str = "flat",
    exponent: float = TWENTYFOLD,
    wall: float = 16.0,
    thickness: float | None = None,
) -> Case:
    """A case of one oil.

    sections : (name, length [mm], what is outside)
    reynolds, prandtl : at the inlet; below Pr 1 the specific heat is smaller; the viscosity follows
    exponent [1/K] : of the viscosity         wall [W/m/K], thickness [mm] : of the tube's wall, if it has one
    """
    specific_heat = 2000.0 if prandtl >= 1.0 else 140.0
    viscosity = prandtl * 0.14 / specific_heat
    stack = WALL.format(thickness=thickness) if thickness else ""
    text = HEATED.format(
        inlet=inlet, reynolds=reynolds, profile=profile, specific_heat=specific_heat, viscosity=viscosity,
        exponent=exponent, wall=wall, stack=stack,
    )  # fmt: skip
    return load(text + "".join(SECTION.format(name=n, length=x, outside=o) for n, x, o in sections))


def band(outside: str, lead: float = 100.0, length: float = 50.0) -> list[tuple[str, float, str]]:
    """A heater band between insulated lengths [mm]."""
    return [("before", lead, INSULATED), ("band", length, outside), ("behind", lead, INSULATED)]


def coupled_cases() -> dict[str, Case]:
    """Twenty cases of flow with heat. Unless said otherwise: flat inlet, viscosity falls twentyfold over 60 K."""
    flux = 'heat = "{} W"'.format
    cases = {}
    for reynolds in (0.1, 1, 10, 100):
        cases[f"heated through a film, Re {reynolds} at the inlet"] = heated([("tube", 1000, HOT)], reynolds)
    for reynolds in (1, 10, 100, 1000):
        cases[f"cooled through a film, Re {reynolds} at the inlet"] = heated(
            [("tube", 1000, COLD)], reynolds, inlet=80.0
        )
    for prandtl, watts in ((0.01, 0.02), (1, 2), (100, 20), (10_000, 60)):
        cases[f"steel wall with a heater band, Pr {prandtl}, Re 50"] = heated(
            band(flux(watts)), 50, prandtl, exponent=0.02, thickness=1.0
        )
    cases["steel wall with a heater band of 1 m, Pr 1000, Re 500"] = heated(
        band(flux(400), 200, 1000), 500, thickness=1.0
    )
    cases["copper wall with a film on the band, Re 50"] = heated(band(HOT), 50, wall=390.0, thickness=1.0)
    cases["thick copper wall with a film on the band, Re 200"] = heated(band(HOT), 200, wall=390.0, thickness=5.0)
    for peclet, watts in ((0.1, 0.005), (1, 0.05), (10, 0.5)):
        cases[f"thick copper wall with a band, Pe {peclet}, Pr 10"] = heated(
            band(flux(watts), 30, 20), peclet / 10, 10, profile="developed", exponent=0.02, wall=390.0, thickness=5.0
        )
    cases["bore held at 80 degC behind an insulated length, Re 20"] = heated(
        [("before", 50, INSULATED), ("hot", 500, 'temperature = "80 degC"')], 20
    )
    cases["liner of low conductivity held at 80 degC, Re 100, Pr 100"] = heated(
        [("before", 50, INSULATED), ("hot", 500, 'temperature = "80 degC"')], 100, 100, wall=0.25, thickness=2.0
    )
    return cases
