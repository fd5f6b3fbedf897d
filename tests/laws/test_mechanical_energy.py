"""Mechanical energy: the pressure's power is spent on viscous heat and on the rise of the kinetic energy's
flux.

    sum u p dA (inlet) - sum u p dA (outlet)  =  viscous heat  +  change of  sum rho u^3 / 2 dA

Holds for any viscosity field. Exact on every mesh where the flow is developed; of second order where it
develops (with a smooth inlet profile: a flat one is singular at the wall).
"""

import numpy as np
import pytest

from axicfd.results import lines
from tests.laws import tubes

BARE = '[[layer]]\nstream = "water"\ndiameter = "4 mm"\n'
VARYING = tubes.FLUID.replace(
    'viscosity     = "2 mPa s"', 'viscosity = { at = "20 degC", value = "60 mPa s", exponent = "0.04 1/K" }'
)


def defect(run: tubes.Run) -> float:
    """What is missing in the balance, over the pressure's power."""
    f, grid, view = run.flow, run.grid, run.view
    area = grid.area_z[slice(*grid.streams["water"])]
    inlet_pressure = lines.to_first_plane(f.p, grid.zc, 0.0)
    power = float((inlet_pressure * f.u[0] * area).sum())  # the outlet plane has p = 0
    kinetic = [float((0.5 * view.density * f.u[i] ** 3 * area).sum()) for i in (0, -1)]
    # what the shear in the outlet plane gives away where fluid still moves across
    j0, j1 = grid.streams["water"]
    viscosity = view.fluid.viscosity(0.5 * (run.t[-1, j0 + 1 : j1] + run.t[-1, j0 : j1 - 1]) + view.t_in)
    shear = float((viscosity * np.diff(f.u[-1]) * f.v[-1, 1:-1] * 2 * np.pi * grid.r[j0 + 1 : j1]).sum())
    return (power + shear - float(run.heat.viscous.sum()) - (kinetic[1] - kinetic[0])) / power


@pytest.mark.parametrize("radial", [4, 16])
@pytest.mark.parametrize("direction", ["+z", "-z"])
def test_exact_for_a_developed_flow(radial, direction):
    flow = f'reynolds = 100\ninlet_profile = "developed"\ndirection = "{direction}"'
    section = '[[section]]\nname = "all"\nlength = "40 mm"\noutside = { insulated = true }\n'
    run = tubes.run(tubes.text(flow, layers=BARE, sections=section, viscous=True), (radial,), (16,))
    if direction == "-z":
        drop = run.flow.p[-1, 0] + 0.5 * (run.flow.p[-1, 0] - run.flow.p[-2, 0])
    else:
        drop = run.flow.p[0, 0] + 0.5 * (run.flow.p[0, 0] - run.flow.p[1, 0])
    power = run.view.mass_flow / run.view.density * drop
    assert run.heat.viscous.sum() == pytest.approx(power, rel=1e-8)
    # and power is that of Poiseuille's law, 8 mu U L / R^2, within the mesh
    u = run.view.mean_velocity
    assert drop == pytest.approx(8 * 2e-3 * u * 0.04 / 2e-3**2, rel=0.6 / radial**1.5)
    # heat that ends up in the stream
    assert run.summary["stream"]["water"]["heat_gain_W"] == pytest.approx(power, rel=1e-8)


def test_where_viscosity_falls_along_the_wall():
    """Developed at the inlet, then fluid near the wall falls to half its viscosity and back: flow across, all
    stresses."""
    z = ", ".join(f'"{z} mm"' for z in (0, 7.5, 15, 22.5, 30, 37.5, 45, 52.5, 60))
    film = ", ".join(f'"{h} W/m^2/K"' for h in (0, 117, 400, 683, 800, 683, 400, 117, 0))
    outside = f'film_coefficient = {{ z = [{z}], value = [{film}] }}, ambient = "60 degC"'
    section = f'[[section]]\nname = "all"\nlength = "60 mm"\noutside = {{ {outside} }}\n'
    case = tubes.text('reynolds = 2\ninlet_profile = "developed"', VARYING, BARE, section, viscous=True)
    runs = [tubes.run(case, (n,), (6 * n,), levels=levels) for n, levels in ((8, 2), (16, 3), (32, 4))]
    assert runs[-1].flow.viscosity_wall.min() < 0.6 * runs[-1].flow.viscosity_wall.max()
    found = [abs(defect(run)) for run in runs]
    assert found[0] < 1e-4 and found[0] / found[2] > 9.0, found


def test_where_a_peaked_profile_flattens(tmp_path):
    """(1 - x^2)^2 has 1.35 times the kinetic energy of the developed profile to lose. It has no shear at the
    wall in the inlet plane, so the corner is not quite smooth and the order is reached on fine meshes
    only."""
    r = np.linspace(0.0, 1.0, 4001)  # finely sampled: it is read with straight lines between points
    rows = "".join(f"{2e-3 * x:.12g},{(1 - x**2) ** 2:.12g},293.15\n" for x in r)
    (tmp_path / "inlet.csv").write_text("r_m,velocity,temperature_K\n" + rows)
    flow = f'reynolds = 80\ninlet_profile = {{ file = "{tmp_path / "inlet.csv"}" }}'
    section = '[[section]]\nname = "all"\nlength = "20 mm"\noutside = { insulated = true }\n'
    case = tubes.text(flow, layers=BARE, sections=section, viscous=True)
    coarse, fine = (abs(defect(tubes.run(case, (n,), (6 * n,), levels=k))) for n, k in ((16, 3), (64, 5)))
    assert coarse < 3e-3 and coarse / fine > 6.0, (coarse, fine)


def test_viscous_heat_is_left_out_when_it_is_switched_off():
    section = '[[section]]\nname = "all"\nlength = "40 mm"\noutside = { insulated = true }\n'
    run = tubes.run(tubes.text(sections=section, layers=BARE, viscous=False), (8,), (16,))
    assert np.abs(run.t).max() < 1e-12 and not run.heat.viscous.any()


def test_adiabatic_gas_keeps_its_temperature():
    """Pressure work takes what viscous heat gives: an ideal gas (density ~ 1/T) leaves as warm as it came.

    Only the change of its kinetic energy is left, here none: the flow is developed."""
    gas = """
density       = { temperature = ["200 K", "290 K", "293.15 K", "296 K", "400 K"], value = ["RHO"] }
specific_heat = "1006 J/kg/K"
conductivity  = "0.026 W/m/K"
viscosity     = "18 uPa s"
"""
    points = ", ".join(f'"{1.2 * 293.15 / t:.12g} kg/m^3"' for t in (200.0, 290.0, 293.15, 296.0, 400.0))
    gas = gas.replace('"RHO"', points)
    section = '[[section]]\nname = "all"\nlength = "300 mm"\noutside = { insulated = true }\n'
    flow = 'reynolds = 500\ninlet_profile = "developed"'
    layers = BARE.replace("4 mm", "1 mm")
    run = tubes.run(tubes.text(flow, gas, layers, section, viscous=True), (12,), (64,))
    alone = float(run.heat.viscous.sum() / (run.view.mass_flow * 1006.0))
    assert alone > 0.5
    assert abs(run.summary["stream"]["water"]["outlet_temperature_K"] - 293.15) < 0.01 * alone
