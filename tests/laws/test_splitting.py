"""What a tube is called in the case file changes nothing: a layer cut in two, a section cut in two, a void
around it, the tube written upside down. On the same faces the answers agree to round-off."""

import numpy as np
import pytest

from tests.laws import tubes

MESH = (8, 4, 8), (16, 32, 16)
VARYING = """
density       = "1000 kg/m^3"
specific_heat = { temperature = ["0 degC", "100 degC"], value = ["3900 J/kg/K", "4300 J/kg/K"] }
conductivity  = { temperature = ["0 degC", "100 degC"], value = ["0.5 W/m/K", "0.6 W/m/K"] }
viscosity     = { at = "20 degC", value = "20 mPa s", exponent = "0.03 1/K" }
"""
SOLIDS = tubes.SOLIDS.replace(
    '"0.3 W/m/K"', '{ temperature = ["0 degC", "200 degC"], value = ["0.3 W/m/K", "0.5 W/m/K"] }'
)
ENDS = """
[ends]
first.sleeve = { temperature = "30 degC", contact_resistance = "1e-3 m^2 K/W" }
last.sleeve = { heat = "0.2 W" }
"""
BASE = {"fluid": VARYING, "solids": SOLIDS, "viscous": True}


def same(found: tubes.Run, expected: tubes.Run, columns=slice(None), turned=False) -> None:
    t = found.t[::-1] if turned else found.t
    assert tubes.relative(t[:, columns], expected.t) < 1e-9
    p, u = found.flow.p, found.flow.u
    if turned:
        p, u = p[::-1], -u[::-1]
    assert tubes.relative(u, expected.flow.u) < 1e-9
    assert tubes.relative(p, expected.flow.p) < 1e-9
    keys = "pressure_drop_Pa", "heat_gain_W", "outlet_temperature_K", "hottest_wetted_wall_K"
    for key in keys:
        assert found.summary["stream"]["water"][key] == pytest.approx(
            expected.summary["stream"]["water"][key], rel=1e-9
        )


@pytest.fixture(scope="module")
def whole() -> tubes.Run:
    return tubes.run(tubes.text(**BASE), *MESH)


def test_layer_cut_in_two(whole):
    cut = tubes.THICK_WALL.replace(
        'thickness = "2 mm"\ncontact_resistance = "3e-4 m^2 K/W"',
        'thickness = "1 mm"\ncontact_resistance = "3e-4 m^2 K/W"\n'
        '[[layer]]\nname = "outer half"\nsolid = "plastic"\nthickness = "1 mm"',
    )
    found = tubes.run(tubes.text(layers=cut, **BASE), (8, 4, 4, 4), MESH[1])
    same(found, whole)


def test_layer_with_a_source_cut_in_two():
    """The source is shared by volume; the two halves hold it in the exact radial term of each cell."""
    one = tubes.THICK_WALL + 'heat_per_volume = "4 MW/m^3"\n'
    two = one.replace(
        'thickness = "2 mm"\ncontact_resistance = "3e-4 m^2 K/W"\n',
        'thickness = "1 mm"\ncontact_resistance = "3e-4 m^2 K/W"\nheat_per_volume = "4 MW/m^3"\n'
        '[[layer]]\nname = "outer half"\nsolid = "plastic"\nthickness = "1 mm"\n',
    )
    same(
        tubes.run(tubes.text(layers=two, **BASE), (8, 4, 4, 4), MESH[1]),
        tubes.run(tubes.text(layers=one, **BASE), *MESH),
    )


def test_heated_section_cut_in_two(whole):
    cut = tubes.SECTIONS.replace('length  = "30 mm"', 'length  = "15 mm"').replace('"5 W"', '"2.5 W"')
    heater = 'name    = "heater"\nlength  = "15 mm"\noutside = { heat = "2.5 W" }\n'
    assert heater in cut
    cut = cut.replace(heater, heater + "[[section]]\n" + heater.replace('"heater"', '"heater again"'))
    found = tubes.run(tubes.text(sections=cut, **BASE), MESH[0], (16, 16, 16, 16))
    same(found, whole)


def test_section_with_the_same_condition_cut_in_two(whole):
    bath = 'name    = "bath"\nlength  = "40 mm"'
    half = bath.replace("40 mm", "20 mm")
    rest = tubes.SECTIONS.partition(bath)[2]
    cut = tubes.SECTIONS.replace(bath, half) + "[[section]]\n" + half.replace('"bath"', '"bath again"') + rest
    same(tubes.run(tubes.text(sections=cut, **BASE), MESH[0], (16, 32, 8, 8)), whole)


@pytest.mark.parametrize("place", ["outside", "everywhere"])
def test_void_around_the_tube_of_an_insulated_section(place):
    """A void outside is the insulation: it changes nothing where the section is insulated anyway."""
    insulated = tubes.SECTIONS.replace('{ heat = "5 W" }', "{ insulated = true }").replace(
        '{ film_coefficient = "300 W/m^2/K", ambient = "40 degC" }', "{ insulated = true }"
    )
    heated = insulated + 'generated = { sleeve = "4 W" }\n'
    void = '[[layer]]\nname = "vacuum"\nvoid = true\nthickness = "1 mm"\n'
    expected = tubes.run(tubes.text(sections=heated, **BASE), *MESH)
    if place == "everywhere":
        found = tubes.run(tubes.text(sections=heated, layers=tubes.THICK_WALL + void, **BASE), (*MESH[0], 1), MESH[1])
        same(found, expected, slice(0, 20))
        return
    stack = (tubes.THICK_WALL + void).replace("[[layer]]", "[[section.layer]]")
    first, _, others = heated.partition('[[section]]\nname    = "heater"')
    found = tubes.run(
        tubes.text(sections=first + stack + '[[section]]\nname    = "heater"' + others, **BASE),
        (*MESH[0], 1),
        MESH[1],
    )
    # the change of the stack counts as a joint for the scheme, as does the joint of the case without the void
    assert tubes.relative(found.t[:, :20], expected.t) < 5e-3


def mirrored(case_text: str) -> str:
    """The same tube seen from the other side: sections, ends and stream reversed."""
    parts = case_text.split("[[section]]")
    head, tail = parts[0], parts[-1]
    last, mark, rest = tail.partition("[ends]")
    middle = [*parts[1:-1], last]
    ends = rest.replace("first.", "FIRST").replace("last.", "first.").replace("FIRST", "last.")
    turned = head + "".join("[[section]]" + part.rstrip() + "\n" for part in reversed(middle)) + mark + ends
    return turned.replace('mass_flow = "1 g/s"', 'mass_flow = "1 g/s"\ndirection = "-z"')


@pytest.mark.parametrize("profile", ["flat", "developed"])
def test_tube_written_upside_down(profile):
    flow = f'mass_flow = "1 g/s"\ninlet_profile = "{profile}"'
    straight = tubes.text(flow, rest=ENDS, **BASE)
    expected = tubes.run(straight, *MESH)
    found = tubes.run(mirrored(straight), MESH[0], MESH[1][::-1])
    same(found, expected, turned=True)
    a, b = expected.summary, found.summary
    for one, other in ("first", "last"), ("last", "first"):
        assert a["ledger"]["ends"][one] == pytest.approx(b["ledger"]["ends"][other], rel=1e-9)
    for name in a["section"]:
        assert a["section"][name]["heat_in_W"] == pytest.approx(b["section"][name]["heat_in_W"], rel=1e-9, abs=1e-12)
    stream_a, stream_b = a["stream"]["water"], b["stream"]["water"]
    place = found.layout.length - stream_b["hottest_wetted_wall_z_m"]
    assert place == pytest.approx(stream_a["hottest_wetted_wall_z_m"], rel=1e-6)
    assert stream_b["largest_wall_shear_stress_Pa"] == pytest.approx(stream_a["largest_wall_shear_stress_Pa"], rel=1e-9)


def test_curves_of_the_tube_upside_down():
    from axicfd.results.axial import stream_curves

    straight = tubes.text(rest=ENDS, **BASE)
    a, b = tubes.run(straight, *MESH), tubes.run(mirrored(straight), MESH[0], MESH[1][::-1])
    one, other = stream_curves(a.view), stream_curves(b.view)
    assert np.all(np.diff(other["z_m"]) > 0.0)
    for name, column in one.items():
        if name in ("z_m", "reverse"):
            continue
        turned = other[name][::-1] * (-1.0 if name == "axial_conduction_W" else 1.0)
        assert np.array_equal(np.isnan(column), np.isnan(turned)), name
        np.testing.assert_allclose(turned, column, rtol=1e-7, atol=1e-9 * np.nanmax(np.abs(column)), err_msg=name)


@pytest.mark.parametrize("key", ["heat_flux", "film"])
def test_table_along_a_later_section(key):
    """A table that says the same all along is the plain value, and one cut in two at a joint is the whole one."""
    flux = "heat_flux = {{ z = [{z}], value = [{v}] }}"
    film = 'film_coefficient = "200 W/m^2/K", ambient = {{ z = [{z}], value = [{v}] }}'
    way, unit = (flux, "kW/m^2") if key == "heat_flux" else (film, "degC")

    def section(name, length, *points):
        z = ", ".join(f'"{z} mm"' for z, _ in points)
        v = ", ".join(f'"{value} {unit}"' for _, value in points)
        return f'[[section]]\nname = "{name}"\nlength = "{length} mm"\noutside = {{ {way.format(z=z, v=v)} }}\n'

    lead = '[[section]]\nname = "in"\nlength = "20 mm"\noutside = { insulated = true }\n'
    one = lead + section("all", 40, (0, 30), (20, 50), (40, 24))
    two = lead + section("a", 20, (0, 30), (20, 50)) + section("b", 20, (0, 50), (20, 24))
    whole = tubes.run(tubes.text(sections=one), (8, 4, 4), (8, 32))
    halves = tubes.run(tubes.text(sections=two), (8, 4, 4), (8, 16, 16))
    assert halves.heat.outside.sum() == pytest.approx(whole.heat.outside.sum(), rel=1e-3)
    assert tubes.relative(halves.t, whole.t) < 0.02
    watts = 2 * np.pi * 5e-3 * 0.02 * (40e3 + 37e3)
    if key == "heat_flux":
        assert whole.heat.outside.sum() == pytest.approx(watts, rel=1e-12)
