"""Forces on the fluid between two planes: pressure, momentum, wall shear and normal stress add up to nothing,
from velocities, pressures and the wall's viscosity alone."""

import numpy as np
import pytest

from axicfd.results.axial import stream_curves
from tests.laws import tubes

BARE = '[[layer]]\nstream = "water"\ndiameter = "4 mm"\n'
VARYING = tubes.FLUID.replace(
    'viscosity     = "2 mPa s"', 'viscosity = { at = "20 degC", value = "60 mPa s", exponent = "0.04 1/K" }'
)
SECTIONS = """
[[section]]
name = "lead-in"
length = "20 mm"
outside = { insulated = true }
[[section]]
name = "jacket"
length = "40 mm"
outside = { film_coefficient = "800 W/m^2/K", ambient = "60 degC" }
"""


@pytest.mark.parametrize("fluid, reynolds", [(tubes.FLUID, 100), (VARYING, 3)])
@pytest.mark.parametrize("direction", ["+z", "-z"])
def test_forces_between_two_stations_of_cells(fluid, reynolds, direction):
    """The momentum equations summed over radial lines, rebuilt here: their convection by the scheme's own
    face values is of second order in the comparison, which uses the means of neighbouring faces."""
    flow = f'reynolds = {reynolds}\ndirection = "{direction}"\ninlet_profile = "developed"'
    run = tubes.run(tubes.text(flow, fluid, BARE, SECTIONS), (16,), (60, 120))
    sign = 1.0 if direction == "+z" else -1.0
    turn = (lambda x: x) if direction == "+z" else (lambda x: x[::-1])
    u, p, t = sign * turn(run.flow.u), turn(run.flow.p), turn(run.t)
    grid, view = run.grid, run.view
    area, dz = grid.area_z, turn(grid.dz)
    uc = 0.5 * (u[1:] + u[:-1])
    momentum = (view.density * uc**2 * area).sum(axis=1)
    pressure = (p * area).sum(axis=1)
    viscosity = view.fluid.viscosity(t + view.t_in)
    normal = (2.0 * viscosity * (u[1:] - u[:-1]) / dz[:, None] * area).sum(axis=1)
    shear = turn(run.flow.viscosity_wall) * u[:, -1] / (grid.r[-1] - grid.rc[-1])
    length = np.zeros(grid.nz + 1)
    length[1:-1] = np.diff(view.zc)
    drag = np.cumsum(shear * 2.0 * np.pi * grid.r[-1] * length)
    total = momentum + pressure - normal + drag[:-1]
    scale = drag[-2]
    assert np.abs(total - total[0]).max() < 2e-3 * scale
    # the parts are not small, so that their sum says something
    if fluid is VARYING:
        slope = np.gradient(drag)
        assert slope[20:-1].max() > 2.0 * slope[20:-1].min()


def test_wall_shear_of_the_curves_carries_the_pressure_drop():
    """Far from the inlet: falling pressure times area = shear times wall, both read from the axial curves."""
    run = tubes.run(tubes.text("reynolds = 100", layers=BARE, sections=SECTIONS), (16,), (40, 80))
    c = stream_curves(run.view)
    half = slice(60, -1)
    drop = (c["pressure_Pa"][60] - c["pressure_Pa"][-2]) * np.pi * 2e-3**2
    drag = np.trapezoid(c["wall_shear_stress_Pa"][half], c["z_m"][half]) * np.pi * 4e-3
    assert drag == pytest.approx(drop, rel=3e-3)
    # the friction factor is 8 tau / (rho U^2), Re f = 64 in the developed part (Hagen-Poiseuille)
    assert 100 * c["friction_factor_darcy"][-2] == pytest.approx(64.0, rel=6e-3)
    assert np.all(c["wall_shear_stress_Pa"][half] > 0.0)
