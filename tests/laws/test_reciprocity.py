"""Reciprocity: what a source at one place does at another is what the same source there would do here.

Conduction: exact for any mesh, whatever the materials, contacts and directions. With a developed flow: the
response is exchanged when the flow is reversed as well (the adjoint of convection runs backwards; the inlet
plane, which brings in the enthalpy of its own temperature, and the outlet plane, through which nothing is
conducted, change roles), here up to the error of the mesh.
"""

import numpy as np
import pytest

from tests.laws import tubes

ROOM = "20 degC"
MESH = (8, 4, 4), (16, 16, 24)


def sections(heats, ambients=(ROOM, ROOM, ROOM), resistance=True) -> str:
    film = "film_coefficient = {h}, ambient = " if resistance else ""
    rows = []
    for name, length, heat, ambient, h in zip(
        "abc", (20, 30, 40), heats, ambients, ('"40 W/m^2/K"', '"200 W/m^2/K"', '"90 W/m^2/K"'), strict=True
    ):
        cooled = film.replace("{h}", h) + f'"{ambient}"' if resistance else ""
        condition = ", ".join(x for x in (f'heat = "{heat} W"', cooled) if x)
        rows.append(f'[[section]]\nname = "{name}"\nlength = "{length} mm"\noutside = {{ {condition} }}\n')
    return "".join(rows)


def at_rest(heats, ambients=(ROOM, ROOM, ROOM), rest="") -> tubes.Run:
    return tubes.run(tubes.text('mass_flow = "0 g/s"', sections=sections(heats, ambients), rest=rest), *MESH)


def surface_mean(run: tubes.Run, section: int) -> float:
    here = run.in_section(section)
    return float(np.average(run.surface()[here], weights=run.grid.dz[here]))


@pytest.mark.parametrize("a, b", [(0, 1), (0, 2), (1, 2)])
def test_heat_on_one_section_warms_the_other_as_much_as_the_reverse(a, b):
    one, other = ([3.0 if k == s else 0.0 for k in range(3)] for s in (a, b))
    there, here = surface_mean(at_rest(one), b), surface_mean(at_rest(other), a)
    assert there > 1e-3
    assert there == pytest.approx(here, rel=1e-10)


def test_a_warm_bath_here_draws_as_much_heat_there_as_the_reverse():
    rooms = [ROOM] * 3
    warm = [[*rooms[:k], "50 degC", *rooms[k + 1 :]] for k in range(3)]
    for a, b in (0, 1), (0, 2), (1, 2):
        out_b = at_rest([0.0] * 3, tuple(warm[a])).heat.outside
        out_a = at_rest([0.0] * 3, tuple(warm[b])).heat.outside
        run = at_rest([0.0] * 3)
        assert out_b[run.in_section(b)].sum() == pytest.approx(out_a[run.in_section(a)].sum(), rel=1e-10)
        assert out_b[run.in_section(b)].sum() < -1e-3


def test_end_faces_exchange_with_the_outside_alike():
    """Heat on the sleeve's first end face warms a section as heat on that section warms the end face."""
    ends = '[ends]\nfirst.sleeve = { heat = "%s W" }\n'
    from_end = at_rest([0.0] * 3, rest=ends % "2")
    from_section = at_rest([2.0, 0.0, 0.0], rest=ends % "0")
    grid = from_section.grid
    sleeve = slice(12, 16)
    # temperature of the end face: the node's, since no heat passes there
    face = float(np.average(from_section.t[0, sleeve], weights=grid.area_z[sleeve]))
    assert surface_mean(from_end, 0) == pytest.approx(face, rel=1e-10)


def test_response_is_exchanged_when_the_flow_runs_backwards():
    def warmed(direction, heats, section):
        flow = f'reynolds = 20\ninlet_profile = "developed"\ndirection = "{direction}"'
        case = tubes.text(flow, sections=sections(heats))
        return surface_mean(tubes.run(case, (16, 4, 4), (40, 60, 80)), section)

    downstream = warmed("+z", [0.0, 3.0, 0.0], 2), warmed("-z", [0.0, 0.0, 3.0], 1)
    upstream = warmed("+z", [0.0, 0.0, 3.0], 1), warmed("-z", [0.0, 3.0, 0.0], 2)
    assert downstream[0] == pytest.approx(downstream[1], rel=5e-4)
    assert upstream[0] == pytest.approx(upstream[1], rel=5e-4)
    assert downstream[0] > 1.2 * upstream[0]
