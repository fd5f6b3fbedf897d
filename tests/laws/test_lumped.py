"""Tubes so well conducting across that only z is left, where the whole case has a closed form.

With film h on a perimeter P, K = sum of k A of stream and walls, C = mass flow times cp:

    K T'' - C T' - h P (T - T_a) + q = 0,   K T' = C (T - T_in) at the first plane, T' = 0 at the last

Solved here as a 2 x 2 system for the two exponentials (own derivation). Radial differences are of the order
of the Biot number and shear dispersion of Pe^2 / 192 (Taylor 1953, Proc. R. Soc. A 219, 186-203; here of the
stream alone), both far below the tolerances. What is caught: conduction along z in stream and wall, the areas
of ends and surface, the balance of inlet, outlet and end faces, and the size of each source.
"""

import numpy as np
import pytest

from tests.laws import tubes

BORE, OUTER, LENGTH = 4e-3, 6e-3, 0.08
K_FLUID, K_WALL, K_WALL_ACROSS, CP = 0.5, 3.0, 400.0, 4000.0
AREA_FLUID, AREA_WALL = np.pi * BORE**2 / 4, np.pi * (OUTER**2 - BORE**2) / 4
FLUID = tubes.FLUID
WALL = f'[solid.metal]\nconductivity = {{ r = "{K_WALL_ACROSS} W/m/K", z = "{K_WALL} W/m/K" }}\n'
STREAM_ONLY = '[[layer]]\nstream = "water"\ndiameter = "4 mm"\n'
WITH_WALL = STREAM_ONLY + '[[layer]]\nname = "wall"\nsolid = "metal"\nouter_diameter = "6 mm"\n'


def closed_form(z, conducting, carried, lost, source, ambient, first, last):
    """T - T_in [K] at z. conducting K [W m/K], carried C [W/K], lost h P [W/(m K)], source q [W/m].

    first, last : (a, b, c) of the end conditions a T + b T' = c
    """
    particular = ambient + source / lost
    roots = np.roots([conducting, -carried, -lost])
    at = np.exp(np.outer([0.0, LENGTH], roots) - np.maximum(roots, 0.0) * LENGTH)
    rows = [(a + b * roots) * at[k] for k, (a, b, _) in enumerate((first, last))]
    right = [c - a * particular for a, _, c in (first, last)]
    c = np.linalg.solve(np.array(rows), right)
    return particular + (np.exp(np.outer(z, roots) - np.maximum(roots, 0.0) * LENGTH) * c).sum(axis=1)


def one_section(outside: str, rest: str = "") -> str:
    return f'[[section]]\nname = "all"\nlength = "{LENGTH} m"\noutside = {{ {outside} }}\n{rest}'


def mean(run: tubes.Run) -> np.ndarray:
    return (run.t * run.grid.area_z).sum(axis=1) / run.grid.area_z.sum()


@pytest.mark.parametrize("direction", ["+z", "-z"])
@pytest.mark.parametrize("walled", [False, True])
def test_slow_stream_with_film_and_heat(direction, walled):
    """Péclet number 0.05 to 0.4: conduction along z carries as much as the stream."""
    surface = OUTER if walled else BORE
    film, heat, ambient = 0.2, 0.004, 30.0
    carried = 2e-7 * CP
    conducting = K_FLUID * AREA_FLUID + (K_WALL * AREA_WALL if walled else 0.0)
    outside = f'heat = "{heat} W", film_coefficient = "{film} W/m^2/K", ambient = "{20 + ambient} degC"'
    case = tubes.text(
        f'mass_flow = "2e-7 kg/s"\ninlet_profile = "developed"\ndirection = "{direction}"',
        fluid=FLUID,
        solids=WALL,
        layers=WITH_WALL if walled else STREAM_ONLY,
        sections=one_section(outside),
    )
    run = tubes.run(case, (8, 8) if walled else (8,), (200,))
    lost = film * np.pi * surface
    z = run.grid.zc if direction == "+z" else LENGTH - run.grid.zc
    # only the fluid's share of the plane brings enthalpy in; the wall's end is insulated: together K T' = C T
    expected = closed_form(
        z, conducting, carried, lost, heat / LENGTH, ambient, (carried, -conducting, 0.0), (0.0, 1.0, 0.0)
    )
    # where the stream takes heat to its inlet plane and the wall does not, they differ over about a diameter
    inside = z > (2 * OUTER if walled else 0.0)
    assert np.abs(mean(run) - expected)[inside].max() < 1e-3 * expected.max()
    # the stream takes up along the way what the closed form says
    outlet = run.summary["stream"]["water"]["outlet_temperature_K"] - 293.15
    assert outlet == pytest.approx(float(expected[-1 if direction == "+z" else 0]), rel=2e-3)


@pytest.mark.parametrize("walled", [False, True])
def test_rod_at_rest_between_its_ends(walled):
    """No flow: a fin. With a wall its end faces are held by a plate behind a contact resistance, or take
    heat; the stream's own end faces are closed. Wall and stream share one temperature, so the heat enters
    through the wall's area."""
    film, ambient = 0.2, 5.0
    surface = OUTER if walled else BORE
    lost = film * np.pi * surface
    ends = ""
    first: tuple[float, float, float] = (0.0, 1.0, 0.0)
    last = (0.0, 1.0, 0.0)
    conducting = K_FLUID * AREA_FLUID
    if walled:
        contact, plate, heat = 2e-2, 40.0, 0.02
        conducting += K_WALL * AREA_WALL
        ends = (
            "[ends]\n"
            f'first.wall.temperature = "{20 + plate} degC"\n'
            f'first.wall.contact_resistance = "{contact} m^2 K/W"\n'
            f'last.wall = {{ heat = "{heat} W" }}\n'
        )
        per_kelvin = AREA_WALL / contact
        first = (per_kelvin, -conducting, per_kelvin * plate)
        last = (0.0, conducting, heat)
    case = tubes.text(
        'mass_flow = "0 g/s"',
        fluid=FLUID,
        solids=WALL,
        layers=WITH_WALL if walled else STREAM_ONLY,
        sections=one_section(f'film_coefficient = "{film} W/m^2/K", ambient = "{20 + ambient} degC"'),
        rest=ends,
    )
    run = tubes.run(case, (8, 8) if walled else (8,), (200,))
    expected = closed_form(run.grid.zc, conducting, 0.0, lost, 0.0, ambient, first, last)
    # near the ends wall and stream differ over about a diameter
    inside = (run.grid.zc > 2 * OUTER) & (run.grid.zc < LENGTH - 2 * OUTER)
    assert np.abs(mean(run) - expected)[inside].max() < 0.02 * np.abs(expected).max()


def test_stream_at_rest_carries_heat_along_itself():
    """Hot film on the first third, cold film on the last third, insulation between: what passes through the
    middle is the fluid's conductivity times its cross-section times the slope found there."""
    thirds = "".join(
        f'[[section]]\nname = "{n}"\nlength = "40 mm"\noutside = {{ {outside} }}\n'
        for n, outside in (
            ("hot", 'film_coefficient = "5000 W/m^2/K", ambient = "60 degC"'),
            ("middle", "insulated = true"),
            ("cold", 'film_coefficient = "5000 W/m^2/K", ambient = "20 degC"'),
        )
    )
    run = tubes.run(
        tubes.text('mass_flow = "0 g/s"', fluid=FLUID, layers=STREAM_ONLY, sections=thirds),
        (12,),
        (40, 40, 40),
    )
    slope = np.polyfit(run.grid.zc[55:65], mean(run)[55:65], 1)[0]
    # a bare end region of a cylinder adds about half a radius to the conducting length on either side
    assert -slope == pytest.approx(40.0 / (0.04 + 0.6 * BORE), rel=0.03)
    expected = -slope * K_FLUID * AREA_FLUID
    assert run.heat.outside[run.in_section(0)].sum() == pytest.approx(expected, rel=1e-6)
    assert run.heat.outside[run.in_section(2)].sum() == pytest.approx(-expected, rel=1e-6)


def test_second_order_along_z():
    """A stream of well mixed fluid warms towards the surroundings: halving the cells quarters the error,
    a little less on the coarsest cells, where the scheme beside the inlet counts."""
    fluid = FLUID.replace('"0.5 W/m/K"', '"50 W/m/K"')
    carried, lost, ambient = 2e-4 * CP, 400.0 * np.pi * BORE, 30.0
    case = tubes.text(
        'mass_flow = "0.2 g/s"\ninlet_profile = "developed"',
        fluid=fluid,
        layers=STREAM_ONLY,
        sections=one_section(f'film_coefficient = "400 W/m^2/K", ambient = "{20 + ambient} degC"'),
    )
    fine = tubes.run(case, (8,), (640,), levels=4)
    expected = closed_form(
        fine.grid.zc,
        50.0 * AREA_FLUID,
        carried,
        lost,
        0.0,
        ambient,
        (carried, -50.0 * AREA_FLUID, 0.0),
        (0, 1, 0),
    )
    assert np.abs(mean(fine) - expected).max() < 0.02 * ambient
    # in the middle: at the outlet a layer of K / C = 0.8 mm hides behind the coarser cells
    middles = [tubes.run(case, (8,), (n,), levels=2).view.bulk[n // 2] for n in (20, 40, 80)]
    errors = [abs(t - fine.view.bulk[320]) for t in middles]
    assert errors[0] / errors[2] > 9.0 and errors[1] / errors[2] > 3.2, errors


@pytest.mark.parametrize("direction", ["+z", "-z"])
def test_specific_heat_that_changes_twofold(direction):
    """Mixed by its own conductivity, the stream leaves at the temperature to which the heat brings its
    enthalpy: the integral of a specific heat that rises from 4000 to 8000 J/(kg K) over 60 K."""
    fluid = FLUID.replace('"0.5 W/m/K"', '"0.5 kW/m/K"').replace(
        '"4000 J/kg/K"', '{ temperature = ["20 degC", "80 degC"], value = ["4000 J/kg/K", "8000 J/kg/K"] }'
    )
    heat, flow = 50.0, 2e-4
    case = tubes.text(
        f'mass_flow = "{flow} kg/s"\ninlet_profile = "developed"\ndirection = "{direction}"',
        fluid=fluid,
        layers=STREAM_ONLY,
        sections=one_section(f'heat = "{heat} W"'),
    )
    run = tubes.run(case, (8,), (80,))
    # 4000 T + 4000 / 60 T^2 / 2 = heat / flow
    rise = (-4000.0 + np.sqrt(4000.0**2 + 4 * 4000.0 / 120.0 * heat / flow)) / (2 * 4000.0 / 120.0)
    assert 40.0 < rise < 60.0
    outlet = -1 if direction == "+z" else 0
    assert run.view.bulk[-1] == pytest.approx(rise, rel=1e-8)
    assert float(mean(run)[outlet]) == pytest.approx(rise, rel=5e-3)
