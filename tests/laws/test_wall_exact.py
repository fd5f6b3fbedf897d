"""Walls whose temperature depends on r alone: a row of resistances, exact on any mesh.

Closed forms of the cylinder with uniform generation (Carslaw & Jaeger 1959, 7.2; also from Fourier's law in
two lines). The stream is at rest, so all heat made in a layer leaves through the outside.
"""

import numpy as np
import pytest

from tests.laws import tubes

R = 2e-3, 3e-3, 5e-3, 5.5e-3  # bore, and outer radii of the layers
K = 12.0, 0.3, 150.0
CONTACT = 1e-4, 3e-4, 2e-4  # at the inner face of each layer
WATTS = 0.7, 2.0, 0.0
LENGTH, FILM, AMBIENT = 0.05, 250.0, 40.0
LAYERS = "[[layer]]\nstream = 'water'\ndiameter = '4 mm'\n" + "".join(
    f"[[layer]]\nname = '{name}'\nsolid = '{name}'\n"
    f"outer_diameter = '{2e3 * r} mm'\ncontact_resistance = '{c} m^2 K/W'\n"
    for name, r, c in zip(("metal", "plastic", "cover"), R[1:], CONTACT, strict=True)
)
SOLIDS = "".join(
    f"[solid.{name}]\nconductivity = '{k} W/m/K'\n" for name, k in zip(("metal", "plastic", "cover"), K, strict=True)
)
GENERATED = "generated = { metal = '0.7 W', plastic = '2 W' }\n"


def section(outside: str) -> str:
    return f"[[section]]\nname = 'all'\nlength = '{LENGTH} m'\noutside = {{ {outside} }}\n{GENERATED}"


def expected_profile(outside_resistance: float):
    """T - T_ambient [K] as a function of r from the outside inwards; outside_resistance [K/W] beyond the
    surface."""
    pieces = []
    surface = sum(WATTS) * outside_resistance
    for n in (2, 1, 0):
        r_in, r_out, k = R[n], R[n + 1], K[n]
        density = WATTS[n] / (np.pi * (r_out**2 - r_in**2) * LENGTH)
        from_within = sum(WATTS[:n]) / LENGTH

        def t(r, r_in=r_in, r_out=r_out, k=k, density=density, from_within=from_within, surface=surface):
            spread = (from_within - density * np.pi * r_in**2) * np.log(r_out / r) / (2 * np.pi * k)
            return surface + spread + density * (r_out**2 - r**2) / (4 * k)

        pieces.append((r_in, r_out, t))
        surface = t(r_in) + from_within * CONTACT[n] / (2 * np.pi * r_in)
    return pieces[::-1]


@pytest.mark.parametrize("cells", [(8, 1, 1, 1), (8, 2, 5, 3), (8, 8, 16, 2)])
@pytest.mark.parametrize("outside", ["film", "plate"])
def test_multilayer_wall_with_generation_and_contacts(cells, outside):
    area = 2 * np.pi * R[-1] * LENGTH
    if outside == "film":
        condition = f"film_coefficient = '{FILM} W/m^2/K', ambient = '{20 + AMBIENT} degC'"
        resistance = 1.0 / (FILM * area)
    else:
        condition = f"temperature = '{20 + AMBIENT} degC', contact_resistance = '2e-3 m^2 K/W'"
        resistance = 2e-3 / area
    case = tubes.text('mass_flow = "0 g/s"', layers=LAYERS, solids=SOLIDS, sections=section(condition))
    run = tubes.run(case, cells, (8,), levels=1)
    grid, pieces = run.grid, expected_profile(resistance)
    scale = pieces[0][2](R[0])
    for piece, (r_in, r_out, t) in zip(grid.pieces[1:], pieces, strict=True):
        nodes = run.t[:, piece.j0 : piece.j1] - AMBIENT
        assert np.abs(nodes - t(grid.rc[piece.j0 : piece.j1])).max() < 1e-10 * scale
        assert np.abs(run.heat.plus[:, piece.j0] - AMBIENT - t(r_in)).max() < 1e-10 * scale
        assert np.abs(run.heat.minus[:, piece.j1] - AMBIENT - t(r_out)).max() < 1e-10 * scale
    assert run.heat.outside.sum() == pytest.approx(-sum(WATTS), rel=1e-10)


def test_conductivity_linear_in_temperature():
    """Kirchhoff: the conductivity at the mean temperature carries the heat exactly, between nodes and to the
    faces."""
    solid = (
        "[solid.core]\nconductivity = '1e6 W/m/K'\n"
        "[solid.metal]\n"
        "conductivity = { temperature = ['0 degC', '200 degC'], value = ['1 W/m/K', '5 W/m/K'] }\n"
    )
    layers = (
        "[[layer]]\nstream = 'water'\ndiameter = '4 mm'\n"
        "[[layer]]\nsolid = 'core'\nthickness = '0.1 mm'\n"
        "[[layer]]\nname = 'wall'\nsolid = 'metal'\nthickness = '2.9 mm'\n"
    )
    watts, plate, contact = 30.0, 20.0, 1e-3
    outside = f"temperature = '{plate} degC', contact_resistance = '{contact} m^2 K/W'"
    sections = section(outside).replace(GENERATED, f"generated = {{ core = '{watts} W' }}\n")
    # integral of k dT from the surface to the core = Q ln(r_o / r_i) / (2 pi L), with k = 1 + 0.02 T[degC]
    surface = plate + watts * contact / (2 * np.pi * 5e-3 * LENGTH)
    integral = watts * np.log(5 / 2.1) / (2 * np.pi * LENGTH)
    inner = (np.sqrt((1 + 0.02 * surface) ** 2 + 0.04 * integral) - 1) / 0.02
    assert inner > 30.0 + surface
    for cells in 1, 4, 9:
        case = tubes.text('mass_flow = "0 g/s"', layers=layers, solids=solid, sections=sections)
        run = tubes.run(case, (8, 1, cells), (8,), levels=1)
        wall = run.grid.pieces[2]
        assert np.abs(run.heat.plus[:, wall.j0] + 20.0 - inner).max() < 1e-8 * inner
        assert np.abs(run.heat.minus[:, wall.j1] + 20.0 - surface).max() < 1e-8 * inner
