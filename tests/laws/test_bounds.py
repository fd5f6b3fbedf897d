"""No temperature without a cause: nothing colder than the coldest or hotter than the hottest of what
surrounds it, within 1e-4 of the span. The shipped cases are held to the same in tests/test_cases.py."""

import numpy as np
import pytest

from tests.laws import tubes

THIN = """
[[layer]]
stream   = "water"
diameter = "4 mm"
[[layer]]
name      = "tube"
solid     = "metal"
thickness = "{thickness} mm"
"""


def steps(hot: str) -> str:
    """Cold lead-in, hot middle, cold rest."""
    rows = ("in", 40, "insulated = true"), ("hot", 20, hot), ("rest", 60, "insulated = true")
    return "".join(
        f'[[section]]\nname = "{n}"\nlength = "{length} mm"\noutside = {{ {outside} }}\n' for n, length, outside in rows
    )


def extremes(run: tubes.Run) -> tuple[float, float]:
    """Lowest and highest temperature of cells, faces and surface, from the inlet temperature [K]."""
    solid_or_fluid = run.t[run.grid.kind != 0]
    everything = np.concatenate([solid_or_fluid, run.surface(), run.view.bulk, run.view.wall])
    return float(everything.min()), float(everything.max())


@pytest.mark.parametrize("conductivity, thickness", [(0.02, 0.1), (15.0, 0.2), (390.0, 2.0)])
@pytest.mark.parametrize("reynolds", [0.2, 1500.0])
def test_jacket_around_a_part_of_the_tube(conductivity, thickness, reynolds):
    """From a wall that hardly conducts along itself, where a scheme undershoots upstream of the joint, to one
    that spreads the heat; Péclet numbers from 3 to 24 000."""
    case = tubes.text(
        f"reynolds = {reynolds}",
        layers=THIN.format(thickness=thickness),
        sections=steps('film_coefficient = "20 kW/m^2/K", ambient = "70 degC"'),
        solids=f'[solid.metal]\nconductivity = "{conductivity} W/m/K"\n',
    )
    low, high = extremes(tubes.run(case, (12, 4), (40, 40, 48)))
    assert low > -1e-4 * 50.0 and high < 50.0 * (1 + 1e-4)


@pytest.mark.parametrize("direction", ["+z", "-z"])
def test_step_of_temperature_on_the_bore_itself(direction):
    case = tubes.text(
        f'reynolds = 400\ndirection = "{direction}"',
        layers='[[layer]]\nstream = "water"\ndiameter = "4 mm"\n',
        sections=steps('temperature = "70 degC", contact_resistance = "1e-6 m^2 K/W"'),
        solids="",
    )
    low, high = extremes(tubes.run(case, (16,), (40, 40, 48)))
    assert low > -1e-4 * 50.0 and high < 50.0 * (1 + 1e-4)


def test_heater_never_cools():
    case = tubes.text(sections=steps('heat = "8 W"'), layers=THIN.format(thickness=0.2))
    low, _ = extremes(tubes.run(case, (12, 4), (40, 40, 48)))
    assert low > -1e-4 * tubes.run(case, (12, 4), (40, 40, 48)).span


@pytest.mark.parametrize("reynolds", [30.0, 300.0])
def test_wall_that_is_hot_in_the_inlet_plane(reynolds):
    """Thick copper brings the jacket's heat up to the inlet: a hot wall beside fluid that has just come in."""
    case = tubes.text(
        f'reynolds = {reynolds}\ninlet_profile = "developed"',
        layers=THIN.format(thickness=2.0),
        sections=steps('film_coefficient = "20 kW/m^2/K", ambient = "70 degC"'),
        solids='[solid.metal]\nconductivity = "390 W/m/K"\n',
    )
    low, high = extremes(tubes.run(case, (24, 4), (80, 40, 48)))
    assert low > -1e-4 * 50.0 and high < 50.0 * (1 + 1e-4)


@pytest.mark.parametrize("direction", ["+z", "-z"])
def test_warm_fluid_in_an_insulated_tube_stays_as_it_is(direction, tmp_path):
    """It enters 10 K above the temperature from which all others are counted, with a profile that flattens:
    what flows along and across carries the same temperature, so none can change."""
    rows = "".join(f"{2e-3 * x:.6g},{1 - 0.9 * x**4:.6g},303.15\n" for x in np.linspace(0, 1, 41))
    (tmp_path / "warm.csv").write_text("r_m,velocity,temperature_K\n" + rows)
    flow = f'reynolds = 100\ndirection = "{direction}"\ninlet_profile = {{ file = "{tmp_path / "warm.csv"}" }}'
    run = tubes.run(tubes.text(flow, sections=steps("insulated = true")), (8, 2, 2), (16, 8, 16))
    assert np.abs(run.flow.v).max() > 1e-3 * run.view.mean_velocity
    np.testing.assert_allclose(run.t, 10.0, rtol=1e-9)
