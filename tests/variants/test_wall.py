"""The three cases of a wall, and what follows from their differences."""

import math

import pytest

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.case.write import to_toml
from axicfd.errors import AxicfdError
from axicfd.mesh.build import family
from axicfd.solver import boundary
from axicfd.variants.contrast import NO, OPEN, YES
from axicfd.variants.wall import (
    ACROSS_ONLY,
    IN_FULL,
    NO_WALL,
    conduction_number,
    radial_resistance_only,
    wall_effect,
    without_wall,
)
from tests.variants.tubes import TEXT, effect, tube


def with_layer(words, text=TEXT):
    """The tube with a further layer around it."""
    start = '[[section]]\nname    = "lead-in"'
    return load(text.replace(start, f'[[layer]]\n{words}\nthickness = "1 mm"\n{start}').replace('"outside"', '"axis"'))


def of(found, path):
    return next(d for d in found.differences if d.of.path == path)


@pytest.mark.parametrize(
    "outside",
    [
        {"heat_flux": 700.0},
        {"heat": 3.0, "film_coefficient": 20.0, "ambient": 300.0},
        {"heat_per_length": {"z": [0.0, 0.02], "value": [10.0, 30.0]}},
        {"temperature": 350.0, "contact_resistance": 2e-4},
        {"film_coefficient": {"z": [0.0, 0.02], "value": [10.0, 30.0]}, "ambient": 350.0},
        {"temperature": 350.0},
    ],
)
def test_the_bore_gets_the_watts_and_resistances_per_length_of_the_outside(outside):
    """Exact: the same arrays of heat, temperature and resistance per station."""
    case = tube().replace({"section.heated.outside": outside})
    bare = without_wall(case)
    assert {p.kind for s in layout(bare).sections for p in s.layers} == {"stream"}
    meshes = family(case, layout(case))
    there = boundary.outside(case, meshes.grid(4), 293.15)
    here = boundary.outside(bare, family(bare, layout(bare)).like(meshes).grid(4), 293.15)
    for name in ("brought", "temperature", "resistance"):
        assert getattr(here, name) == pytest.approx(getattr(there, name), rel=1e-12), name


def test_heat_made_in_the_wall_comes_to_the_bore():
    case = tube().replace({"section.heated.outside": {"insulated": True}, "section.heated.generated": {"tube": 2.0}})
    assert without_wall(case).section[1].outside.heat_per_length == pytest.approx(100.0)  # 2 W over 20 mm


def test_heat_made_behind_a_contact_warms_the_plate_it_has_to_pass():
    """Heat q' at a bore that faces a plate through R'' adds q'' R'' to the plate: series of resistances."""
    case = tube().replace(
        {
            "section.heated.outside": {"temperature": 350.0, "contact_resistance": 2e-4},
            "section.heated.generated": {"tube": 2.0},
        }
    )
    found = without_wall(case).section[1].outside
    contact = 2e-4 * 1.0 / 1.4  # per area of the bore
    assert found.contact_resistance == pytest.approx(contact)
    assert found.temperature == pytest.approx(350.0 + 100.0 / (2 * math.pi * 1e-3) * contact)


def test_what_lies_behind_a_void_does_not_reach_the_bore():
    insulated = TEXT.replace('{ heat_flux = "1 kW/m^2" }', '{ insulated = true }\ngenerated = { tube = "1 W" }')
    case = with_layer("void = true", insulated)
    assert without_wall(case).section[1].outside.heat_per_length == pytest.approx(50.0)


def test_limits_are_left_to_the_case_in_full_and_combinations_with_a_layer_to_those_that_have_it():
    case = tube().replace(
        {
            "quantity.above": {"plus": ["layer.tube.hottest"], "minus": ["stream.liquid.inlet_temperature"]},
            "quantity.warmed": {"plus": ["sensor.skin"], "minus": ["stream.liquid.inlet_temperature"]},
            "limits": {"quantity.above": {"below": 60.0}},
        }
    )
    bare = without_wall(case)
    assert list(bare.quantity) == ["warmed"] and not bare.limits and not radial_resistance_only(case).limits
    found = wall_effect(case)
    assert of(found.axial, "quantity.warmed").change.value == pytest.approx(
        of(found.axial, "sensor.skin.temperature").change.value
    )
    assert of(found.axial, "quantity.above").of.label == "above"
    assert "quantity.above" not in [d.of.path for d in found.radial.differences]


def test_the_variants_stand_alone_as_case_files():
    for variant in (radial_resistance_only(tube()), without_wall(tube())):
        assert load(to_toml(variant)) == variant


def test_one_layer_alone_loses_its_conduction_along_z():
    ends = {"ends.first.tube": {"temperature": 300.0}, "ends.first.sleeve": {"temperature": 300.0}}
    case = with_layer('name = "sleeve"\nsolid = "copper"').replace(ends)
    cut = radial_resistance_only(case, "sleeve")
    metal, sleeve = (cut.solid_of(layer.solid) for layer in cut.layer[1:])
    assert float(metal.conductivity_z(300.0)) == 100.0
    assert float(sleeve.conductivity_z(300.0)) == 0.0 and float(sleeve.conductivity_r(300.0)) == 401.0
    assert cut.ends.of("first", "tube").temperature == 300.0 and cut.ends.of("first", "sleeve").insulated


def test_one_layer_alone_leaves_the_ends_of_the_others_as_they_are():
    """A heat for all faces is shared by area: the other layer keeps its share."""
    case = with_layer('name = "sleeve"\nsolid = "copper"').replace({"ends.first": {"heat": 0.3}})
    face = radial_resistance_only(case, "tube").ends.of("first", "sleeve")
    areas = [p.area for p in layout(case).sections[0].layers[1:]]
    assert face.heat_flux == pytest.approx(0.3 / sum(areas))
    # a layer that does not reach an end has no face there
    bare = case.replace({"section.lead-in.layer": [{"stream": "liquid", "diameter": 2e-3}], "ends.first": None})
    assert radial_resistance_only(bare, "tube").ends.first["all"].insulated


def test_across_the_wall_the_difference_is_that_of_a_hollow_cylinder():
    """q' ln(r_o / r_i) / (2 pi k), exact; the bore does not feel a wall that only resists under a given flux."""
    found = effect().radial
    rise = 1000.0 * 1.4e-3 * math.log(1.4) / 100.0
    assert of(found, "layer.tube.hottest").change.value == pytest.approx(rise, rel=1e-4)
    assert of(found, "sensor.skin.temperature").change.value == pytest.approx(rise, rel=1e-4)
    assert abs(of(found, "stream.liquid.hottest_wetted_wall").change.value) < 1e-6


def test_all_the_heat_leaves_with_the_stream_whichever_way_the_wall_conducts():
    watts = 1000.0 * 2 * math.pi * 1.4e-3 * 0.02
    for name in (IN_FULL, ACROSS_ONLY, NO_WALL):
        assert effect().results[name]["stream.liquid.heat_gain_W"] == pytest.approx(watts, rel=1e-6)


def test_a_good_conductor_carries_heat_upstream_and_cools_the_hottest_place():
    found = effect().axial
    assert found.verdict == YES
    assert of(found, "stream.liquid.hottest_wetted_wall").change.value < 0.0
    upstream = of(found, "stream.liquid.heat_upstream")
    assert upstream.base == pytest.approx(0.0, abs=1e-12) and upstream.then > 0.0
    # what enters upstream of the heated part is what the section's ledger says
    tree = effect().results[IN_FULL].summary["section"]["lead-in"]
    assert upstream.then == pytest.approx(tree["heat_to_stream_W"]["liquid"])


def test_the_verdict_turns_where_care_crosses_the_difference():
    found = effect().axial
    most = max(abs(d.change.value) for d in found.differences if d.of.kind == "temperature")
    assert wall_effect(tube(), f"{0.9 * most} K").axial.verdict == YES
    for share, verdict in ((0.9, YES), (1.1, NO), (1.0, OPEN)):  # nothing has to be solved again
        assert effect().judged(f"{share * most} K").axial.verdict == verdict


def test_bars_of_differences_hold_those_of_a_finer_mesh():
    """The differences on four times the cells lie within the half-widths."""
    fine = wall_effect(tube().replace({"mesh.at_most": 12000}))
    for path in ("stream.liquid.hottest_wetted_wall", "layer.tube.hottest", "stream.liquid.heat_upstream"):
        coarse, better = (of(found.axial, path).change for found in (effect(), fine))
        assert abs(coarse.value - better.value) <= coarse.half_width + better.half_width
        assert better.half_width < coarse.half_width


def test_against_the_stream_the_mirror_image_gives_the_same():
    back = tube().replace({"stream.liquid.direction": "-z", "sensor": None})
    text = [section.model_dump(exclude_unset=True) for section in back.section[::-1]]
    found = wall_effect(back.replace({"section": text}))
    for path in ("stream.liquid.hottest_wetted_wall", "stream.liquid.heat_upstream"):
        assert of(found.axial, path).change.value == pytest.approx(of(effect().axial, path).change.value, rel=1e-5)


def test_the_axial_conduction_number_of_the_heated_length():
    """M = (k_w A_w / L) / (m cp): 100 W/m/K x pi (1.4^2 - 1) mm2 / 20 mm over 1e-2 m/s x pi mm2 x 1e6 J/m3/K."""
    want = 100.0 * (1.4**2 - 1.0) / 0.02 / (1e-2 * 1e6)
    assert conduction_number(tube(), layout(tube()), 1e-2 * math.pi * 1e-6 * 1000.0) == pytest.approx(want)
    assert effect().number == pytest.approx(want) and effect().predicted == YES


def test_a_single_layer_is_judged_without_the_bare_case():
    found = wall_effect(tube(), layer="tube")
    assert found.radial is None and NO_WALL not in found.results
    assert found.axial.name == "axial conduction in tube"
    whole = of(effect().axial, "layer.tube.hottest").change.value
    assert of(found.axial, "layer.tube.hottest").change.value == pytest.approx(whole, rel=1e-9)


def test_shows_itself_and_converts_to_plain_data():
    found = effect()
    assert "axial conduction in the wall: matters" in repr(found)
    tree = found.as_dict()
    entry = tree["axial_conduction"]["difference"]["stream.liquid.hottest_wetted_wall"]
    assert entry["difference"] == pytest.approx(entry["with"] - entry["without"], abs=1e-3)
    assert tree["axial_conduction_number"]["predicts"] == YES and tree["converged"]


def test_a_given_pressure_drop_gives_the_same_as_the_flow_it_drives():
    drop = effect().results[IN_FULL]["stream.liquid.pressure_drop_Pa"]
    found = wall_effect(tube().replace({"stream.liquid.pressure_drop": drop}))
    for path in ("stream.liquid.hottest_wetted_wall", "stream.liquid.heat_upstream"):
        assert of(found.axial, path).change.value == pytest.approx(of(effect().axial, path).change.value, rel=1e-4)
    assert found.number == pytest.approx(effect().number, rel=1e-4)


@pytest.mark.parametrize(
    "changes, layer, words",
    [
        ({"layer": [{"stream": "liquid", "diameter": 2e-3}]}, None, "has no wall"),
        ({}, "liner", "There are: tube"),
        ({"stream.liquid.mean_velocity": 0.0, "ends.first": {"temperature": 290.0}}, None, "Nothing flows"),
    ],
)
def test_what_has_no_answer_is_refused(changes, layer, words):
    with pytest.raises(AxicfdError, match=words):
        wall_effect(tube().replace(changes), layer=layer)
